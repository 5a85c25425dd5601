/** A table too wide for a page, in parts of nine columns at most. */
import { type TableRow, type TextTable, withColumns } from './tables.js'

const mostColumns = 9
const mostHeads = 2

/** The first columns of text stand at the head of every part; rows that run across are in the first part alone. */
export function splitTable(table: TextTable): TextTable[] {
  const { columns, notes, caption } = table
  if (columns.length <= mostColumns) return [table]
  const firstNumbers = columns.findIndex(({ isText }) => !isText)
  const heads = Math.min(mostHeads, Math.max(1, firstNumbers === -1 ? 1 : firstNumbers))
  const others = columns.length - heads
  const count = Math.ceil(others / (mostColumns - heads))
  const each = Math.ceil(others / count)
  return Array.from({ length: count }, (_, part) => {
    const from = heads + part * each
    const picked = withColumns(table, (column) => column < heads || (column >= from && column < from + each))
    const of = `Part ${part + 1} of ${count}: ${columns.length} columns are too many for one page.`
    return {
      ...picked,
      caption: `${caption} (part ${part + 1} of ${count})`,
      rows: part === 0 ? picked.rows : picked.rows.filter((row: TableRow) => !('across' in row)),
      notes: part === count - 1 ? [...notes, of] : [of],
    }
  })
}
