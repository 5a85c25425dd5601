import { createHash } from 'node:crypto'
import { gzipSync } from 'node:zlib'
import { DuckDBInstance } from '@duckdb/node-api'
import { describe, expect, it } from 'vitest'
import { headerOf, readTable } from '../../src/records/files.js'
import { labels, numbers, testFolder, textsOf, valuesOf } from './room.js'

const room = testFolder()

/** One set of records in every format: a number with a gap, a text with leading zeros and a gap, a name with a quote. */
const csv = 'rent,"zip ""code""",lon,lat\n812.5,00123,1.25,50\n,00123,-2,51.5\n-3e2,,179.5,-8\n7,Ünit 9,0,0\n'
const points: [number | null, string | null, number, number][] = [
  [812.5, '00123', 1.25, 50],
  [null, '00123', -2, 51.5],
  [-300, null, 179.5, -8],
  [7, 'Ünit 9', 0, 0],
]
const lines = points.map(([rent, zip, lon, lat]) => JSON.stringify({ rent, 'zip "code"': zip, lon, lat })).join('\n')
const array = `[\n${points.map(([rent, zip, lon, lat]) => JSON.stringify({ rent, 'zip "code"': zip, lon, lat })).join(',\n')}\n]`
const geojson = JSON.stringify({
  type: 'FeatureCollection',
  features: points.map(([rent, zip, lon, lat]) => ({
    type: 'Feature',
    properties: { rent, 'zip "code"': zip },
    geometry: { type: 'Point', coordinates: [lon, lat] },
  })),
})

async function parquet(name: string, select: string): Promise<void> {
  const instance = await DuckDBInstance.create(':memory:')
  const connection = await instance.connect()
  await connection.run(`COPY (${select}) TO '${room.path(name)}' (FORMAT parquet)`)
  connection.closeSync()
  instance.closeSync()
}

const texts: Record<string, string | Uint8Array> = {
  'units.csv': csv,
  'units.csv.gz': gzipSync(csv),
  'units.tsv': csv.replaceAll(',', '\t'),
  'units.tsv.gz': gzipSync(csv.replaceAll(',', '\t')),
  'crlf.csv': `\ufeff${csv.replaceAll('\n', '\r\n')}`,
  'unended.csv': csv.slice(0, -1),
  'units.jsonl': lines,
  'units.ndjson': `${lines}\n`,
  'units.jsonl.gz': gzipSync(lines),
  'lines.json': lines,
  'array.json': array,
  'units.geojson': geojson,
}

describe('formats', () => {
  for (const name of [...Object.keys(texts), 'units.parquet']) {
    it(`reads the same table from ${name}`, async () => {
      if (name in texts) room.write(name, texts[name])
      else
        await parquet(
          name,
          `SELECT * FROM (VALUES (812.5::DOUBLE, '00123', 1.25::DOUBLE, 50), (NULL, '00123', -2, 51.5),
             (-300, NULL, 179.5, -8), (7, 'Ünit 9', 0, 0)) AS t(rent, "zip ""code""", lon, lat)`,
        )
      const checked = await readTable(room.path(name), {
        wanted: [...numbers('rent', 'lon', 'lat'), ...labels('zip "code"')],
        shownAs: name,
        positionFromGeometry: name.endsWith('.geojson'),
      })
      if (!checked.ok) throw new Error(JSON.stringify(checked.problems))
      const table = checked.value
      expect(table.rows).toBe(4)
      expect(table.rowsRead).toBe(4)
      expect(table.file).toBe(name)
      expect(valuesOf(table, 'rent')).toEqual([812.5, Number.NaN, -300, 7])
      expect(valuesOf(table, 'lon')).toEqual([1.25, -2, 179.5, 0])
      expect(valuesOf(table, 'lat')).toEqual([50, 51.5, -8, 0])
      expect(textsOf(table, 'zip "code"')).toEqual(['00123', '00123', null, 'Ünit 9'])
      const first = /csv|tsv|array/.test(name) ? 2 : name.endsWith('.geojson') ? 0 : 1
      expect([...table.lineOfRow]).toEqual([first, first + 1, first + 2, first + 3])
      if (name in texts) expect(table.sha256).toBe(createHash('sha256').update(texts[name]).digest('hex'))
      const header = await headerOf(room.path(name), name)
      const names = name.endsWith('.geojson') ? ['rent', 'zip "code"'] : ['rent', 'zip "code"', 'lon', 'lat']
      expect(header).toEqual({ ok: true, value: names })
    })
  }

  it('writes the labels of typed values shortest, and dates in ISO 8601', async () => {
    await parquet(
      'typed.parquet',
      `SELECT 42.0::DOUBLE AS whole, 0.1::FLOAT AS single, 1.50::DECIMAL(6,2) AS price, 100::DECIMAL(6,0) AS hundred,
         DATE '2015-03-01' AS day, TIMESTAMP '2015-03-01 04:05:06' AS moment, true AS yes, 7::TINYINT AS small,
         12345678901234567890::UBIGINT AS long, 'NaN'::DOUBLE AS none, '' AS empty`,
    )
    const names = 'whole single price hundred day moment yes small long none empty'.split(' ')
    const checked = await readTable(room.path('typed.parquet'), { wanted: labels(...names), shownAs: 'typed.parquet' })
    if (!checked.ok) throw new Error(JSON.stringify(checked.problems))
    expect(names.map((name) => textsOf(checked.value, name)[0])).toEqual([
      '42',
      '0.1',
      '1.5',
      '100',
      '2015-03-01',
      '2015-03-01T04:05:06',
      'true',
      '7',
      '12345678901234567890',
      null,
      null,
    ])
    const asNumbers = await readTable(room.path('typed.parquet'), {
      wanted: numbers('whole', 'single', 'price', 'yes', 'small', 'long', 'none'),
      shownAs: 'typed.parquet',
    })
    if (!asNumbers.ok) throw new Error(JSON.stringify(asNumbers.problems))
    expect(
      ['whole', 'single', 'price', 'yes', 'small', 'long', 'none'].map((name) => valuesOf(asNumbers.value, name)[0]),
    ).toEqual([42, Math.fround(0.1), 1.5, 1, 7, Number('12345678901234567890'), Number.NaN])
  })

  it('reads JSON numbers, texts, truth values, gaps and names as they are', async () => {
    const content =
      '{"a":1,"A":2,"x/y":3,"p~q":4,"b":42.0}\n\n{"a":null,"b":"42.0"}\n{"a":true,"b":1e21}\n{"a":"12.5","b":null}\n{"b":false}\n'
    const table = await room.table('odd.jsonl', content, {
      wanted: [...numbers('a', 'A', 'x/y', 'p~q'), ...labels('b')],
    })
    expect(valuesOf(table, 'a')).toEqual([1, Number.NaN, 1, 12.5, Number.NaN])
    expect([valuesOf(table, 'A')[0], valuesOf(table, 'x/y')[0], valuesOf(table, 'p~q')[0]]).toEqual([2, 3, 4])
    expect(textsOf(table, 'b')).toEqual(['42', '42.0', '1e+21', null, 'false'])
    expect([...table.lineOfRow]).toEqual([1, 3, 4, 5, 6])
  })

  it('finds the lines of JSON objects that fill several', async () => {
    const content = '[\n{"a":1, "t": "}]\\"{"},\n\n{"a":\n2, "u": [{}, {}]},\n{"a":3}]\n'
    const table = await room.table('spread.json', content, { wanted: numbers('a') })
    expect(valuesOf(table, 'a')).toEqual([1, 2, 3])
    expect([...table.lineOfRow]).toEqual([2, 4, 6])
  })

  it('finds the features among other members, whatever their texts hold', async () => {
    const odd = ']},{"é\\u00e9\u{1f6f6}'
    const features = Array.from({ length: 30_000 }, (_, a) => ({
      type: 'Feature',
      properties: { a, t: `${odd} ${a % 3}`, inside: { deep: [{ a: 1 }, [{}]] } },
      geometry: { type: 'Point', coordinates: [a / 1000, 0] },
    }))
    const content = JSON.stringify({
      about: [{ a: 1 }, { a: 2 }],
      type: 'FeatureCollection',
      crs: { type: 'name', properties: [{ a: 5 }] },
      features,
      after: [{ a: 3 }],
    })
    const wanted = [...numbers('a', 'lon'), ...labels('t')]
    const table = await room.table('many.geojson', content, { wanted, positionFromGeometry: true, keep: 'a >= 10' })
    expect(valuesOf(table, 'a')).toEqual(features.slice(10).map(({ properties }) => properties.a))
    expect(valuesOf(table, 'lon')).toEqual(features.slice(10).map(({ properties }) => properties.a / 1000))
    expect(table.lineOfRow[0]).toBe(10)
    expect(textsOf(table, 't')[5]).toBe(`${odd} 0`)
  })

  it('reads a null geometry as a missing position, and properties where the geometry is not asked for', async () => {
    const features = [
      { type: 'Feature', properties: { a: 1, lon: 9 }, geometry: null },
      { type: 'Feature', properties: { a: 2, lon: 8 }, geometry: { type: 'Point', coordinates: [3, 4, 100] } },
    ]
    const content = JSON.stringify({ type: 'FeatureCollection', features })
    const placed = await room.table('gaps.geojson', content, {
      wanted: numbers('a', 'lon'),
      positionFromGeometry: true,
    })
    expect(valuesOf(placed, 'lon')).toEqual([Number.NaN, 3])
    const plain = await room.table('gaps.geojson', content, { wanted: numbers('a', 'lon') })
    expect(valuesOf(plain, 'lon')).toEqual([9, 8])
  })
})

describe('text tables', () => {
  it('counts physical lines through quoted newlines and blank lines', async () => {
    const content = 'a,b\n1,"x\n\n1"\n2,"y, ""z"""\n\n3,w'
    const table = await room.table('lines.csv', content, { wanted: [...numbers('a'), ...labels('b')] })
    expect([...table.lineOfRow]).toEqual([2, 5, 7])
    expect(textsOf(table, 'b')).toEqual(['x\n\n1', 'y, "z"', 'w'])
  })

  it('takes a blank line of a single column for a missing value', async () => {
    const table = await room.table('single.csv', 'a\n1\n\n3\n', { wanted: numbers('a') })
    expect(valuesOf(table, 'a')).toEqual([1, Number.NaN, 3])
    expect([...table.lineOfRow]).toEqual([2, 3, 4])
  })

  it('knows the words for a missing value and for true and false in numbers, and leaves them in labels', async () => {
    const words = ['', 'NA', 'N/A', 'NaN', 'null', '.', 'nan', '""', ' 5 ', 'true', 'FALSE', '1e3', '+4', '.5']
    const content = `n,t\n${words.map((word) => `${word},${word}`).join('\n')}\n`
    const table = await room.table('words.csv', content, { wanted: [...numbers('n'), ...labels('t')] })
    const gaps = new Array(8).fill(Number.NaN)
    expect(valuesOf(table, 'n')).toEqual([...gaps, 5, 1, 0, 1000, 4, 0.5])
    expect(textsOf(table, 't')).toEqual([null, 'NA', 'N/A', 'NaN', 'null', '.', 'nan', null, ...words.slice(8)])
  })

  it('keeps apart names that differ in capitals, and finds names with quotes, spaces and letters beyond ASCII', async () => {
    const content = 'Rent,rent,"a ""q"" b",ü x,\n1,2,3,z,\n'
    const table = await room.table('names.csv', content, {
      wanted: [...numbers('rent', 'Rent', 'a "q" b'), ...labels('ü x')],
    })
    expect([valuesOf(table, 'Rent'), valuesOf(table, 'rent'), valuesOf(table, 'a "q" b')]).toEqual([[1], [2], [3]])
    expect(textsOf(table, 'ü x')).toEqual(['z'])
  })

  it('reads a column wanted both ways as numbers', async () => {
    const table = await room.table('both.csv', 'a\n10\n9\n', { wanted: [...labels('a'), ...numbers('a')] })
    expect(valuesOf(table, 'a')).toEqual([10, 9])
  })

  it('reads all other columns as what they hold', async () => {
    const content = 'a,b,c,d,e,f\n1,x,2015-01-01,007,12345678901234567,NA\n2.5,y,2016-01-01,8,1,3\n'
    const table = await room.table('all.csv', content, { wanted: labels('a'), all: true })
    const kinds = [...table.columns.values()].map(({ name, kind }) => `${name} ${kind}`)
    expect(kinds).toEqual(['a label', 'b label', 'c label', 'd label', 'e label', 'f number'])
    expect(textsOf(table, 'e')).toEqual(['12345678901234567', '1'])
  })

  it('opens files whose names would mean something in SQL or in a pattern', async () => {
    for (const name of ["o'clock.csv", 'w[1].csv', 'ü {a,b}.csv'])
      expect(valuesOf(await room.table(name, 'a\n1\n', { wanted: numbers('a'), keep: 'a = 1' }), 'a')).toEqual([1])
  })
})
