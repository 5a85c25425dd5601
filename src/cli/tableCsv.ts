/** A table as CSV, numbers in full: reading it gives the same doubles and labels. */
import type { Column, Table } from '../records/index.js'
import { csvCell } from './unitsCsv.js'

const rowsInPart = 20_000

export function* tableCsv(table: Table): Generator<string> {
  const columns = [...table.columns.values()]
  const cells = columns.map(cellsOf)
  yield `${columns.map(({ name }) => csvCell(name)).join(',')}\n`
  for (let start = 0; start < table.rows; start += rowsInPart) {
    const end = Math.min(start + rowsInPart, table.rows)
    let part = ''
    for (let row = start; row < end; row++) part += `${cells.map((cellOf) => cellOf(row)).join(',')}\n`
    yield part
  }
}

function cellsOf(column: Column): (row: number) => string {
  if (column.kind === 'number') {
    const { values } = column
    return (row) => (Number.isNaN(values[row]) ? '' : `${values[row]}`)
  }
  const texts = column.labels.map(csvCell)
  return (row) => texts[column.codes[row]] ?? ''
}
