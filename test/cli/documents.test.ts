/** The tables of both example studies in every format: the same cells, the digits of results.json, nine columns at most on paper. */
import { readdirSync, readFileSync, rmSync } from 'node:fs'
import { join, resolve } from 'node:path'
import { DOMParser, type Element } from '@xmldom/xmldom'
import { csvParseRows } from 'd3-dsv'
import { strFromU8, unzipSync } from 'fflate'
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest'
import { docxOf, xlsxOf } from '../../src/cli/documents.js'
import type { NamedTable } from '../../src/report/index.js'
import type { Results } from '../../src/results.js'
import { newRoom, scarp } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

const part = (archive: Uint8Array, name: string) =>
  new DOMParser().parseFromString(strFromU8(unzipSync(archive)[name]), 'text/xml')
const all = (from: { getElementsByTagName(name: string): Iterable<Element> }, name: string) => [
  ...from.getElementsByTagName(name),
]

/** Cells of every table of a document, row by row. */
const docxTables = (archive: Uint8Array) =>
  all(part(archive, 'word/document.xml'), 'w:tbl').map((table) =>
    all(table, 'w:tr').map((row) =>
      all(row, 'w:tc').map((cell) =>
        all(cell, 'w:t')
          .map((run) => run.textContent)
          .join(''),
      ),
    ),
  )

/** Cells of one sheet, row by row, numbers as numbers. */
function sheetRows(archive: Uint8Array, number: number): (string | number)[][] {
  const shared = all(part(archive, 'xl/sharedStrings.xml'), 'si').map((one) => one.textContent ?? '')
  return all(part(archive, `xl/worksheets/sheet${number}.xml`), 'row').map((row) =>
    all(row, 'c').map((cell) => {
      const value = all(cell, 'v')[0]?.textContent ?? cell.textContent ?? ''
      if (cell.getAttribute('t') === 's') return shared[Number(value)]
      return cell.getAttribute('t') === 'inlineStr' || value === '' ? value : Number(value)
    }),
  )
}

const markdownTables = (text: string) =>
  text
    .split('\n')
    .filter((line) => line.startsWith('|') && !/^\|[ :|-]+\|$/.test(line))
    .map((line) => line.slice(2, -2).split(' | '))

describe.each(['hedgerows', 'quillhaven'])('%s', (name) => {
  const tables = join(room, name, 'tables')
  let results: Results
  beforeAll(async () => {
    const words = ['run', resolve('boundaries', name, 'study.yaml'), '--out', name, '--quiet']
    expect(await scarp(words, { cwd: room })).toEqual({ code: 0, stdout: '', stderr: '' })
    results = JSON.parse(readFileSync(join(room, name, 'results.json'), 'utf8'))
  })
  const csv = (file: string) => csvParseRows(readFileSync(join(tables, `${file}.csv`), 'utf8'))
  const names = () => readdirSync(tables).flatMap((file) => (file.endsWith('.csv') ? [file.slice(0, -4)] : []))

  it('has no more than nine columns on paper, and says where a table was split', () => {
    for (const file of names()) {
      const text = readFileSync(join(tables, `${file}.md`), 'utf8')
      for (const row of markdownTables(text)) expect(row.length).toBeLessThanOrEqual(9)
      expect(text.includes('too many for one page')).toBe(csv(file)[0].length > 9)
    }
    expect(csv(`lines-${results.outcomes[0].outcome}`)[0].length).toBeGreaterThan(9)
  })

  it('tells of every line its units, bandwidth, weights and control mean, in the digits of results.json', () => {
    const [outcome] = results.outcomes
    const [head, ...rows] = csv(`lines-${outcome.outcome}`)
    const at = (column: string) => head.indexOf(column)
    const pooled = outcome.pooled as { weights: Record<string, number> }
    outcome.lines.forEach((line, i) => {
      if ('not_estimated' in line) return
      const places = rows[i][at('Estimate')].split('.')[1]?.length ?? 0
      expect(rows[i][at('Estimate')]).toBe(line.corrected.estimate.toFixed(places))
      expect(rows[i][at('Untreated mean')]).toBe(line.at_line.untreated.toFixed(places))
      expect(Number(rows[i][at('N treated')])).toBe(line.units_in_bandwidth.treated)
      expect(rows[i][at('Pooled weight')]).toBe(`${(100 * pooled.weights[line.line]).toFixed(1)}%`)
    })
    for (const column of ['N untreated', name === 'quillhaven' ? 'Length, km' : 'Cutoff at', 'Target weight', 'p'])
      expect(at(column)).toBeGreaterThan(0)
    if (name === 'quillhaven') expect(at('Clusters')).toBeGreaterThan(0)
  })

  it('has the cells of the paper in the document, and of the CSV in the workbook', () => {
    const document = docxTables(readFileSync(join(tables, 'tables.docx')))
    const workbook = readFileSync(join(tables, 'tables.xlsx'))
    const sheets = all(part(workbook, 'xl/workbook.xml'), 'sheet').map((sheet) => sheet.getAttribute('name'))
    expect([...sheets].sort()).toEqual(names().sort())
    let drawn = 0
    for (const [i, file] of (sheets as string[]).entries()) {
      const paper = readFileSync(join(tables, `${file}.md`), 'utf8')
      const parts = paper.split('too many for one page').length - 1 || 1
      const cells = document.slice(drawn, drawn + parts).flat()
      drawn += parts
      const plain = (text: string) =>
        text.replace(/\\(.)/g, '$1').replaceAll('&lt;', '<').replaceAll('&gt;', '>').replaceAll('&amp;', '&')
      const wanted = markdownTables(paper).map((row) => row.map(plain))
      expect(cells.filter((row) => row.length > 2)).toEqual(
        wanted.filter((row) => !row.slice(1).every((c) => c === '–')),
      )
      const rows = sheetRows(workbook, i + 1).slice(1)
      csv(file).forEach((row, r) => {
        row.forEach((text, c) => {
          const shown = rows[r][c] ?? ''
          const number = text.endsWith('%') ? Number(text.slice(0, -1)) / 100 : Number(text)
          if (typeof shown === 'number') expect(shown).toBeCloseTo(number, 12)
          else expect(shown.replaceAll('−', '-').replace('–', '')).toBe(text.replace('–', ''))
        })
      })
    }
    expect(drawn).toBe(document.length)
  })
})

it('has the same bytes whenever and wherever it is made, sheets of names that agree in 31 letters, and no letter lost', async () => {
  const long = 'a-very-long-name-of-an-outcome-that-goes-on'
  const tables: NamedTable[] = ['one', 'two'].map((end) => ({
    name: `${long}-${end}`,
    table: {
      caption: 'Ärmel & <Söhne>',
      columns: [{ head: 'Line', isText: true }, ...Array.from({ length: 17 }, (_, c) => ({ head: `c${c}` }))],
      rows: [
        ['Pauhl | "Zwei"', ...Array.from({ length: 17 }, (_, c) => `−1,234.${c}0`)],
        { head: 'x', across: 'none' },
      ],
      notes: ['note'],
    },
  }))
  const [first, book] = [await docxOf('T', tables), await xlsxOf(tables)]
  for (const [zone, now] of [
    ['America/Los_Angeles', '2027-03-04T05:06:07Z'],
    ['Asia/Tokyo', '2031-08-09T10:11:12Z'],
  ]) {
    vi.stubEnv('TZ', zone)
    vi.useFakeTimers({ toFake: ['Date'], now: new Date(now) })
    expect(Buffer.compare(first, await docxOf('T', tables)), zone).toBe(0)
    expect(Buffer.compare(book, await xlsxOf(tables)), zone).toBe(0)
    vi.useRealTimers()
    vi.unstubAllEnvs()
  }
  expect(docxTables(first).map((rows) => rows[0].length)).toEqual([7, 7, 6, 7, 7, 6])
  expect(docxTables(first)[0][1][0]).toBe('Pauhl | "Zwei"')
  const sheets = all(part(book, 'xl/workbook.xml'), 'sheet').map((sheet) => sheet.getAttribute('name') ?? '')
  expect(new Set(sheets).size).toBe(2)
  expect(sheets.every((name) => name.length <= 31)).toBe(true)
  expect(sheetRows(book, 1)[2].slice(0, 3)).toEqual(['Pauhl | "Zwei"', -1234, -1234.1])
})
