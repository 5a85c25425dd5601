/** All tables in one document of a word processor. Its library is loaded when needed. */
import type { NamedTable, TableRow, TextTable } from '../report/index.js'
import { shownText, splitTable } from '../report/index.js'
import { atFixedDate } from './archive.js'
import { textsOf, widthOf } from './columnWidths.js'

/** Between the margins of an A4 page, in twentieths of a point. */
const pageWidth = 9026

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
  const drawn = ({ columns, rows }: TextTable) => {
    const widths = columns.map(({ head }, c) => widthOf(head, textsOf(rows, c), 30))
    const widthInAll = widths.reduce((sum, width) => sum + width, 0)
    return new Table({
      width: { size: 100, type: WidthType.PERCENTAGE },
      columnWidths: columns.map((_, c) => Math.round((pageWidth * widths[c]) / widthInAll)),
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
              : row.map((one, c) => cell(shownText(one), columns[c].isText === true, { isLast })),
          })
        }),
      ],
    })
  }
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
