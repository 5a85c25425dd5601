/**
 * A table in the language of word processors (ECMA-376, part 1, 17.4), written as text: a document object for each cell
 * costs milliseconds, and gigabytes where there are thousands of rows.
 */
import { escapeHtml as escapeXml, shownText, type TableRow, type TextTable } from '../report/index.js'
import { textsOf, widthOf } from './columnWidths.js'

/** Between the margins of an A4 page, in twentieths of a point. */
const pageWidth = 9026
const fontSize = '<w:sz w:val="16"/><w:szCs w:val="16"/>'
const rule = (side: string) => `<w:${side} w:val="single" w:sz="6" w:space="0" w:color="000000"/>`
const margins = ['top', 'left', 'bottom', 'right']
  .map((side) => `<w:${side} w:w="${side === 'left' || side === 'right' ? 40 : 20}" w:type="dxa"/>`)
  .join('')

interface CellLook {
  readonly width: number
  readonly isText: boolean
  readonly isHead?: boolean
  /** Columns. */
  readonly span?: number
}

/** Rules above and below the head and under the last row; the head stands on every page. */
export function wordTable({ columns, rows }: TextTable): string {
  const widths = columnWidths({ columns, rows })
  const lookOf = (column: number) => ({ width: widths[column], isText: columns[column].isText === true })
  const head = columns.map((column, c) => cellXml(column.head, { ...lookOf(c), isHead: true }))
  const body = rows.map((row) => {
    if (!('across' in row)) return rowXml(row.map((cell, c) => cellXml(shownText(cell), lookOf(c))))
    const rest = { width: pageWidth - widths[0], isText: true, span: columns.length - 1 }
    return rowXml([cellXml(row.head, { width: widths[0], isText: true }), cellXml(row.across, rest)])
  })
  const properties = `<w:tblPr><w:tblW w:w="${pageWidth}" w:type="dxa"/><w:tblBorders>${rule('top')}${rule('bottom')}</w:tblBorders><w:tblCellMar>${margins}</w:tblCellMar></w:tblPr>`
  const grid = `<w:tblGrid>${widths.map((width) => `<w:gridCol w:w="${width}"/>`).join('')}</w:tblGrid>`
  return `<w:tbl>${properties}${grid}${rowXml(head, '<w:tblHeader/>')}${body.join('')}</w:tbl>`
}

function columnWidths({ columns, rows }: { columns: TextTable['columns']; rows: readonly TableRow[] }): number[] {
  const letters = columns.map(({ head }, c) => widthOf(head, textsOf(rows, c), 30))
  const all = letters.reduce((sum, width) => sum + width, 0)
  return letters.map((width) => Math.round((pageWidth * width) / all))
}

function rowXml(cells: readonly string[], more = ''): string {
  return `<w:tr><w:trPr><w:cantSplit/>${more}</w:trPr>${cells.join('')}</w:tr>`
}

function cellXml(text: string, { width, isText, isHead = false, span = 1 }: CellLook): string {
  const across = span > 1 ? `<w:gridSpan w:val="${span}"/>` : ''
  const under = isHead ? `<w:tcBorders>${rule('bottom')}</w:tcBorders>` : ''
  const look = `<w:tcPr><w:tcW w:w="${width}" w:type="dxa"/>${across}${under}</w:tcPr>`
  const run = `<w:r><w:rPr>${isHead ? '<w:b/><w:bCs/>' : ''}${fontSize}</w:rPr><w:t xml:space="preserve">${escapeXml(text)}</w:t></w:r>`
  return `<w:tc>${look}<w:p><w:pPr><w:jc w:val="${isText ? 'left' : 'right'}"/></w:pPr>${run}</w:p></w:tc>`
}
