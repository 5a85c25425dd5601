/** A table too wide for a page, in parts of nine columns at most. */
import type { TableRow, TextTable } from './tables.js'

const mostColumns = 9

/** The first column stands at the head of every part; rows that run across are in the first part alone. */
export function splitTable(table: TextTable): TextTable[] {
  const { columns, rows, notes, caption } = table
  if (columns.length <= mostColumns) return [table]
  const others = columns.length - 1
  const count = Math.ceil(others / (mostColumns - 1))
  const each = Math.ceil(others / count)
  return Array.from({ length: count }, (_, part) => {
    const from = 1 + part * each
    const pick = <T>(all: readonly T[]): T[] => [all[0], ...all.slice(from, from + each)]
    const of = `Part ${part + 1} of ${count}: ${columns.length} columns are too many for one page.`
    return {
      caption: `${caption} (part ${part + 1} of ${count})`,
      columns: pick(columns),
      rows: rows.flatMap((row): TableRow[] => ('across' in row ? (part === 0 ? [row] : []) : [pick(row)])),
      notes: part === count - 1 ? [...notes, of] : [of],
    }
  })
}
