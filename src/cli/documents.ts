/** All tables in one document of a word processor. Its library is loaded when needed. */
import { type NamedTable, splitTable, type TextTable } from '../report/index.js'
import { atFixedDate } from './archive.js'
import { wordTable } from './wordTable.js'

/** More rows than anyone turns pages for; a word processor takes minutes over them. */
const mostRows = 1000

/** A DOCX: a heading for each table, in parts of nine columns at most, its notes under it. */
export async function docxOf(title: string, tables: readonly NamedTable[]): Promise<Uint8Array> {
  const { Document, HeadingLevel, Packer, Paragraph, TextRun } = await import('docx')
  const parts = tables.flatMap(({ name, table }) => splitTable(withMostRows(name, table)))
  const note = (text: string) => new Paragraph({ children: [new TextRun({ text, size: 16 })], spacing: { before: 60 } })
  const document = new Document({
    title,
    creator: 'scarp',
    sections: [
      {
        children: [
          new Paragraph({ text: title, heading: HeadingLevel.TITLE }),
          ...parts.flatMap((table, index) => [
            new Paragraph({ text: table.caption, heading: HeadingLevel.HEADING_2, keepNext: true }),
            new Paragraph(`${mark}${index}`),
            ...table.notes.map(note),
          ]),
        ],
      },
    ],
  })
  const archive = new Uint8Array(await Packer.toArrayBuffer(document))
  return atFixedDate(archive, { 'word/document.xml': (text) => withTables(text, parts) })
}

/** Begins the paragraph that a table takes the place of; no other paragraph is without a look of its own. */
const mark = '\ue000'
const marked = new RegExp(`<w:p><w:r><w:t xml:space="preserve">${mark}(\\d+)</w:t></w:r></w:p>`, 'g')

function withTables(text: string, parts: readonly TextTable[]): string {
  let put = 0
  const whole = text.replace(marked, (_, index: string) => {
    put++
    return wordTable(parts[Number(index)])
  })
  if (put !== parts.length) throw new Error(`${put} of ${parts.length} tables found their place in the document`)
  return whole
}

function withMostRows(name: string, table: TextTable): TextTable {
  const more = table.rows.length - mostRows
  if (more <= 0) return table
  const note = `${more} more ${more === 1 ? 'row is' : 'rows are'} in ${name}.csv.`
  return { ...table, rows: table.rows.slice(0, mostRows), notes: [...table.notes, note] }
}
