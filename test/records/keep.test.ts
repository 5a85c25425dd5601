import { DuckDBInstance } from '@duckdb/node-api'
import { describe, expect, it } from 'vitest'
import { withDatabase } from '../../src/records/duckdb/connection.js'
import { readTable } from '../../src/records/files.js'
import { labels, numbers, testFolder, valuesOf } from './room.js'

const room = testFolder()
const content = 'a,b,c d,d,zip\n1,x,10,2015-03-01,00123\n2,y,,2016-03-01,9\n3,z;,30,NA,00777\n'

/** Conditions and the values of `a` they keep. */
const conditions: readonly [string, readonly number[]][] = [
  ['a > 1', [2, 3]],
  ['a >= 10', []],
  ['b = \'x\' or "c d" > 20', [1, 3]],
  ['"c d" is null', [2]],
  ['"c d" <> 10', [3]],
  ['"c d" between 5 and 15', [1]],
  ["d >= '2016-01-01'", [2]],
  ["d < date '2016-01-01'", [1]],
  ['year(d) = 2016', [2]],
  ["b in ('y', 'q') and a between 2 and 3", [2]],
  ['not (a = 1)', [2, 3]],
  ['a % 2 = 1', [1, 3]],
  ["b like '%z%'", [3]],
  ["b = 'z;'", [3]],
  ["zip = '00123'", [1]],
  ["upper(b) = 'X'", [1]],
  ['case when a > 1 then true else false end', [2, 3]],
  ['a::integer = 1', [1]],
  ['a > 1 -- the rest', [2, 3]],
  ['true', [1, 2, 3]],
]

const column = 'write a condition over columns of the file'
const example = 'write one condition such as year >= 2015 and beds > 0'
const quotes = 'text goes in single quotes, names with spaces or dots in double quotes'
const listed = `the columns are a, b, c d, d, zip; ${quotes}`
const compare = "compare numbers with numbers and text with 'text'"

/** Conditions that are refused, and what is said. */
const refused: readonly [string, string][] = [
  ['a >', `not a condition in SQL: syntax error at or near ")"; ${example}`],
  ['', `not a condition in SQL: syntax error at or near ")"; ${example}`],
  ['a in (1, 2', `not a condition in SQL: syntax error at end of input; ${example}`],
  ['a > 1; drop table x', `not a condition in SQL: syntax error at or near ";"; ${example}`],
  ['a > 1) union select (2', `not a condition in SQL: more than one condition in "a > 1) union select (2"; ${example}`],
  ['a > 1), (b', `not a condition in SQL: more than one condition in "a > 1), (b"; ${example}`],
  [
    'true) from range(5) where (true',
    `not a condition in SQL: more than one condition in "true) from range(5) where (true"; ${example}`,
  ],
  ['zipp = 1', `no such column in the file: zipp; write zip; ${quotes}`],
  ['A > 1', `no such column in the file: A; write a; ${quotes}`],
  ['b = "x"', `no such column in the file: x; ${listed}`],
  ['records.a > 1', `no such column in the file: records.a; ${listed}`],
  ['(select 1) = 1', `must look at one record at a time: a query inside the condition; ${column}`],
  [
    "b in (select content from read_text('/etc/hostname'))",
    `must look at one record at a time: a query inside the condition; ${column}`,
  ],
  ['row_number() over () = 1', `must look at one record at a time: a window function; ${column}`],
  ['columns(*) > 1', `must look at one record at a time: *; ${column}`],
  ['a = ?', `must look at one record at a time: a placeholder; ${column}`],
  ['#1 = 1', `must look at one record at a time: a column by number; ${column}`],
  ['random() < 0.5', 'must keep the same records in every run: random(); write the value itself'],
  ['d < today()', 'must keep the same records in every run: today(); write the value itself'],
  ['a = 1 or 2', 'a value where a condition belongs: 2; write the comparison out, such as year = 2015 or year = 2016'],
  ['sum(a) > 1', `can't be used as a condition: WHERE clause cannot contain aggregates!; ${compare}`],
  ['a', `can't be used as a condition: it gives a BIGINT, not true or false; ${compare}`],
  ["a > 'q'", `can't be used as a condition: Could not convert string 'q' to INT64; ${compare}`],
  [
    'b::integer > 1',
    `can't be used as a condition: Could not convert string 'x' to INT32 when casting from source column b; ${compare}`,
  ],
  ['nosuch(a)', `can't be used as a condition: Scalar Function with name nosuch does not exist!; ${compare}`],
]

describe('keep', () => {
  it.each(conditions)('%s', async (keep, kept) => {
    const table = await room.table('k.csv', content, { wanted: [...numbers('a'), ...labels('b')], keep })
    expect(valuesOf(table, 'a')).toEqual(kept)
    expect([...table.lineOfRow]).toEqual(kept.map((a) => a + 1))
    expect(table.rowsRead).toBe(3)
  })

  it.each(refused)('refuses %s', async (keep, says) => {
    expect(await room.problems('k.csv', content, { wanted: numbers('a'), keep })).toEqual([
      `k.csv: records.keep: ${says}`,
    ])
  })

  it('says the key that holds it', async () => {
    const said = await room.problems('k.csv', content, { wanted: [], keep: 'a >', keepAskedBy: 'variants.keep' })
    expect(said[0]).toMatch(/^k\.csv: variants\.keep: /)
  })

  it('compares columns that are not wanted, in their natural types', async () => {
    const table = await room.table('n.csv', 'a,n\n1,9\n2,10\n3,100\n', { wanted: numbers('a'), keep: 'n > 9' })
    expect(valuesOf(table, 'a')).toEqual([2, 3])
  })

  it('never lets a bad cell drop its row in silence', async () => {
    const wanted = numbers('a')
    const bad = 'a,b\n1,1\n"12,5",1\nabc,0\n'
    expect(await room.problems('b.csv', bad, { wanted, keep: 'a > 0 and b = 1' })).toEqual([
      'b.csv:3: a (outcomes[0]): must be a number: "12,5"; write 12.5, with a decimal point',
    ])
    expect(valuesOf(await room.table('b.csv', 'a,b\n1,1\nabc,0\n', { wanted, keep: 'b = 1' }), 'a')).toEqual([1])
  })

  it('tells a bad condition and other faults at once', async () => {
    const said = await room.problems('k.csv', `${content}1,2\n`, { wanted: numbers('q'), keep: 'a >' })
    expect(said.map((text) => text.split(':').slice(0, 2).join(':'))).toEqual([
      'k.csv: outcomes[0]',
      'k.csv: records.keep',
      'k.csv:5',
    ])
  })

  it('refuses two columns told apart by capitals alone', async () => {
    const said = await room.problems('c.csv', 'a,A\n1,2\n', { wanted: numbers('a'), keep: 'a < 5 and A < 5' })
    expect(said[0]).toMatch(/^c\.csv: records\.keep: two columns whose names differ only in capitals: A/)
    const table = await room.table('c.csv', 'a,A\n1,2\n', { wanted: numbers('a'), keep: 'A = 2' })
    expect(valuesOf(table, 'a')).toEqual([1])
  })

  it('works over JSON lines, GeoJSON and Parquet', async () => {
    const wanted = numbers('a')
    const lines = '{"a":1,"s":"u","n":9}\n{"a":2,"s":"v","n":10}\n{"a":3,"n":null}\n'
    expect(valuesOf(await room.table('k.jsonl', lines, { wanted, keep: "s = 'v' and n > 9" }), 'a')).toEqual([2])
    const features = [1, 2, 3].map((a) => ({
      type: 'Feature',
      properties: { a },
      geometry: { type: 'Point', coordinates: [a, 0] },
    }))
    const geojson = JSON.stringify({ type: 'FeatureCollection', features })
    const placed = await room.table('k.geojson', geojson, {
      wanted,
      keep: 'lon > 1 and a < 3',
      positionFromGeometry: true,
    })
    expect([valuesOf(placed, 'a'), [...placed.lineOfRow]]).toEqual([[2], [1]])
    const instance = await DuckDBInstance.create(':memory:')
    const connection = await instance.connect()
    await connection.run(
      `COPY (SELECT i AS a, DATE '2015-01-01' + i::INTEGER AS day FROM range(5) r(i)) TO '${room.path('k.parquet')}' (FORMAT parquet)`,
    )
    connection.closeSync()
    const typed = await readTable(room.path('k.parquet'), { wanted, shownAs: 'k.parquet', keep: "day > '2015-01-03'" })
    if (!typed.ok) throw new Error(JSON.stringify(typed.problems))
    expect([valuesOf(typed.value, 'a'), [...typed.value.lineOfRow]]).toEqual([
      [3, 4],
      [4, 5],
    ])
  })
})

describe('the database behind a condition', () => {
  const beyond = [
    "SELECT * FROM read_text('/etc/hostname')",
    "SELECT * FROM read_csv('/etc/hostname')",
    "SELECT * FROM glob('/etc/*')",
    "SELECT * FROM read_csv('http://127.0.0.1:9/x.csv')",
    "ATTACH '/etc/hostname' AS other",
    'SET enable_external_access = true',
    "SET allowed_paths = ['/etc/hostname']",
    'INSTALL httpfs',
    'LOAD httpfs',
  ]

  it.each(beyond)('refuses %s', async (sql) => {
    const readable = room.write('only.csv', 'a\n1\n')
    await withDatabase(async (connection) => {
      await connection.run(`SELECT * FROM read_csv('${readable}')`)
      await expect(connection.runAndReadAll(sql)).rejects.toThrow()
    }, readable)
  })

  it('writes nothing', async () => {
    const readable = room.write('only.csv', 'a\n1\n')
    await withDatabase(async (connection) => {
      await expect(connection.run(`COPY (SELECT 1) TO '${room.path('out.csv')}'`)).rejects.toThrow(
        /disabled|permission/i,
      )
    }, readable)
  })
})
