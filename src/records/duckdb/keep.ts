import type { DuckDBConnection } from '@duckdb/node-api'
import type { Checked, Problem } from '../../problem.js'
import { literal, rowsOf } from './connection.js'
import { nameAdvice } from './names.js'

/** A condition that is one SQL expression over columns of the file, and nothing else. */
export interface Condition {
  readonly sql: string
  /** Columns it looks at, as spelled in the file. */
  readonly columns: readonly string[]
}

interface Node {
  readonly class?: string
  readonly type?: string
  readonly column_names?: readonly string[]
  readonly function_name?: string
  readonly value?: { readonly type?: { readonly id?: string } }
}

/** Kinds of expression that are no condition on one record, as a reader would call them. */
const REFUSED: Readonly<Record<string, string>> = {
  SUBQUERY: 'a query inside the condition',
  WINDOW: 'a window function',
  LAMBDA: 'a lambda',
  LAMBDA_REF: 'a lambda',
  STAR: '*',
  PARAMETER: 'a placeholder',
  POSITIONAL_REFERENCE: 'a column by number',
  DEFAULT: 'DEFAULT',
}

/** What is wrong with a condition. */
interface Fault {
  readonly what: string
  readonly found: string
  readonly todo: string
}

/**
 * Reads `keep` with DuckDB's own parser and checks every part of it before it is run.
 * names: the file's columns; problems say `file`, and begin with the key `askedBy`.
 */
export async function readCondition(
  connection: DuckDBConnection,
  keep: string,
  names: readonly string[],
  askedBy: string,
  file: string,
): Promise<Checked<Condition>> {
  const problem = ({ what, found, todo }: Fault): Problem => ({ file, what: `${askedBy}: ${what}`, found, todo })
  const parsed = await parse(connection, keep)
  if ('what' in parsed) return { ok: false, problems: [problem(parsed)] }
  const nodes = nodesOf(parsed.expression)
  const refused = nodes.filter((node) => (node.class ?? '') in REFUSED).map(refusedFault)
  if (refused.length > 0) return { ok: false, problems: refused.map(problem) }
  const faults = [
    ...unknownColumns(nodes, names),
    ...nodes.flatMap(looseConstants),
    ...(await changingFunctions(connection, nodes)),
  ]
  const columns = [...new Set(nodes.flatMap((node) => node.column_names ?? []))]
  const doubles = columns.filter((name, i) => columns.some((other, j) => j < i && sameLetters(name, other)))
  faults.push(...doubles.map(doubleFault))
  return faults.length > 0
    ? { ok: false, problems: faults.map(problem) }
    : { ok: true, value: { sql: `(${keep}\n)`, columns } }
}

/** The condition's syntax tree; anything but exactly one expression is a fault. */
async function parse(connection: DuckDBConnection, keep: string): Promise<{ expression: unknown } | Fault> {
  const [[text]] = await rowsOf(connection, `SELECT json_serialize_sql(${literal(`SELECT (${keep}\n)`)})`)
  const tree = JSON.parse(text as string)
  const fault = (found: string): Fault => ({
    what: 'not a condition in SQL',
    found,
    todo: 'write one condition such as year >= 2015 and beds > 0',
  })
  if (tree.error) return fault(tree.error_message)
  const select = tree.statements[0]?.node
  const isOneExpression =
    tree.statements.length === 1 &&
    select?.type === 'SELECT_NODE' &&
    select.select_list.length === 1 &&
    select.from_table?.type === 'EMPTY' &&
    select.select_list[0].alias === '' &&
    select.modifiers.length === 0 &&
    [select.where_clause, select.having, select.qualify, select.sample].every((part) => part === null) &&
    select.group_expressions.length === 0
  return isOneExpression ? { expression: select.select_list[0] } : fault(`more than one condition in "${keep}"`)
}

/** Every expression of the tree, in the order written. */
function nodesOf(tree: unknown): Node[] {
  if (Array.isArray(tree)) return tree.flatMap(nodesOf)
  if (tree === null || typeof tree !== 'object') return []
  const inside = Object.values(tree).flatMap(nodesOf)
  return 'class' in tree ? [tree as Node, ...inside] : inside
}

function refusedFault(node: Node): Fault {
  return {
    what: 'must look at one record at a time',
    found: REFUSED[node.class as string],
    todo: 'write a condition over columns of the file',
  }
}

function unknownColumns(nodes: readonly Node[], names: readonly string[]): Fault[] {
  const asked = [
    ...new Set(nodes.filter((node) => node.column_names !== undefined).map((node) => node.column_names!.join('.'))),
  ]
  const known = new Set(names)
  return asked
    .filter(
      (name) =>
        !known.has(name) ||
        nodes.some((node) => node.column_names?.length !== 1 && node.column_names?.join('.') === name),
    )
    .map((name) => ({
      what: 'no such column in the file',
      found: name,
      todo: `${nameAdvice(name, names)}; text goes in single quotes, names with spaces or dots in double quotes`,
    }))
}

function sameLetters(a: string, b: string): boolean {
  return a.toLowerCase() === b.toLowerCase()
}

function doubleFault(name: string): Fault {
  return {
    what: 'two columns whose names differ only in capitals',
    found: name,
    todo: 'rename one in the file, or use one of them',
  }
}

/** `year = 2015 or 2016` is always true in SQL: numbers and texts are no conditions. */
function looseConstants(node: Node): Fault[] {
  const isJunction = node.class === 'CONJUNCTION' || node.type === 'OPERATOR_NOT'
  const children = isJunction
    ? ((node as { children?: readonly (Node & { value?: { value?: unknown } })[] }).children ?? [])
    : []
  return children
    .filter((child) => child.class === 'CONSTANT')
    .map((child) => ({
      what: 'a value where a condition belongs',
      found: String(child.value?.value),
      todo: 'write the comparison out, such as year = 2015 or year = 2016',
    }))
}

/** Functions whose answer is another one on another day or in another run. */
async function changingFunctions(connection: DuckDBConnection, nodes: readonly Node[]): Promise<Fault[]> {
  const called = [...new Set(nodes.flatMap((node) => node.function_name ?? []))]
  if (called.length === 0) return []
  const rows = await rowsOf(
    connection,
    `SELECT DISTINCT function_name FROM duckdb_functions()
     WHERE function_name IN (${called.map((name) => literal(name.toLowerCase())).join(', ')})
       AND stability IN ('VOLATILE', 'CONSISTENT_WITHIN_QUERY') ORDER BY 1`,
  )
  return rows.map(([name]) => ({
    what: 'must keep the same records in every run',
    found: `${name}()`,
    todo: 'write the value itself',
  }))
}
