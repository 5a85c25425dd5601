/** What leaves with a report: no id and no position of a unit, under any rule that reads them. */
import { cpSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { newRoom, scarp } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

/** Only these say where single units are; they are meant for the person who has the records. */
const aboutUnits = ['units.csv']

interface Unit {
  readonly id: string
  readonly lon: string
  readonly lat: string
}

let units: Unit[]
let files: { readonly path: string; readonly text: string }[]

beforeAll(async () => {
  cpSync('boundaries/quillhaven', join(room, 'town'), { recursive: true })
  const [head, ...rows] = readFileSync(join(room, 'town', 'leases.csv'), 'utf8')
    .trimEnd()
    .split('\n')
  const names = head.split(',')
  const marked = rows.map((row, i) => `${row},tenant#${i}#`)
  writeFileSync(join(room, 'town', 'leases.csv'), `${head},tenant\n${marked.join('\n')}\n`)
  const at = (name: string) => names.indexOf(name)
  units = rows
    .map((row, i) => ({ cells: row.split(','), id: `tenant#${i}#` }))
    .map(({ cells, id }) => ({ id, lon: cells[at('lon')], lat: cells[at('lat')] }))
    .filter(({ lon, lat }) => lon !== '' && lat !== '')
  const study = readFileSync(join(room, 'town', 'study.yaml'), 'utf8')
    .replace('id: lease', 'id: tenant')
    .replace('  barriers:', '  along: 500\n  corner: 30\n  repeated_points: {cap: 5}\n  barriers:')
  writeFileSync(join(room, 'town', 'study.yaml'), `${study}variants:\n  wide: {estimation: {bandwidth: {scale: 2}}}\n`)
  const said = await scarp(['run', 'town/study.yaml', '--out', 'out', '--quiet'], { cwd: room })
  expect(said).toEqual({ code: 0, stdout: '', stderr: '' })
  files = readdirSync(join(room, 'out'), { recursive: true, withFileTypes: true })
    .filter((entry) => entry.isFile())
    .map((entry) => join(entry.parentPath, entry.name))
    .map((path) => ({ path: path.slice(join(room, 'out').length + 1), text: readFileSync(path, 'utf8') }))
})

describe('a results folder', () => {
  it('has ids in units.csv alone', () => {
    expect(files.filter(({ text }) => text.includes('tenant#')).map(({ path }) => path)).toEqual(aboutUnits)
  })

  it('has no position of a unit outside units.csv, whole or to a metre', () => {
    const short = (value: string) => Number(value).toFixed(5)
    for (const { path, text } of files.filter(({ path }) => !aboutUnits.includes(path))) {
      const found = text.match(/-?\d+\.\d{4,}/g) ?? []
      const whole = new Set(found)
      const pairs = new Set(found.slice(1).map((value, i) => `${short(found[i])} ${short(value)}`))
      expect(
        units.filter(({ lon, lat }) => whole.has(lon) && whole.has(lat)),
        path,
      ).toEqual([])
      expect(
        units.filter(({ lon, lat }) => pairs.has(`${short(lon)} ${short(lat)}`)),
        path,
      ).toEqual([])
    }
  })

  it('has feet of units on the border in units.csv alone', () => {
    const [, ...rows] = (files.find(({ path }) => path === 'units.csv')?.text ?? '').trimEnd().split('\n')
    const feet = rows.slice(0, 3000).flatMap((row) => row.match(/-?\d+\.\d{6,}/g) ?? [])
    expect(feet.length).toBeGreaterThan(3000)
    // vertices of the border are feet of many units, and belong to the map
    const vertices = new Set((files.find(({ path }) => path === 'borders.geojson')?.text ?? '').match(/-?\d+\.\d{6,}/g))
    const telling = new Set(feet.filter((value) => !vertices.has(value)))
    for (const { path, text } of files) {
      if (aboutUnits.includes(path)) continue
      expect(
        (text.match(/-?\d+\.\d{6,}/g) ?? []).filter((value) => telling.has(value)),
        path,
      ).toEqual([])
    }
  })
})
