/** The tables of both example studies in every format: the same cells, the digits of results.json, nine columns at most on paper. */
import { readdirSync, readFileSync, rmSync } from 'node:fs'
import { join, resolve } from 'node:path'
import { DOMParser, type Element } from '@xmldom/xmldom'
import { csvParseRows } from 'd3-dsv'
import { strFromU8, unzipSync } from 'fflate'
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest'
import { docxOf } from '../../src/cli/documents.js'
import { xlsxOf } from '../../src/cli/workbook.js'
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

interface SheetCell {
  readonly value: string | number
  /** The display format of a number. */
  readonly format: string
}

/** Cells of one sheet, row by row, numbers as numbers, each under its column letter. */
function sheetRows(archive: Uint8Array, number: number): Map<string, SheetCell>[] {
  const shared = all(part(archive, 'xl/sharedStrings.xml'), 'si').map((one) => one.textContent ?? '')
  const styles = part(archive, 'xl/styles.xml')
  const formats = new Map(
    all(styles, 'numFmt').map((one) => [one.getAttribute('numFmtId'), one.getAttribute('formatCode') ?? '']),
  )
  // built-in formats of ECMA-376, part 1, 18.8.30
  for (const [id, format] of [
    ['1', '0'],
    ['2', '0.00'],
    ['3', '#,##0'],
    ['4', '#,##0.00'],
    ['9', '0%'],
    ['10', '0.00%'],
  ])
    formats.set(id, format)
  const used = all(all(styles, 'cellXfs')[0], 'xf').map((one) => formats.get(one.getAttribute('numFmtId')) ?? '')
  return all(part(archive, `xl/worksheets/sheet${number}.xml`), 'row').map(
    (row) =>
      new Map(
        all(row, 'c').map((cell) => {
          const value = all(cell, 'v')[0]?.textContent ?? ''
          const isShared = cell.getAttribute('t') === 's'
          const column = (cell.getAttribute('r') ?? '').replace(/\d/g, '')
          const format = used[Number(cell.getAttribute('s') ?? 0)]
          return [column, { value: isShared ? shared[Number(value)] : Number(value), format }]
        }),
      ),
  )
}

const letterOf = (column: number) => String.fromCharCode(65 + column)

/** What a spreadsheet shows of a number, in the marks of the paper. */
function display(value: number, format: string): string {
  const words = /^"(.*)"$/.exec(format)
  if (words) return words[1]
  const [, grouped, decimals = '', power, percent] = /^(#,##)?0(?:\.(0+))?(E\+0)?(%)?$/.exec(format) as RegExpExecArray
  const size = Math.abs(percent ? 100 * value : value)
  const digits = power ? size.toExponential(decimals.length) : size.toFixed(decimals.length)
  const text = grouped ? digits.replace(/\B(?=(\d{3})+(?!\d))(?<!\.\d*)/g, ',') : digits
  return `${value < 0 && Number(digits) !== 0 ? '−' : ''}${text}${percent ?? ''}`
}

const numbersIn = (text: string) => text.match(/[<>]?−?\d+(?:,\d{3})*(?:\.\d+)?(?:e-?\d+)?%?/g) ?? []

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
      const parts = text.match(/^\*\*/gm)?.length ?? 0
      expect(text.match(/too many for one page/g)?.length ?? 0).toBe(parts > 1 ? parts : 0)
    }
    const lines = readFileSync(join(tables, `lines-${results.outcomes[0].outcome}.md`), 'utf8')
    expect(lines).toContain('(part 2 of 2)')
  })

  it('tells of every line its units, bandwidth, weights and control mean: in CSV the doubles of results.json', () => {
    const [outcome] = results.outcomes
    const [head, ...rows] = csv(`lines-${outcome.outcome}`)
    const at = (column: string) => head.indexOf(column)
    const pooled = outcome.pooled as { weights: Record<string, number> }
    const unit = name === 'quillhaven' ? 'Bandwidth, m' : 'Bandwidth'
    outcome.lines.forEach((line, i) => {
      if ('not_estimated' in line) return
      const length = results.lines[i].length_m
      const wanted: Record<string, number | undefined> = {
        [name === 'quillhaven' ? 'Length, km' : 'Cutoff at']:
          length === undefined ? results.lines[i].cutoff : length / 1000,
        'N untreated': line.units_in_bandwidth.untreated,
        'N treated': line.units_in_bandwidth.treated,
        [`${unit}: untreated`]: line.bandwidth.untreated,
        [`${unit}: treated`]: line.bandwidth.treated,
        'Pooled weight': pooled.weights[line.line],
        'Target weight': (outcome.target as typeof pooled).weights[line.line],
        'Untreated mean': line.at_line.untreated,
        Estimate: line.corrected.estimate,
        'Standard error': line.corrected.standard_error,
        '95% interval: low': line.corrected.low,
        '95% interval: high': line.corrected.high,
        p: line.corrected.p,
      }
      for (const [column, value] of Object.entries(wanted)) expect(Number(rows[i][at(column)]), column).toBe(value)
      if (name === 'quillhaven') expect(Number(rows[i][at('Clusters')])).toBe(line.clusters)
    })
  })

  it('has the cells of the paper in the document, and in the workbook the doubles of the CSV, shown as on paper', () => {
    const document = docxTables(readFileSync(join(tables, 'tables.docx')))
    const workbook = readFileSync(join(tables, 'tables.xlsx'))
    const book = part(workbook, 'xl/workbook.xml')
    const sheets = all(book, 'sheet').map((sheet) => sheet.getAttribute('name'))
    expect([...sheets].sort()).toEqual(names().sort())
    expect(all(book, 'definedName').map((one) => one.textContent)).toEqual(sheets.map((sheet) => `'${sheet}'!$1:$2`))
    let drawn = 0
    let numbers = 0
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
      const [, ...rows] = sheetRows(workbook, i + 1)
      const [heads, ...lines] = csv(file)
      expect(heads.map((_, c) => rows[0].get(letterOf(c))?.value)).toEqual(heads)
      // the cells of the paper in one row each, under their heads
      const each = wanted.length / parts
      const shownAs = (r: number, head: string) =>
        Array.from({ length: parts }, (_, k) => {
          const column = wanted[k * each].findIndex((one) => head === one || head.startsWith(`${one}: `))
          return column === -1 ? undefined : wanted[k * each + r + 1][column]
        }).find((text) => text !== undefined) as string
      lines.forEach((line, r) => {
        line.forEach((text, c) => {
          const cell = rows[r + 1].get(letterOf(c))
          if (typeof cell?.value === 'number') {
            expect(cell.value, heads[c]).toBe(Number(text))
            expect(numbersIn(shownAs(r, heads[c]))).toContain(display(cell.value, cell.format))
            numbers++
          } else expect(cell?.value ?? '').toBe(text)
        })
      })
    }
    expect(drawn).toBe(document.length)
    expect(numbers).toBeGreaterThan(300)
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
        [
          'Pauhl | "Zwei"',
          ...Array.from({ length: 17 }, (_, c) => {
            const text = c === 0 ? '<0.001' : `−1,234.${c}0`
            return { text, numbers: [{ value: -1234 - c / 10 - 1e-9, text }] }
          }),
        ],
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
  const row = sheetRows(book, 1)[2]
  expect(['A', 'B', 'C'].map((letter) => row.get(letter))).toEqual([
    { value: 'Pauhl | "Zwei"', format: '' },
    { value: -1234 - 1e-9, format: '"<0.001"' },
    { value: -1234.1 - 1e-9, format: '#,##0.00' },
  ])
})

it('ends a table of the document at a thousand rows and says where the rest is; the head is repeated, a mark in the text stays text', async () => {
  const columns = [{ head: 'Line', isText: true }, { head: 'N' }]
  const rows = Array.from({ length: 1002 }, (_, row) => [`line ${row}`, `${row}`])
  const long: NamedTable = { name: 'lines-y', table: { caption: '\ue0000', columns, rows, notes: ['\ue0000'] } }
  const document = await docxOf('\ue0000', [long])
  const [drawn] = docxTables(document)
  expect(drawn.length).toBe(1001)
  expect(drawn[1000]).toEqual(['line 999', '999'])
  const text = part(document, 'word/document.xml').documentElement?.textContent ?? ''
  expect(text).toContain('2 more rows are in lines-y.csv.')
  expect(text.match(/\ue0000/g)?.length).toBe(3)
  expect(all(part(document, 'word/document.xml'), 'w:tblHeader').length).toBe(1)
})
