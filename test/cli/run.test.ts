import { existsSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { borderStudy, bytesUnder, newRoom, type Said, scarp, scheduleStudy, scoreStudy, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

const resultsIn = (folder: string) => JSON.parse(readFileSync(join(folder, 'results.json'), 'utf8'))
/** What differs between two runs of one study: nothing else may. */
const withoutTime = (json: string) => json.replace(/"(started|seconds)": [^,]+,/g, '')

describe('scarp run', () => {
  let first: Said
  beforeAll(async () => {
    writeFiles(join(room, 'marrowdale'), scheduleStudy())
    writeFiles(join(room, 'grants'), scoreStudy())
    writeFiles(join(room, 'levy'), borderStudy())
    first = await scarp(['run', 'marrowdale/study.yaml'], { cwd: room })
  })

  it('leaves a full results folder, named after the study, and says about a dozen lines', () => {
    expect(first).toMatchObject({ code: 0, stderr: '' })
    const lines = first.stdout.trimEnd().split('\n')
    expect(lines.length).toBeGreaterThanOrEqual(5)
    expect(lines.length).toBeLessThanOrEqual(20)
    expect(readdirSync(join(room, 'marrowdale-results')).sort()).toEqual(
      [
        'checks.csv',
        'figures',
        'lines.csv',
        'pooled.csv',
        'report.html',
        'results.json',
        'study.resolved.yaml',
        'tables',
        'units.csv',
      ].sort(),
    )
  })

  it('finds the jump of 2 that the records were made with', () => {
    const { outcomes, ledger, placement } = resultsIn(join(room, 'marrowdale-results'))
    const { low, high } = outcomes[0].pooled.corrected
    expect(low).toBeLessThan(2)
    expect(high).toBeGreaterThan(2)
    expect(placement).toEqual({ read: 800, kept: 800, placed: 800, set_aside: {} })
    for (const step of ledger) {
      const left = Object.values<number>(step.reasons).reduce((sum, count) => sum + count, 0)
      expect(step.in - step.out).toBe(left)
    }
  })

  it('writes a row of units.csv for every unit', () => {
    const rows = readFileSync(join(room, 'marrowdale-results', 'units.csv'), 'utf8')
      .trimEnd()
      .split('\n')
    expect(rows[0]).toBe('id,line,side,x')
    expect(rows).toHaveLength(801)
    const pupils = readFileSync(join(room, 'marrowdale', 'pupils.csv'), 'utf8').split('\n')
    const cutoffs: Record<string, number> = { '2001north': 40, '2001south': 50, '2002north': 45, '2002south': 55 }
    for (const row of rows.slice(1)) {
      const cells = row.match(/("[^"]*"|[^,]+)/g)!
      const [grade, year, region] = pupils[Number(cells[0])].split(',')
      expect(Number(cells[3])).toBeCloseTo(Number(grade) - cutoffs[year + region], 9)
      expect(cells[2]).toBe(Number(cells[3]) >= 0 ? 'treated' : 'untreated')
    }
  })

  it('writes the same bytes again, but for started and seconds', async () => {
    const before = bytesUnder(join(room, 'marrowdale-results'))
    const json = readFileSync(join(room, 'marrowdale-results', 'results.json'), 'utf8')
    await scarp(['run', 'marrowdale/study.yaml', '--out', 'again'], { cwd: room })
    const after = bytesUnder(join(room, 'again'))
    expect(withoutTime(readFileSync(join(room, 'again', 'results.json'), 'utf8'))).toBe(withoutTime(json))
    const timed = ['results.json', 'report.html']
    for (const file of timed) for (const files of [before, after]) delete files[file]
    expect(after).toEqual(before)
    const page = (folder: string) =>
      readFileSync(join(room, folder, 'report.html'), 'utf8').replace(/<dt>(started|seconds)<\/dt><dd>[^<]*/g, '')
    expect(page('again')).toBe(page('marrowdale-results'))
  })

  it('can run its own study.resolved.yaml to the same numbers', async () => {
    const resolved = readFileSync(join(room, 'marrowdale-results', 'study.resolved.yaml'), 'utf8')
    writeFileSync(join(room, 'marrowdale', 'resolved.yaml'), resolved)
    const said = await scarp(['run', 'marrowdale/resolved.yaml', '--quiet'], { cwd: room })
    expect(said).toEqual({ code: 0, stdout: '', stderr: '' })
    const { outcomes } = resultsIn(join(room, 'resolved-results'))
    expect(outcomes).toEqual(resultsIn(join(room, 'marrowdale-results')).outcomes)
  })

  it('prints results.json and nothing else with --json', async () => {
    const said = await scarp(['run', 'grants/study.yaml', '--json'], { cwd: room })
    expect(said).toMatchObject({ code: 0, stderr: '' })
    expect(said.stdout).toBe(readFileSync(join(room, 'grants-results', 'results.json'), 'utf8'))
    expect(JSON.parse(said.stdout).format).toBe('scarp-results/1')
  })

  it('writes no colour and no progress where there is no terminal, whatever the environment asks', async () => {
    for (const env of [{ NO_COLOR: '1' }, { TERM: 'xterm-256color' }] as Record<string, string>[]) {
      const said = await scarp(['run', 'grants/study.yaml'], { cwd: room, env })
      expect(said.code).toBe(0)
      expect(said.stderr).toBe('')
      expect(said.stdout).not.toContain('\x1b')
    }
  })

  it('places units on the ground and keeps their coordinates out of everything but units.csv', async () => {
    const said = await scarp(['run', 'levy/study.yaml', '--quiet'], { cwd: room })
    expect(said).toEqual({ code: 0, stdout: '', stderr: '' })
    const folder = join(room, 'levy-results')
    const rows = readFileSync(join(folder, 'units.csv'), 'utf8').trimEnd().split('\n')
    expect(rows[0]).toBe('id,line,side,x,zone,piece,foot_lon,foot_lat,position_m')
    expect(rows).toHaveLength(401)
    expect(existsSync(join(folder, 'borders.geojson'))).toBe(true)
    const { outcomes } = resultsIn(folder)
    expect(outcomes[0].pooled.corrected.low).toBeLessThan(-1)
    expect(outcomes[0].pooled.corrected.high).toBeGreaterThan(-1)
    const lease = readFileSync(join(room, 'levy', 'leases.csv'), 'utf8')
      .split('\n')[1]
      .split(',')
    for (const file of Object.keys(bytesUnder(folder))) {
      if (file === 'units.csv') continue
      const text = readFileSync(join(folder, file), 'utf8')
      expect(text).not.toContain(lease[1])
      expect(text).not.toContain(`${lease[0]},`)
    }
  })

  it('writes what it knows and ends with 3 where nothing can be estimated', async () => {
    const study = scoreStudy()
    writeFiles(join(room, 'far'), { ...study, 'study.yaml': study['study.yaml'].replace('cutoff: 50', 'cutoff: 5000') })
    const said = await scarp(['run', 'far/study.yaml'], { cwd: room })
    expect(said.code).toBe(3)
    expect(said.stderr).toMatch(/^far\/study\.yaml: nothing can be estimated: .+; see far-results\n$/)
    expect(resultsIn(join(room, 'far-results')).outcomes[0].pooled.not_estimated).toBeTruthy()
  })
})

describe('help and version', () => {
  it('come at once, on standard output', async () => {
    const version = await scarp(['--version'], { cwd: room })
    expect(version).toEqual({
      code: 0,
      stdout: `${JSON.parse(readFileSync('package.json', 'utf8')).version}\n`,
      stderr: '',
    })
    const help = await scarp(['--help'], { cwd: room })
    expect(help).toMatchObject({ code: 0, stderr: '' })
    for (const name of ['run', 'inspect', 'measure']) expect(help.stdout).toMatch(new RegExp(`^  ${name} `, 'm'))
  })
})
