/** Placements kept in files whose zones, names and units are odd ones, that are written again, or were changed by hand. */
import { existsSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { borderStudy, newRoom, scarp, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

/** Names that a table may take for missing, a number, several cells, or none. */
const [west, east] = ['NA', '007, "Ost"']
const odd = ['X1,,50.01,8', 'X2,400,95,8', 'X3,11,50.01,8', 'X4,10,50.01,8', 'X5,9.99999997,50.013,8']
const study = borderStudy()
/** Zones that overlap by some 1.4 m, less than snap: units in the strip lie in both. */
const files = {
  'leases.csv': `${study['leases.csv']}${[...odd, ...odd].join('\n')}\n`,
  'zones.geojson': study['zones.geojson']
    .replace('"name":"West"', `"name":"${west}","rate":1`)
    .replace('"name":"East"', `"name":${JSON.stringify(east)},"rate":2`)
    .replace(
      '[[[10,50],[10.02,50],[10.02,50.02],[10,50.02],[10,50]]]',
      '[[[9.9999999,50],[10.02,50],[10.02,50.02],[9.9999999,50.02],[9.9999999,50]]]',
    ),
  'river.geojson': study['river.geojson'],
  'treated.yaml': study['study.yaml'].replace('treated: [East]', `treated: ['${east}']`),
  'outside.yaml': study['study.yaml'].replace('treated: [East]', `treated: ['${east}']\n  outside: untreated`),
  'dose.yaml': study['study.yaml'].replace('treated: [East]', 'dose: rate'),
}

const frozen = (name: string, placement: string) =>
  files[`${name}.yaml` as keyof typeof files].replace('  piece:', `  measured: ${placement}\n  piece:`)

async function run(name: string): Promise<{ results: Record<string, unknown>; units: string }> {
  const said = await scarp(['run', `${name}.yaml`, '--out', name, '--quiet'], { cwd: room })
  expect(said).toEqual({ code: 0, stdout: '', stderr: '' })
  const { started: _, seconds: __, ...results } = JSON.parse(readFileSync(join(room, name, 'results.json'), 'utf8'))
  return { results, units: readFileSync(join(room, name, 'units.csv'), 'utf8') }
}

beforeAll(() => writeFiles(room, files))

describe.each([
  ['treated zones', 'treated', ['csv', 'parquet']],
  ['land outside', 'outside', ['csv']],
  ['zones of unlike dose', 'dose', ['csv', 'geojson']],
])('a placement of %s, with odd names and units', (_, name, endings) => {
  it('serves as measuring would', async () => {
    const plain = await run(name)
    const { set_aside: reasons } = plain.results.placement as { set_aside: Record<string, number> }
    expect(reasons).toMatchObject({ 'position missing': 2, 'position out of range': 2 })
    for (const ending of endings) {
      const out = `${name}.${ending}`
      const measured = await scarp(['measure', `${name}.yaml`, '--out', out], { cwd: room })
      expect(measured).toMatchObject({ code: 0, stderr: '' })
      writeFileSync(join(room, `again-${name}.yaml`), frozen(name, out))
      const again = await run(`again-${name}`)
      expect(again.results).toEqual({ ...plain.results, geometry: { from: out, reused: true } })
      expect(again.units).toBe(plain.units)
    }
  })
})

describe('a placement of units in more than one zone', () => {
  it('is told by inspect as measured anew', async () => {
    const rows = readFileSync(join(room, 'treated.csv'), 'utf8').split('\n')
    expect(rows.filter((row) => row.includes('(several)')).length).toBeGreaterThan(0)
    const [first, again] = await Promise.all(
      ['treated.yaml', 'again-treated.yaml'].map((file) => scarp(['inspect', file], { cwd: room })),
    )
    expect(first.stdout).toMatch(/in more than one zone +\d/)
    expect(again.stdout).toBe(`${first.stdout}geometry taken from treated.parquet\n`)
  })
})

describe('a study that names its placement', () => {
  const words = ['measure', 'own.yaml', '--out', 'own.csv']
  beforeAll(() => writeFiles(room, { 'own.yaml': frozen('treated', 'own.csv') }))

  it('says how to write it, and writes it, once and again', async () => {
    const missing = await scarp(['run', 'own.yaml'], { cwd: room })
    expect(missing).toMatchObject({ code: 2, stdout: '' })
    expect(missing.stderr).toBe(
      'own.csv.lines: line.measured: there is no such file; write it: scarp measure own.yaml --out own.csv\n',
    )
    for (const _ of ['once', 'again']) expect(await scarp(words, { cwd: room })).toMatchObject({ code: 0, stderr: '' })
    expect((await run('own')).results.geometry).toEqual({ from: 'own.csv', reused: true })
  })

  it('does not write over what it reads, by whatever name', async () => {
    for (const out of ['leases.csv', 'zones.geojson', './river.geojson']) {
      const said = await scarp(['measure', 'own.yaml', '--out', out], { cwd: room })
      expect(said).toMatchObject({ code: 2, stdout: '' })
      expect(said.stderr).toContain('--out: it is one of the files read')
    }
    writeFileSync(join(room, 'twice.yaml'), frozen('treated', 'leases.csv'))
    const said = await scarp(['measure', 'twice.yaml', '--out', 'leases.csv'], { cwd: room })
    expect(said.stderr).toContain('--out: it is one of the files read')
    expect(readFileSync(join(room, 'leases.csv'), 'utf8')).toBe(files['leases.csv'])
  })

  it('does not trust lines that were changed by hand', async () => {
    const path = join(room, 'own.csv.lines')
    const text = readFileSync(path, 'utf8')
    writeFileSync(path, text.replace(/"startMetres":0\b/, '"startMetres":5'))
    const { results } = await run('own')
    expect(results.geometry).toMatchObject({ reused: false, because: 'own.csv.lines has changed since it was written' })
    writeFileSync(path, text)
    expect((await run('own')).results.geometry).toMatchObject({ reused: true })
  })
})

describe('a file without coordinates', () => {
  it('has none in any column, has no lines beside it, and is not said to hide where units are', async () => {
    const words = ['measure', 'treated.yaml', '--out', 'open.csv', '--runner-up', '--without-coordinates']
    const said = await scarp(words, { cwd: room })
    expect(said).toMatchObject({ code: 0, stderr: '' })
    expect(said.stdout).toContain('whoever has the zones learns from the distances how near to the border each unit is')
    expect(existsSync(join(room, 'open.csv.lines'))).toBe(false)
    const [head, ...rows] = readFileSync(join(room, 'open.csv'), 'utf8').trimEnd().split('\n')
    expect(head).toBe('row,lease,rent,zone,line,piece,side,x,distance_m,nearest,runner_up,runner_up_m,reason')
    expect(rows).toHaveLength(410)
    const positions = new Set(files['leases.csv'].split('\n').flatMap((row) => row.split(',').slice(1, 3)))
    const cells = rows.slice(0, 400).flatMap((row) => row.split(','))
    expect(cells.filter((cell) => cell.includes('.') && positions.has(cell))).toEqual([])
  })
})

describe('usage of measure', () => {
  it.each([
    ['a study file with zones', ['treated.yaml', '--zones', 'zones.geojson'], '--zones: given with a study file'],
    ['a study file with its own unit', ['treated.yaml', '--unit', 'km'], '--unit: given with a study file'],
    ['records without zones', ['leases.csv', '--treated', 'NA', '--position', 'lon,lat'], '--zones: missing'],
  ])('refuses %s', async (_, words, found) => {
    const said = await scarp(['measure', ...words, '--out', 'refused.csv'], { cwd: room })
    expect(said).toMatchObject({ code: 2, stdout: '' })
    expect(said.stderr).toContain(found)
    expect(said.stderr.trimEnd().split('\n')).toHaveLength(1)
  })
})
