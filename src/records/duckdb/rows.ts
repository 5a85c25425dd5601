import type { DuckDBConnection, DuckDBDataChunk } from '@duckdb/node-api'
import type { Column } from '../table.js'
import { labelSql, numberSql, useOf } from './cells.js'
import type { Chosen } from './choose.js'
import { trimmed, withRoom } from './growing.js'
import { KEPT, labelCoder } from './labels.js'
import { alias } from './source.js'
import { bytesOf, doublesOf, textAt, textWordsOf, wordPairsOf } from './vectors.js'

/** Room to begin with; it grows as rows come. */
const ROWS_EXPECTED = 1 << 16

/** What the condition says of a row: DROPPED, KEPT, or 2 where it can't be decided (a cell it looks at is missing). */
const DROPPED = 0

/** Cells of a number column that SQL read as no number, or as an infinite one: text that must be looked at. */
export interface Suspects {
  readonly column: Chosen
  /** Rows of the file, from 0. */
  readonly rows: readonly number[]
  /** Where the number belongs in `values`; -1 where the row isn't kept. */
  readonly places: readonly number[]
  /** The column's numbers, to be mended in place. */
  readonly values: Float64Array
}

export interface RowsRead {
  readonly rowsRead: number
  /** Rows of the file, from 0, that were kept; absent without a condition. */
  readonly rowOf?: Int32Array
  readonly columns: readonly Column[]
  readonly suspects: readonly Suspects[]
}

/** Fills one column from chunks as they come. */
interface Filler {
  /** Expressions of the query that it reads, from `first` on. */
  readonly sql: readonly string[]
  take(chunk: DuckDBDataChunk, first: number, firstRow: number, verdicts: Uint8Array | undefined): void
  finish(): { readonly column: Column; readonly suspects?: Suspects }
}

/**
 * Streams the chosen columns of `from` (a query that has them by `alias`) into typed arrays, in the file's order.
 * keep: a condition as SQL; cells are looked at in every row that it doesn't drop for certain.
 */
export async function readRows(
  connection: DuckDBConnection,
  from: string,
  chosen: readonly Chosen[],
  keep: string | undefined,
): Promise<RowsRead> {
  const fillers = chosen.map((column) => (column.kind === 'number' ? numberFiller(column) : labelFiller(column)))
  const expressions = fillers.flatMap((filler) => filler.sql)
  if (keep !== undefined) expressions.push(`coalesce(CAST(${keep} AS UTINYINT), CAST(2 AS UTINYINT))`)
  const result = await connection.stream(
    `SELECT ${expressions.length > 0 ? expressions.join(', ') : '1'} FROM (${from})`,
  )
  let rowsRead = 0
  let rowsKept = 0
  let rowOf: Int32Array = new Int32Array(keep === undefined ? 0 : ROWS_EXPECTED)
  for (let chunk = await result.fetchChunk(); chunk !== null && chunk.rowCount > 0; chunk = await result.fetchChunk()) {
    const verdicts = keep === undefined ? undefined : bytesOf(chunk, expressions.length - 1)
    let first = 0
    for (const filler of fillers) {
      filler.take(chunk, first, rowsRead, verdicts)
      first += filler.sql.length
    }
    if (verdicts !== undefined) {
      rowOf = withRoom(rowOf, rowsKept + verdicts.length)
      for (let i = 0; i < verdicts.length; i++) if (verdicts[i] === KEPT) rowOf[rowsKept++] = rowsRead + i
    }
    rowsRead += chunk.rowCount
  }
  const filled = fillers.map((filler) => filler.finish())
  return {
    rowsRead,
    rowOf: keep === undefined ? undefined : trimmed(rowOf, rowsKept),
    columns: filled.map(({ column }) => column),
    suspects: filled.flatMap(({ suspects }) => suspects ?? []),
  }
}

function numberFiller(column: Chosen): Filler {
  const cell = alias(column.position)
  const isText = useOf(column.type) === 'text'
  let values: Float64Array = new Float64Array(ROWS_EXPECTED)
  let length = 0
  const suspectRows: number[] = []
  const places: number[] = []
  return {
    sql: [`coalesce(${numberSql(cell, column.type)}, CAST('nan' AS DOUBLE))`, `CAST(${cell} IS NULL AS UTINYINT)`],
    take(chunk, first, firstRow, verdicts) {
      const numbers = doublesOf(chunk, first)
      const isNull = bytesOf(chunk, first + 1)
      values = withRoom(values, length + numbers.length)
      for (let i = 0; i < numbers.length; i++) {
        const verdict = verdicts === undefined ? KEPT : verdicts[i]
        if (verdict === DROPPED) continue
        const number = numbers[i]
        if (number - number !== 0 && isNull[i] === 0 && (isText || !Number.isNaN(number))) {
          suspectRows.push(firstRow + i)
          places.push(verdict === KEPT ? length : -1)
        }
        if (verdict === KEPT) values[length++] = number
      }
    },
    finish() {
      const { name } = column
      const numbers = trimmed(values, length)
      values = numbers
      const suspects = suspectRows.length > 0 ? { column, rows: suspectRows, places, values: numbers } : undefined
      return { column: { kind: 'number', name, values: numbers }, suspects }
    },
  }
}

function labelFiller(column: Chosen): Filler {
  const text = `coalesce(${labelSql(alias(column.position), column.type)}, '')`
  const coder = labelCoder(ROWS_EXPECTED)
  return {
    sql: [text, `hash(${text})`],
    take(chunk, first, _firstRow, verdicts) {
      const words = textWordsOf(chunk, first)
      coder.add(words, wordPairsOf(chunk, first + 1), chunk.rowCount, verdicts, (row) => textAt(chunk, first, row))
    },
    finish: () => ({ column: { kind: 'label', name: column.name, ...coder.finish() } }),
  }
}
