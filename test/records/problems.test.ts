import { mkdirSync } from 'node:fs'
import { gzipSync } from 'node:zlib'
import { describe, expect, it } from 'vitest'
import { problemText } from '../../src/problem.js'
import { headerOf, readTable } from '../../src/records/files.js'
import { labels, numbers, testFolder } from './room.js'

const room = testFolder()

interface Case {
  readonly name: string
  readonly file: string
  readonly content: string | Uint8Array
  readonly says: readonly string[]
  readonly columns?: readonly string[]
  readonly points?: boolean
}

const emptied = 'write a number, or leave the cell empty'
const mend = 'mend or delete the line'
const feature = (properties: object, geometry: object | null) => ({ type: 'Feature', properties, geometry })
const collection = (...features: object[]) => JSON.stringify({ type: 'FeatureCollection', features })

/** Each kind of fault, and every word that is said of it. */
const cases: readonly Case[] = [
  {
    name: 'cells that are no numbers',
    file: 'a.csv',
    content: 'a,b\n1,2\n"12,5",x\nabc,3\n1e999,4\n-inf,5\n"1,234",6\n"1.234,5",7\n12.5,8\n',
    columns: ['a', 'b'],
    says: [
      'a.csv:3: a (outcomes[0]): must be a number: "12,5"; write 12.5, with a decimal point',
      `a.csv:3: b (outcomes[0]): must be a number: "x"; ${emptied}`,
      `a.csv:4: a (outcomes[0]): must be a number: "abc"; ${emptied}`,
      'a.csv:5: a (outcomes[0]): must be a number: "1e999"; write a finite number, or leave the cell empty',
      `a.csv:6: a (outcomes[0]): must be a number: "-inf"; ${emptied}`,
      'a.csv:7: a (outcomes[0]): must be a number: "1,234"; write 1234, without commas',
      'a.csv:8: a (outcomes[0]): must be a number: "1.234,5"; write 1234.5, with a decimal point',
    ],
  },
  {
    name: 'rows that are too short or too long, an empty field too many among them',
    file: 'a.csv',
    content: 'a,b\n1\n1,2\n1,2,3\n1,2,\n',
    says: [
      'a.csv:2: each row must have as many fields as the header: 1 where the header has 2; check commas, tabs and quotes in this line',
      'a.csv:4: each row must have as many fields as the header: 3 where the header has 2; check commas, tabs and quotes in this line',
      'a.csv:5: each row must have as many fields as the header: 3 where the header has 2; check commas, tabs and quotes in this line',
    ],
  },
  {
    name: 'an empty field too many alone',
    file: 'a.csv',
    content: 'a,b\n1,2\n1,2,\n',
    says: [
      'a.csv:3: each row must have as many fields as the header: 3 where the header has 2; check commas, tabs and quotes in this line',
    ],
  },
  {
    name: 'a quote that stays open',
    file: 'a.csv',
    content: 'a,b\n1,2\n3,"4\n5,6\n7,8\n',
    says: ['a.csv:3: a quote is never closed: it opens on this line; close it, or double it inside a field'],
  },
  {
    name: 'a quote that stays open in the header',
    file: 'a.csv',
    content: 'a,"b\n1,2\n',
    says: ['a.csv:1: a quote is never closed: in the header; close it, or double it inside a field'],
  },
  {
    name: 'text after a closing quote',
    file: 'a.csv',
    content: 'a,b\n1,2\n3,"4"x\n5,6\n',
    says: [
      'a.csv:3: a field in quotes must end at its closing quote: text after a quote that opens on this line; double the quotes inside the field',
    ],
  },
  {
    name: 'no header',
    file: 'a.csv',
    content: '1,2\n3,4\n',
    says: ['a.csv:1: the first line must hold the column names: numbers (1, 2); add a header line'],
  },
  {
    name: 'a blank first line',
    file: 'a.csv',
    content: '\na,b\n1,2\n',
    says: ['a.csv:1: the first line must hold the column names: a blank line; delete the lines above the column names'],
  },
  {
    name: 'names that occur twice',
    file: 'a.csv',
    content: 'a,b,a,b,a\n1,2,3,4,5\n',
    says: [
      'a.csv:1: a: column names must differ: 3 columns of that name; rename or delete all but one',
      'a.csv:1: b: column names must differ: 2 columns of that name; rename or delete all but one',
    ],
  },
  {
    name: 'columns that are not there',
    file: 'a.csv',
    content: 'Rent,income\n1,2\n',
    columns: ['rent', 'incme', 'zone'],
    says: [
      'a.csv: outcomes[0]: no such column in the file: rent; write Rent',
      'a.csv: outcomes[0]: no such column in the file: incme; write income',
      'a.csv: outcomes[0]: no such column in the file: zone; the columns are Rent, income',
    ],
  },
  {
    name: 'a missing column, a bad cell and a ragged row at once',
    file: 'a.csv',
    content: 'a,b\n1,2\nx,3\n',
    columns: ['a', 'zone'],
    says: [
      'a.csv: outcomes[0]: no such column in the file: zone; the columns are a, b',
      `a.csv:3: a (outcomes[0]): must be a number: "x"; ${emptied}`,
    ],
  },
  {
    name: 'an empty file',
    file: 'a.csv',
    content: '',
    says: ['a.csv: the file is empty: no header; give a file with a row of column names, then records'],
  },
  {
    name: 'a header alone',
    file: 'a.csv',
    content: 'a,b\n',
    says: ['a.csv: the file holds no records: column names alone; add a row for each record'],
  },
  {
    name: 'Latin-1',
    file: 'a.csv',
    content: Buffer.from('a,b\n1,x\n2,caf\xe9\n', 'latin1'),
    says: [
      'a.csv:3: the text must be UTF-8: bytes of another encoding, such as Latin-1 or Windows-1252; save the file as UTF-8',
    ],
  },
  {
    name: 'UTF-16',
    file: 'a.csv',
    content: Buffer.from('\ufeffa,b\n1,x\n', 'utf16le'),
    says: ['a.csv:1: the text must be UTF-8: UTF-16; save the file as UTF-8'],
  },
  {
    name: 'semicolons',
    file: 'a.csv',
    content: 'a;b\n1;2\n',
    says: [
      'a.csv:1: columns must be separated by commas: semicolons; save the file with commas between columns and points in numbers',
    ],
  },
  {
    name: 'tabs in .csv',
    file: 'a.csv',
    content: 'a\tb\n1\t2\n',
    says: ['a.csv:1: columns must be separated by commas: tabs; name the file .tsv'],
  },
  {
    name: 'two kinds of line end',
    file: 'a.csv',
    content: 'a,b\n1,2\n1,2\r\n3,4\n',
    says: ['a.csv:3: all lines must end alike: CR LF after LF; save the file with one kind of line end'],
  },
  {
    name: 'carriage returns alone',
    file: 'a.csv',
    content: 'a,b\r1,2\r3,4\r',
    says: ['a.csv:1: lines must end in LF or CR LF: a carriage return alone; save the file with ordinary line ends'],
  },
  {
    name: 'a line that is too long',
    file: 'a.csv',
    content: `a,b\n1,2\n1,${'x'.repeat(2_500_000)}\n`,
    says: [
      "a.csv:3: can't be read as a table: Maximum line size of 2000000 bytes exceeded; check quotes in this line, or save the file again as CSV",
    ],
  },
  {
    name: 'an unknown ending',
    file: 'a.xlsx',
    content: 'x',
    says: ['a.xlsx: the ending says no format: .xlsx; use .csv, .tsv, .jsonl (each also .gz), .parquet or .geojson'],
  },
  {
    name: 'no Parquet',
    file: 'a.parquet',
    content: 'a long enough text that is not what its ending says',
    says: [
      "a.parquet: not a Parquet file: No magic bytes found at end of file 'a.parquet'; write it again, or correct its ending",
    ],
  },
  {
    name: 'no gzip',
    file: 'a.csv.gz',
    content: 'a,b\n1,2\n',
    says: ['a.csv.gz: not a whole gzip file: incorrect header check; compress it again'],
  },
  {
    name: 'gzip cut short',
    file: 'a.csv.gz',
    content: gzipSync(`a,b\n${'1,2\n'.repeat(100_000)}`).subarray(0, 150),
    says: ['a.csv.gz: not a whole gzip file: unexpected end of file; compress it again'],
  },
  {
    name: 'lines that are no JSON objects',
    file: 'a.jsonl',
    content: '{"a":1}\n{"a":}\n\n[1]\n42\n',
    says: [
      `a.jsonl:2: each line must be one JSON object: Unexpected token '}', "{"a":}" is not valid JSON; ${mend}`,
      `a.jsonl:4: each line must be one JSON object: an array; ${mend}`,
      `a.jsonl:5: each line must be one JSON object: 42; ${mend}`,
    ],
  },
  {
    name: 'JSON cells that are no numbers',
    file: 'a.jsonl',
    content: '{"a":1}\n{"a":{"z":1}}\n\n{"a":"x"}\n{"a":1e999}\n',
    says: [
      `a.jsonl:2: a (outcomes[0]): must be a number: "{"z":1}"; ${emptied}`,
      `a.jsonl:4: a (outcomes[0]): must be a number: "x"; ${emptied}`,
      'a.jsonl:5: a (outcomes[0]): must be a number: "1e999"; write a finite number, or leave the cell empty',
    ],
  },
  {
    name: 'JSON in Latin-1',
    file: 'a.jsonl',
    content: Buffer.from('{"a":1}\n{"a":"\xe9"}\n', 'latin1'),
    says: [
      'a.jsonl:2: the text must be UTF-8: bytes of another encoding, such as Latin-1 or Windows-1252; save the file as UTF-8',
    ],
  },
  {
    name: 'an array that holds something else',
    file: 'a.json',
    content: '[{"a":1},3]',
    says: [
      'a.json: must be an array of JSON objects: a value that is no object; check the brackets, commas and quotes',
    ],
  },
  {
    name: 'an empty JSON file',
    file: 'a.jsonl',
    content: '\n',
    says: ['a.jsonl: the file is empty: no objects; give one JSON object a line'],
  },
  {
    name: 'features that are no points',
    file: 'a.geojson',
    points: true,
    content: collection(
      feature({ a: 1 }, { type: 'Point', coordinates: [1, 2] }),
      feature(
        { a: 1 },
        {
          type: 'LineString',
          coordinates: [
            [1, 2],
            [2, 3],
          ],
        },
      ),
      feature({ a: 1 }, { type: 'Point', coordinates: ['1', 2] }),
      { a: 1 },
    ),
    says: [
      'a.geojson: feature 1: geometry: must be a Point: LineString; give points, or name position columns',
      'a.geojson: feature 2: geometry: must have two coordinates that are numbers: something else; write [longitude, latitude]',
      'a.geojson: feature 3: each member of features must be a Feature: no type; mend or delete it',
    ],
  },
  {
    name: 'properties that are no numbers',
    file: 'a.geojson',
    content: collection(feature({ a: 1 }, null), feature({ a: 'q' }, null)),
    says: [`a.geojson: feature 1: a (outcomes[0]): must be a number: "q"; ${emptied}`],
  },
  {
    name: 'GeoJSON that is no collection',
    file: 'a.geojson',
    content: JSON.stringify(feature({}, null)),
    says: ['a.geojson: must be a GeoJSON FeatureCollection: type Feature; export the points again as GeoJSON'],
  },
  {
    name: 'GeoJSON cut short',
    file: 'a.geojson',
    content: '{"type":"FeatureCollection","features":[{"type":"Feature","properties":{"a":1},"geometry":null},',
    says: [
      'a.geojson: must be a GeoJSON FeatureCollection: broken JSON (Unexpected end of JSON input); export the points again as GeoJSON',
    ],
  },
  {
    name: 'features that are broken',
    file: 'a.geojson',
    content: `{"type":"FeatureCollection","features":[{"type":"Feature"},{"type":}]}`,
    says: [
      `a.geojson: feature 1: each member of features must be a Feature: broken JSON (Unexpected token '}', "{"type":}" is not valid JSON); mend or delete it`,
    ],
  },
  {
    name: 'members that are no objects',
    file: 'a.geojson',
    content: '{"type":"FeatureCollection","features":[{"type":"Feature"},null,"x"]}',
    says: [
      'a.geojson: feature 1: each member of features must be a Feature: null; mend or delete it',
      'a.geojson: feature 2: each member of features must be a Feature: "x"; mend or delete it',
    ],
  },
  {
    name: 'no array of features',
    file: 'a.geojson',
    content: '{"type":"FeatureCollection"}',
    says: ['a.geojson: must be a GeoJSON FeatureCollection: no array of features; export the points again as GeoJSON'],
  },
  {
    name: 'a collection of nothing',
    file: 'a.geojson',
    content: collection(),
    says: ['a.geojson: the file is empty: no features; give a FeatureCollection of points'],
  },
]

describe('a table that can not be used', () => {
  it.each(cases)('$name', async ({ file, content, columns = ['a'], points, says }) => {
    expect(await room.problems(file, content, { wanted: numbers(...columns), positionFromGeometry: points })).toEqual(
      says,
    )
  })

  it('is not there, or is a folder', async () => {
    mkdirSync(room.path('folder.csv'))
    const said = async (name: string) => {
      const checked = await readTable(room.path(name), { wanted: [], shownAs: name })
      return checked.ok ? [] : checked.problems.map(problemText)
    }
    expect(await said('absent.csv')).toEqual([
      "absent.csv: the file can't be read: no such file; check the path and its spelling",
    ])
    expect(await said('folder.csv')).toEqual(["folder.csv: the file can't be read: a folder; name a file in it"])
  })

  it('lists a thousand bad cells and counts the rest', async () => {
    const said = await room.problems('a.csv', `a\n${'x\n'.repeat(2500)}`, { wanted: numbers('a') })
    expect(said.length).toBe(1001)
    expect(said[999]).toBe(`a.csv:1001: a (outcomes[0]): must be a number: "x"; ${emptied}`)
    expect(said[1000]).toBe('a.csv: more cells that must be numbers: 1500; mend the columns named above')
  })

  it('has a label column by which a missing one is named with the key that asks for it', async () => {
    const said = await room.problems('a.csv', 'lease\n1\n', { wanted: labels('leese') })
    expect(said).toEqual(['a.csv: records.id: no such column in the file: leese; write lease'])
  })

  it('tells the same faults of its header alone', async () => {
    const checked = await headerOf(room.write('h.csv', 'a,a\n1,2\n'), 'h.csv')
    expect(checked.ok ? [] : checked.problems.map(problemText)).toEqual([
      'h.csv:1: a: column names must differ: 2 columns of that name; rename or delete all but one',
    ])
  })
})
