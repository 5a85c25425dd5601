/** Geometry kept in files: taken where nothing has changed, to the same bytes; measured anew where something has. */
import { cpSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { newRoom, scarp } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))
const town = join(room, 'town')
const study = readFileSync('boundaries/quillhaven/study.yaml', 'utf8')
const checksOff = study
  .replace(/checks: .*/, 'checks: none')
  .replace('[log_rent, vacant]', '[log_rent]')
  .replace('checks:', 'estimation: {bandwidth: 400}\nchecks:')

async function run(name: string, text: string): Promise<{ results: Record<string, unknown>; said: string }> {
  writeFileSync(join(town, `${name}.yaml`), text)
  const said = await scarp(['run', `town/${name}.yaml`, '--out', name], { cwd: room })
  expect(said).toMatchObject({ code: 0, stderr: '' })
  const { started: _, seconds: __, ...results } = JSON.parse(readFileSync(join(room, name, 'results.json'), 'utf8'))
  return { results, said: said.stdout }
}

const frozen = (file: string, text = checksOff) => text.replace('  unit: m\n', `  unit: m\n  measured: ${file}\n`)
const without = ({ geometry: _, ...results }: Record<string, unknown>) => results

describe('frozen geometry', () => {
  let plain: Record<string, unknown>
  beforeAll(async () => {
    cpSync('boundaries/quillhaven', town, { recursive: true })
    const leases = readFileSync('boundaries/quillhaven/leases.csv', 'utf8').split('\n')
    writeFileSync(join(town, 'leases.csv'), `${leases.slice(0, 3001).join('\n')}\n`)
    plain = (await run('plain', checksOff)).results
    for (const file of ['placed.parquet', 'placed.csv', 'placed.geojson']) {
      const said = await scarp(['measure', 'town/plain.yaml', '--out', `town/${file}`], { cwd: room })
      expect(said).toMatchObject({ code: 0, stderr: '' })
      expect(said.stdout).toContain(`the border it was measured against: town/${file}.lines`)
    }
  })

  it.each(['placed.parquet', 'placed.csv', 'placed.geojson'])('from %s gives the same results', async (file) => {
    const { results, said } = await run('again', frozen(file))
    expect(said).toContain(`geometry taken from ${file}`)
    expect(results.geometry).toEqual({ from: file, reused: true })
    expect(without(results)).toEqual(plain)
    expect(readFileSync(join(room, 'again', 'units.csv'), 'utf8')).toBe(
      readFileSync(join(room, 'plain', 'units.csv'), 'utf8'),
    )
  })

  it.each([
    ['the keep condition', (text: string) => text.replace('signed_year >= 2015', 'signed_year >= 2016'), 'keep was'],
    ['the length of pieces', (text: string) => text.replace('piece: 800', 'piece: 900'), 'piece_m was 800, and is 900'],
    ['the treated zones', (text: string) => text.replace('Foundry, ', ''), 'treated was'],
  ])('is left aside where %s differ', async (_, change, because) => {
    const { results, said } = await run('other', frozen('placed.parquet', change(checksOff)))
    expect(said).toContain('geometry measured anew, not taken from placed.parquet: ')
    expect(said).toContain(because)
    expect(without(results)).toEqual((await run('alone', change(checksOff))).results)
  })

  it('is left aside where zones, records or the placement have changed', async () => {
    for (const file of ['zones.geojson', 'leases.csv', 'placed.csv']) {
      const bytes = readFileSync(join(town, file))
      writeFileSync(join(town, file), Buffer.concat([bytes, Buffer.from('\n')]))
      const { results } = await run('changed', frozen('placed.csv'))
      expect(results.geometry).toMatchObject({ reused: false, because: expect.stringContaining(`${file} has changed`) })
      writeFileSync(join(town, file), bytes)
    }
  })

  it('serves rules that are applied afterwards, and their variants', async () => {
    const change = (text: string) => text.replace('  reach: 2500\n', '  reach: 1500\n  corner: 40\n')
    const { results } = await run('ruled', frozen('placed.parquet', change(checksOff)))
    expect(results.geometry).toMatchObject({ reused: true })
    expect(without(results)).toEqual((await run('ruled-alone', change(checksOff))).results)
  })

  it('carries no position of a unit in the .lines file, and refuses what is none', async () => {
    const lines = readFileSync(join(town, 'placed.csv.lines'), 'utf8')
    const [, ...rows] = readFileSync(join(town, 'leases.csv'), 'utf8').split('\n')
    const found = rows.filter((row) => row.split(',')[1] && lines.includes(row.split(',').slice(1, 3).join(',')))
    expect(found).toEqual([])
    writeFileSync(join(town, 'odd.csv'), 'a\n1\n')
    writeFileSync(join(town, 'odd.csv.lines'), '{}')
    writeFileSync(join(town, 'odd.yaml'), frozen('odd.csv'))
    const said = await scarp(['run', 'town/odd.yaml', '--out', 'odd'], { cwd: room })
    expect(said.code).toBe(2)
    expect(said.stderr).toContain('odd.csv.lines: line.measured: not a .lines file of this program')
  })
})

describe('a file without coordinates', () => {
  it('reruns every estimate that needs no map', async () => {
    const out = 'town/open.csv'
    const said = await scarp(['measure', 'town/plain.yaml', '--out', out, '--without-coordinates'], { cwd: room })
    expect(said).toMatchObject({ code: 0, stderr: '' })
    const [head] = readFileSync(join(room, out), 'utf8').split('\n')
    expect(head.split(',')).not.toEqual(expect.arrayContaining(['lon']))
    expect(head).not.toMatch(/\b(lon|lat|foot_lon|foot_lat)\b/)
    const text = `title: Harbour levy and rents in Quillhaven
records: {file: open.csv, id: lease, cluster: block}
outcomes: [log_rent]
line: {distance: x, name: line}
estimation: {bandwidth: 400}
pooling: {fixed_effects: true}
checks: none
`
    const { results } = await run('open', text)
    const plain = JSON.parse(readFileSync(join(room, 'plain', 'results.json'), 'utf8'))
    const numbers = ({ lines, pooled, target, comparison }: Record<string, unknown>) => ({
      lines,
      pooled,
      target,
      comparison,
    })
    const outcomes = results.outcomes as Record<string, unknown>[]
    expect(outcomes.map(numbers)).toEqual(plain.outcomes.map(numbers))
  })

  it('is no GeoJSON', async () => {
    const words = ['measure', 'town/plain.yaml', '--out', 'town/open.geojson', '--without-coordinates']
    const said = await scarp(words, { cwd: room })
    expect(said.code).toBe(2)
    expect(said.stderr).toContain('--without-coordinates: a GeoJSON file is made of them')
  })
})

describe('runners-up', () => {
  it('are nearer to no unit than its own piece, and of another pair', async () => {
    const said = await scarp(['measure', 'town/plain.yaml', '--out', 'town/second.csv', '--runner-up'], { cwd: room })
    expect(said).toMatchObject({ code: 0, stderr: '' })
    const [head, ...rows] = readFileSync(join(town, 'second.csv'), 'utf8').trimEnd().split('\n')
    const at = (name: string) => head.split(',').indexOf(name)
    const quoted = /("(?:[^"]|"")*"|[^,]*)(?:,|$)/g
    let seen = 0
    for (const row of rows.slice(0, 2000)) {
      const cells = [...row.matchAll(quoted)].map(([, cell]) => cell.replaceAll('"', ''))
      if (cells[at('runner_up')] === '') continue
      seen++
      expect(Number(cells[at('runner_up_m')])).toBeGreaterThanOrEqual(Number(cells[at('distance_m')]) - 1e-8)
      expect(cells[at('runner_up')].split(', piece')[0]).not.toBe(cells[at('nearest')].split(', piece')[0])
    }
    expect(seen).toBeGreaterThan(1800)
  })
})
