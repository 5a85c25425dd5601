import type { DuckDBConnection } from '@duckdb/node-api'
import type { Checked, Problem } from '../../problem.js'
import type { Table, WantedColumn } from '../table.js'
import { naturalSql, typeOfKinds } from './cells.js'
import { type Chosen, chooseRest, chooseWanted, kindsOf } from './choose.js'
import { identifier, reasonOf, rowsOf } from './connection.js'
import { type Condition, readCondition } from './keep.js'
import { type RowsRead, readRows } from './rows.js'
import { alias, type RowsOrFailure, type Source } from './source.js'
import { settleSuspects } from './suspects.js'

/** What is read of a source. */
export interface Wish {
  readonly wanted: readonly WantedColumn[]
  /** SQL condition, and the key that holds it. */
  readonly keep?: string
  readonly keepAskedBy: string
  /** Every other column too. */
  readonly all: boolean
}

/** Columns of a source as typed arrays, or everything that is wrong with them. */
export async function readColumns(connection: DuckDBConnection, source: Source, wish: Wish): Promise<Checked<Table>> {
  const problems: Problem[] = []
  const chosen = chooseWanted(source, wish.wanted, problems)
  const checked =
    wish.keep === undefined
      ? undefined
      : await readCondition(connection, wish.keep, source.names, wish.keepAskedBy, source.file)
  if (checked?.ok === false) problems.push(...checked.problems)
  // Cells are not judged while it is unknown which rows count.
  const columns = checked?.ok === false ? [] : chosen
  const condition = checked?.ok ? checked.value : undefined
  const [surveyed, read] = await Promise.all([
    source.survey(),
    attempt(() => readChosen(connection, source, columns, condition, wish)),
  ])
  if (surveyed.problems.length > 0) return { ok: false, problems: [...problems, ...surveyed.problems] }
  if ('refused' in read) problems.push(read.refused)
  const outcome = 'rows' in read ? { rows: read.rows.rowsRead } : await withoutCondition(connection, source, read)
  const located = await source.locate(outcome, surveyed)
  if ('problems' in located) return { ok: false, problems: [...problems, ...located.problems] }
  if ('failure' in read) problems.push(conditionProblem(source.file, wish, reasonOf(read.failure)))
  if (!('rows' in read)) return { ok: false, problems }
  const { rowsRead, rowOf, suspects } = read.rows
  if (rowsRead === 0) problems.push(noRows(source.file))
  problems.push(...(await settleSuspects(connection, source, suspects, located.lineOfRow)))
  if (problems.length > 0) return { ok: false, problems }
  const lineOfRow = rowOf === undefined ? located.lineOfRow : rowOf.map((row) => located.lineOfRow[row])
  return {
    ok: true,
    value: {
      file: source.file,
      rowsRead,
      rows: lineOfRow.length,
      lineOfRow,
      columns: new Map(read.rows.columns.map((column) => [column.name, column])),
      sha256: surveyed.sha256,
    },
  }
}

type Attempt = { readonly rows: RowsRead } | { readonly failure: unknown } | { readonly refused: Problem }

async function attempt(job: () => Promise<RowsRead | Problem>): Promise<Attempt> {
  try {
    const done = await job()
    return 'rowsRead' in done ? { rows: done } : { refused: done }
  } catch (failure) {
    return { failure }
  }
}

async function readChosen(
  connection: DuckDBConnection,
  source: Source,
  wanted: readonly Chosen[],
  condition: Condition | undefined,
  wish: Wish,
): Promise<RowsRead | Problem> {
  const chosen = wish.all ? [...wanted, ...(await chooseRest(connection, source, wanted))] : wanted
  const positions = chosen.map(({ position }) => position)
  if (condition === undefined) return readRows(connection, source.query([...new Set(positions)]), chosen, undefined)
  const looked = condition.columns.map((name) => source.names.indexOf(name))
  const from = await typedQuery(connection, source, chosen, looked)
  const unfit = await unfitness(connection, from, condition)
  return unfit === undefined
    ? readRows(connection, from, chosen, condition.sql)
    : conditionProblem(source.file, wish, unfit)
}

/** The source's query with the columns that the condition looks at by name, in their natural types. */
async function typedQuery(
  connection: DuckDBConnection,
  source: Source,
  chosen: readonly Chosen[],
  looked: readonly number[],
): Promise<string> {
  const isTyped = source.place === 'row'
  const kinds = isTyped ? new Map<number, number>() : await kindsOf(connection, source, looked)
  const named = looked.map((position) => {
    const cell = alias(position)
    if (isTyped) return `${cell} AS ${identifier(source.names[position])}`
    const natural = typeOfKinds(kinds.get(position)!)
    const isNumber = chosen.some((column) => column.position === position && column.kind === 'number')
    return `${naturalSql(cell, natural === 'VARCHAR' && isNumber ? 'DOUBLE' : natural)} AS ${identifier(source.names[position])}`
  })
  const positions = [...new Set([...chosen.map(({ position }) => position), ...looked])]
  return `SELECT ${['*', ...named].join(', ')} FROM (${source.query(positions)})`
}

/** Why a condition can't be used on these columns: known before any row is read. */
async function unfitness(
  connection: DuckDBConnection,
  from: string,
  condition: Condition,
): Promise<string | undefined> {
  try {
    const [[, type]] = await rowsOf(
      connection,
      `DESCRIBE SELECT ${condition.sql} AS "\u0001kept" FROM (${from}) WHERE ${condition.sql}`,
    )
    return type === 'BOOLEAN' ? undefined : `it gives a ${type}, not true or false`
  } catch (error) {
    return reasonOf(error)
  }
}

function conditionProblem(file: string, wish: Wish, found: string): Problem {
  return {
    file,
    what: `${wish.keepAskedBy}: can't be used as a condition`,
    found,
    todo: "compare numbers with numbers and text with 'text'",
  }
}

/** Whether the rows can be read where no condition is in the way. */
async function withoutCondition(connection: DuckDBConnection, source: Source, read: Attempt): Promise<RowsOrFailure> {
  if ('failure' in read || 'refused' in read) {
    const again = await attempt(() =>
      readRows(connection, source.query(source.names.length > 0 ? [0] : []), [], undefined),
    )
    return 'rows' in again ? { rows: again.rows.rowsRead } : { failure: 'failure' in again ? again.failure : undefined }
  }
  return { rows: read.rows.rowsRead }
}

function noRows(file: string): Problem {
  return { file, what: 'the file holds no records', found: 'column names alone', todo: 'add a row for each record' }
}
