/** A table as programs read it: its rows and columns, each number in full and in a column of its own. */
import { missing } from './numbers.js'
import type { ShownNumber } from './tableCells.js'
import type { TableColumn, TextTable } from './tables.js'

export interface MachineTable {
  readonly columns: readonly TableColumn[]
  /** As many cells as columns, undefined where there is nothing; or the head and why the row has no numbers. */
  readonly rows: readonly (readonly (string | ShownNumber | undefined)[])[]
}

/** A column of several numbers becomes one column for each, `HEAD: PART`. */
export function machineTable({ columns, rows }: TextTable): MachineTable {
  return {
    columns: columns.flatMap(({ head, isText, parts }) =>
      parts ? parts.map((part) => ({ head: `${head}: ${part}` })) : [{ head, isText }],
    ),
    rows: rows.map((row) => {
      if ('across' in row) return [row.head, row.across]
      return row.flatMap((cell, column) => {
        const width = columns[column].parts?.length ?? 1
        const filled = typeof cell === 'string' ? [cell === missing ? undefined : cell] : cell.numbers.map(finiteOf)
        return Array.from({ length: width }, (_, part) => filled[part])
      })
    }),
  }
}

const finiteOf = (number: ShownNumber) => (Number.isFinite(number.value) ? number : undefined)
