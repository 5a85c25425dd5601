/**
 * All tables in one document of a word processor and one workbook. Both are zip archives whose libraries write the time
 * of day into them: it is put at a fixed date, so that equal tables have equal bytes. Libraries are loaded when needed.
 */
import type { NamedTable, TableRow, TextTable } from '../report/index.js'
import { numberOfCell, splitTable } from '../report/index.js'

const fixedDate = '1980-01-01T12:00:00Z'
/** The same for a zip archive, which keeps local time: these hours and minutes wherever the machine stands. */
const fixedLocalDate = () => new Date(1980, 0, 1, 12)

const isAcross = (row: TableRow): row is { readonly head: string; readonly across: string } => 'across' in row

/** A DOCX: a table a heading, in parts of nine columns at most, its notes under it. */
export async function docxOf(title: string, tables: readonly NamedTable[]): Promise<Uint8Array> {
  const docx = await import('docx')
  const { AlignmentType, BorderStyle, HeadingLevel, Paragraph, Table, TableCell, TextRun, WidthType } = docx
  const none = { style: BorderStyle.NONE, size: 0, color: 'auto' } as const
  const rule = { style: BorderStyle.SINGLE, size: 6, color: '000000' } as const
  const cell = (text: string, isText: boolean, { isHead = false, span = 1, isLast = false } = {}) =>
    new TableCell({
      columnSpan: span,
      borders: { left: none, right: none, top: isHead ? rule : none, bottom: isHead || isLast ? rule : none },
      margins: { left: 40, right: 40, top: 20, bottom: 20 },
      children: [
        new Paragraph({
          alignment: isText ? AlignmentType.LEFT : AlignmentType.RIGHT,
          children: [new TextRun({ text, bold: isHead, size: 16 })],
        }),
      ],
    })
  const drawn = ({ columns, rows }: TextTable) =>
    new Table({
      width: { size: 100, type: WidthType.PERCENTAGE },
      rows: [
        new docx.TableRow({
          tableHeader: true,
          cantSplit: true,
          children: columns.map(({ head, isText }) => cell(head, isText === true, { isHead: true })),
        }),
        ...rows.map((row, i) => {
          const isLast = i === rows.length - 1
          return new docx.TableRow({
            cantSplit: true,
            children: isAcross(row)
              ? [cell(row.head, true, { isLast }), cell(row.across, true, { span: columns.length - 1, isLast })]
              : row.map((text, c) => cell(text, columns[c].isText === true, { isLast })),
          })
        }),
      ],
    })
  const note = (text: string) => new Paragraph({ children: [new TextRun({ text, size: 16 })], spacing: { before: 60 } })
  const parts = tables.flatMap(({ table }) => splitTable(table))
  const document = new docx.Document({
    title,
    creator: 'scarp',
    sections: [
      {
        children: [
          new Paragraph({ text: title, heading: HeadingLevel.TITLE }),
          ...parts.flatMap((table) => [
            new Paragraph({ text: table.caption, heading: HeadingLevel.HEADING_2, keepNext: true }),
            drawn(table),
            ...table.notes.map(note),
          ]),
        ],
      },
    ],
  })
  return atFixedDate(new Uint8Array(await docx.Packer.toArrayBuffer(document)))
}

/** An XLSX: a sheet for each table, whole; numbers as numbers, shown with the digits of the paper. */
export async function xlsxOf(tables: readonly NamedTable[]): Promise<Uint8Array> {
  const { default: writeWorkbook } = await import('write-excel-file/node')
  const names = sheetNames(tables.map(({ name }) => name))
  const sheets = tables.map(({ table }, i) => ({
    sheet: names[i],
    stickyRowsCount: 2,
    columns: table.columns.map((_, c) => ({ width: widthOf(table, c) })),
    data: [
      [{ value: table.caption, fontWeight: 'bold' as const }],
      table.columns.map(({ head, isText }) => ({
        value: head,
        fontWeight: 'bold' as const,
        align: isText ? ('left' as const) : ('right' as const),
        wrap: true,
      })),
      ...table.rows.map((row) =>
        isAcross(row)
          ? [{ value: row.head }, { value: row.across }]
          : row.map((text, c) => cellOf(text, table.columns[c])),
      ),
      ...table.notes.map((text) => [{ value: text }]),
    ],
  }))
  return atFixedDate(new Uint8Array(await writeWorkbook(sheets).toBuffer()))
}

function cellOf(text: string, { isText }: { readonly isText?: boolean }) {
  const number = isText ? undefined : numberOfCell(text)
  if (!number) return text === '' ? null : { value: text, align: isText ? ('left' as const) : ('right' as const) }
  const whole = number.isGrouped ? '#,##0' : '0'
  const decimals = number.places > 0 ? `.${'0'.repeat(number.places)}` : ''
  return { value: number.value, type: Number, format: `${whole}${decimals}${number.isPercent ? '%' : ''}` }
}

function widthOf({ columns, rows }: TextTable, column: number): number {
  const longest = rows.reduce((most, row) => (isAcross(row) ? most : Math.max(most, row[column].length)), 0)
  return Math.min(60, Math.max(8, longest + 2, Math.min(24, columns[column].head.length + 2)))
}

/** At most 31 letters, none of \ / ? * [ ] :, and no two alike whatever their case. */
function sheetNames(names: readonly string[]): string[] {
  const taken = new Set<string>()
  return names.map((name) => {
    const clean = name.replace(/[\\/?*[\]:]/g, ' ').slice(0, 31)
    let free = clean
    for (let k = 2; taken.has(free.toLowerCase()); k++) free = `${clean.slice(0, 30 - String(k).length)}~${k}`
    taken.add(free.toLowerCase())
    return free
  })
}

/** The archive anew: entries in order of their names, all of one date, and that date in the properties. */
async function atFixedDate(archive: Uint8Array): Promise<Uint8Array> {
  const { strFromU8, strToU8, unzipSync, zipSync } = await import('fflate')
  const entries = Object.entries(unzipSync(archive)).sort(([a], [b]) => (a < b ? -1 : 1))
  const dated = entries.map(([name, bytes]): [string, Uint8Array] => {
    if (name !== 'docProps/core.xml') return [name, bytes]
    const text = strFromU8(bytes).replace(/(<dcterms:(?:created|modified)[^>]*>)[^<]*/g, `$1${fixedDate}`)
    return [name, strToU8(text)]
  })
  return zipSync(Object.fromEntries(dated), { mtime: fixedLocalDate() })
}
