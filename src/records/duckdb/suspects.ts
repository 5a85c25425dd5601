import type { DuckDBConnection } from '@duckdb/node-api'
import type { Problem } from '../../problem.js'
import { labelSql, numberAdvice, numberOfText } from './cells.js'
import type { Chosen } from './choose.js'
import type { Suspects } from './rows.js'
import { alias, PROBLEM_LIMIT, placed, type Source } from './source.js'
import { textAt } from './vectors.js'

/**
 * Reads the texts of suspect cells: words for a missing value and truth values are put in place, anything else is a problem.
 * The first thousand are listed in the file's order, the rest counted.
 */
export async function settleSuspects(
  connection: DuckDBConnection,
  source: Source,
  suspects: readonly Suspects[],
  lineOfRow: Int32Array,
): Promise<Problem[]> {
  if (suspects.length === 0) return []
  const texts = suspects.map(({ column }) => `coalesce(${labelSql(alias(column.position), column.type)}, '')`)
  const positions = [...new Set(suspects.map(({ column }) => column.position))]
  const result = await connection.stream(`SELECT ${texts.join(', ')} FROM (${source.query(positions)})`)
  const problems: Problem[] = []
  const next = suspects.map(() => 0)
  let bad = 0
  let row = 0
  for (let chunk = await result.fetchChunk(); chunk !== null && chunk.rowCount > 0; chunk = await result.fetchChunk()) {
    const end = row + chunk.rowCount
    for (;;) {
      const column = firstPending(suspects, next, end)
      if (column === -1) break
      const { rows, places, values } = suspects[column]
      const at = next[column]++
      const text = textAt(chunk, column, rows[at] - row)
      const number = numberOfText(text)
      if (number !== undefined) {
        if (places[at] >= 0) values[places[at]] = number
      } else if (bad++ < PROBLEM_LIMIT) {
        problems.push(badCell(source, suspects[column].column, lineOfRow[rows[at]], text))
      }
    }
    row = end
  }
  if (bad > problems.length) problems.push(moreBadCells(source.file, bad - problems.length))
  return problems
}

/** The column with the first suspect before row `end`; -1 where there is none. */
function firstPending(suspects: readonly Suspects[], next: readonly number[], end: number): number {
  let first = -1
  let firstRow = end
  for (let column = 0; column < suspects.length; column++) {
    const row = suspects[column].rows[next[column]]
    if (row !== undefined && row < firstRow) {
      first = column
      firstRow = row
    }
  }
  return first
}

function badCell(source: Source, column: Chosen, at: number, text: string): Problem {
  return {
    ...placed(source, at),
    what: `${column.name} (${column.askedBy}): must be a number`,
    found: `"${text.length > 60 ? `${text.slice(0, 60)}…` : text}"`,
    todo: numberAdvice(text),
  }
}

function moreBadCells(file: string, count: number): Problem {
  return { file, what: 'more cells that must be numbers', found: `${count}`, todo: 'mend the columns named above' }
}
