import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { type OutColumn, readTable, writeTable } from '../../src/records/files.js'
import { labels, numbers, testFolder, textsOf, valuesOf } from './room.js'

const room = testFolder()
const x = Float64Array.of(0.1, -0, 5e-324, Number.NaN, 1.7976931348623157e308, 42, 1 / 3)
const rows = x.length
const names = ['a', 'b,c', 'd"e', '', 'f\ng', ' h ', 'Ü']
const columns: readonly OutColumn[] = [
  { name: 'x', kind: 'number', values: x },
  { name: 'count', kind: 'integer', values: Int32Array.from(x, (_, i) => i - 3) },
  {
    name: 'zone, "old"',
    kind: 'label',
    codes: Int32Array.of(0, 1, -1, 0, 1, 2, 0),
    labels: ['00123', 'North, side', 'a "b"'],
  },
  { name: 'name', kind: 'text', values: names },
  { name: 'lon', kind: 'number', values: Float64Array.of(1, 2, 3, 4, Number.NaN, 6, 179.99999999999997) },
  { name: 'lat', kind: 'number', values: Float64Array.of(1, 2, 3, 4, 5, 6, -7) },
]

async function readBack(name: string) {
  const checked = await readTable(room.path(name), {
    wanted: [...numbers('x', 'count', 'lon', 'lat'), ...labels('zone, "old"', 'name')],
    shownAs: name,
    positionFromGeometry: true,
  })
  if (!checked.ok) throw new Error(JSON.stringify(checked.problems))
  return checked.value
}

describe('writeTable', () => {
  it.each(['w.csv', 'w.parquet', 'w.geojson'])('writes %s so that it reads back the same', async (name) => {
    await writeTable(room.path(name), columns, rows, { lon: 'lon', lat: 'lat' })
    const table = await readBack(name)
    const read = valuesOf(table, 'x')
    expect(read.filter((value, i) => value !== x[i] && !(Number.isNaN(value) && i === 3))).toEqual([])
    expect(valuesOf(table, 'count')).toEqual([-3, -2, -1, 0, 1, 2, 3])
    expect(textsOf(table, 'zone, "old"')).toEqual([
      '00123',
      'North, side',
      null,
      '00123',
      'North, side',
      'a "b"',
      '00123',
    ])
    expect(textsOf(table, 'name')).toEqual(names.map((text) => text || null))
    const isGeometry = name === 'w.geojson'
    expect(valuesOf(table, 'lon')).toEqual([1, 2, 3, 4, Number.NaN, 6, 179.99999999999997])
    expect(valuesOf(table, 'lat')).toEqual([1, 2, 3, 4, isGeometry ? Number.NaN : 5, 6, -7])
  })

  it('writes CSV as a reader would', async () => {
    await writeTable(room.path('plain.csv'), columns.slice(0, 4), rows)
    const text = readFileSync(room.path('plain.csv'), 'utf8')
    expect(text.split('\n').slice(0, 5)).toEqual([
      'x,count,"zone, ""old""",name',
      '0.1,-3,00123,a',
      '-0,-2,"North, side","b,c"',
      '5e-324,-1,,"d""e"',
      ',0,00123,',
    ])
  })

  it('takes positions that are no columns', async () => {
    const positions = { lon: Float64Array.of(9, Number.NaN), lat: Float64Array.of(8, 7) }
    const x2: OutColumn = { name: 'x', kind: 'number', values: Float64Array.of(1, 2) }
    await writeTable(room.path('beside.geojson'), [x2], 2, positions)
    expect(JSON.parse(readFileSync(room.path('beside.geojson'), 'utf8'))).toEqual({
      type: 'FeatureCollection',
      features: [
        { type: 'Feature', geometry: { type: 'Point', coordinates: [9, 8] }, properties: { x: 1 } },
        { type: 'Feature', geometry: null, properties: { x: 2 } },
      ],
    })
  })

  it('writes many rows in order', async () => {
    const values = Float64Array.from({ length: 20_000 }, (_, i) => Math.sqrt(i))
    for (const name of ['many.csv', 'many.parquet']) {
      await writeTable(room.path(name), [{ name: 'x', kind: 'number', values }], values.length)
      const checked = await readTable(room.path(name), { wanted: numbers('x'), shownAs: name })
      expect(checked.ok && valuesOf(checked.value, 'x')).toEqual([...values])
    }
  })

  it('keeps a missing value of a single column as a row', async () => {
    const values = Float64Array.of(1, Number.NaN, 3)
    await writeTable(room.path('one.csv'), [{ name: 'x', kind: 'number', values }], 3)
    const checked = await readTable(room.path('one.csv'), { wanted: numbers('x'), shownAs: 'one.csv' })
    expect(checked.ok && valuesOf(checked.value, 'x')).toEqual([1, Number.NaN, 3])
  })

  it('throws for what a program got wrong', async () => {
    const short: OutColumn = { name: 'x', kind: 'number', values: Float64Array.of(1) }
    await expect(writeTable(room.path('e.csv'), [short], 2)).rejects.toThrow('column x has 1 rows, the table has 2')
    const infinite: OutColumn = { name: 'x', kind: 'number', values: Float64Array.of(1, Infinity) }
    await expect(writeTable(room.path('e.csv'), [infinite], 2)).rejects.toThrow('column x is infinite in row 1')
    await expect(writeTable(room.path('e.xlsx'), [short], 1)).rejects.toThrow('tables are written as')
    await expect(writeTable(room.path('e.geojson'), [short], 1)).rejects.toThrow('GeoJSON needs 1 positions')
  })

  it('fails where the folder is not there', async () => {
    const short: OutColumn = { name: 'x', kind: 'number', values: Float64Array.of(1) }
    await expect(writeTable(room.path('no/where.csv'), [short], 1)).rejects.toThrow('ENOENT')
  })
})
