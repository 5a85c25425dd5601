import { readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import geodesic from 'geographiclib-geodesic'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { namesIn } from '../../src/cli/measureStudy.js'
import { borderStudy, newRoom, scarp, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

const measure = (out: string, more: string[] = [], records = 'leases.csv') =>
  scarp(['measure', records, '--zones', 'zones.geojson', '--treated', 'East', '--out', out, ...more], { cwd: room })
const position = ['--position', 'lon,lat']

function rowsOf(file: string): Record<string, string>[] {
  const lines = readFileSync(join(room, file), 'utf8').trimEnd().split('\n')
  const [names, ...rows] = lines.map((line) =>
    [...`${line},`.matchAll(/(?:"([^"]*)"|([^,]*)),/g)].map((cell) => cell[1] ?? cell[2]),
  )
  return rows.map((cells) => Object.fromEntries(cells.map((cell, i) => [names[i], cell])))
}

describe('scarp measure', () => {
  beforeAll(() => {
    const study = borderStudy()
    // After the 400 leases: one without a position, one outside the zones, one on the border.
    const odd = 'L401,,50.01,8\nL402,11,50.01,8\nL403,10,50.01,8\n'
    writeFiles(room, { ...study, 'leases.csv': study['leases.csv'] + odd })
  })

  it('writes the placement of every unit beside its own columns', async () => {
    const said = await measure('placed.csv', position)
    expect(said).toMatchObject({ code: 0, stderr: '' })
    expect(said.stdout).toMatch(/^400 of 403 units placed, .*: placed\.csv\n.*placed\.csv\.lines\n$/)
    const rows = rowsOf('placed.csv')
    expect(Object.keys(rows[0])).toEqual(
      'row,lease,lon,lat,rent,zone,line,piece,side,x,foot_lon,foot_lat,position_m,distance_m,nearest,reason'.split(','),
    )
    expect(rows).toHaveLength(403)
    for (const [i, row] of rows.slice(0, 400).entries()) {
      expect(row.row).toBe(String(i + 1))
      expect(row.zone).toBe(Number(row.lon) > 10 ? 'East' : 'West')
      expect(row.side).toBe(row.zone === 'East' ? 'treated' : 'untreated')
      expect(Math.sign(Number(row.x))).toBe(row.zone === 'East' ? 1 : -1)
      // The border is the meridian 10 E: its distance is the geodesic to the foot point (geographiclib).
      const { s12 } = geodesic.Geodesic.WGS84.Inverse(
        Number(row.lat),
        Number(row.lon),
        Number(row.foot_lat),
        Number(row.foot_lon),
      )
      expect(Math.abs(Number(row.x))).toBeCloseTo(s12!, 3)
      expect(Number(row.foot_lon)).toBeCloseTo(10, 9)
      expect(row.reason).toBe('')
    }
    expect(rows.slice(400).map(({ x, reason }) => [x, reason])).toEqual([
      ['', 'position missing'],
      ['', 'in no zone'],
      ['', 'exactly on the border'],
    ])
  })

  it('measures between zones of unlike dose what it measures between treated and untreated ones', async () => {
    const zones = JSON.parse(readFileSync(join(room, 'zones.geojson'), 'utf8'))
    for (const { properties } of zones.features) properties.rate = properties.name === 'East' ? 3 : 1
    writeFileSync(join(room, 'rates.geojson'), JSON.stringify(zones))
    const words = ['measure', 'leases.csv', '--zones', 'rates.geojson', '--dose', 'rate', '--out', 'by-dose.csv']
    expect(await scarp([...words, ...position], { cwd: room })).toMatchObject({ code: 0, stderr: '' })
    expect(rowsOf('by-dose.csv')).toEqual(rowsOf('placed.csv'))
  })

  it('writes lengths in the unit asked for, as GeoJSON and as Parquet too', async () => {
    expect((await measure('placed.geojson', [...position, '--unit', 'km'])).code).toBe(0)
    const { features } = JSON.parse(readFileSync(join(room, 'placed.geojson'), 'utf8'))
    expect(features).toHaveLength(403)
    const metres = rowsOf('placed.csv').map(({ x }) => Number(x))
    for (const i of [0, 1, 399]) expect(features[i].properties.x).toBeCloseTo(metres[i] / 1000, 9)
    expect(features[0].geometry).toEqual({
      type: 'Point',
      coordinates: [Number(rowsOf('placed.csv')[0].lon), Number(rowsOf('placed.csv')[0].lat)],
    })
    expect(features[400].geometry).toBeNull()
    expect((await measure('placed.parquet', position)).code).toBe(0)
    expect(readFileSync(join(room, 'placed.parquet')).subarray(0, 4).toString()).toBe('PAR1')
  })

  it('reads GeoJSON points without being told of columns, and keeps columns that have its own names', async () => {
    const said = await measure('again.csv', [], 'placed.geojson')
    expect(said).toMatchObject({ code: 0, stderr: '' })
    const [again, first] = [rowsOf('again.csv'), rowsOf('placed.csv')]
    expect(again.map(({ x }) => x)).toEqual(first.map(({ x }) => x))
    expect(Object.keys(again[0])).toContain('x_in_records')
  })

  it('writes what a study of ready-made distances can read', async () => {
    writeFileSync(
      join(room, 'distances.yaml'),
      'records: {file: placed.csv, cluster: piece}\noutcomes: [rent]\nline: {distance: x, name: line}\n',
    )
    const said = await scarp(['run', 'distances.yaml', '--quiet'], { cwd: room })
    expect(said).toEqual({ code: 0, stdout: '', stderr: '' })
    const { placement } = JSON.parse(readFileSync(join(room, 'distances-results', 'results.json'), 'utf8'))
    expect(placement.placed).toBe(400)
  })

  it('leaves no temporary file, and an earlier file as it is when it refuses', async () => {
    const before = readFileSync(join(room, 'placed.csv'))
    const said = await measure('placed.csv', ['--position', 'lon,latitude'])
    expect(said.code).toBe(2)
    expect(said.stderr).toMatch(/^leases\.csv: --position: .*latitude; /)
    expect(readFileSync(join(room, 'placed.csv'))).toEqual(before)
    expect(readdirSync(room).filter((name) => name.startsWith('.'))).toEqual([])
  })
})

describe('namesIn', () => {
  it.each([
    ['Inner,Harbour', ['Inner', 'Harbour']],
    [' Inner , Old Harbour ', ['Inner', 'Old Harbour']],
    ['"North, East",South', ['North, East', 'South']],
    ['"a ""b""",', ['a "b"']],
    ['', []],
  ])('reads %j', (text, names) => expect(namesIn(text)).toEqual(names))
})
