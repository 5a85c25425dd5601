import type { DuckDBConnection } from '@duckdb/node-api'
import type { Checked, Problem } from '../../problem.js'
import { eachChunk, eachLine, headOf, survey, type TextFile } from './bytes.js'
import { shortestSql } from './cells.js'
import { literal, reasonOf, rowsOf } from './connection.js'
import { notUtf8 } from './csv.js'
import { alias, consecutive, PROBLEM_LIMIT, type Source } from './source.js'

/** One object a line, or one array of objects: `.json` may be either. */
export async function jsonSource(connection: DuckDBConnection, file: string, text: TextFile): Promise<Checked<Source>> {
  const head = (await headOf(text, 1 << 16))
    .toString('utf8')
    .replace(/^\ufeff/, '')
    .trimStart()
  if (head === '') return refuse(file, 'the file is empty', 'no objects', 'give one JSON object a line')
  const isArray = head.startsWith('[')
  const objects = objectsQuery(text, isArray ? 'array' : 'newline_delimited')
  const listed = await keysOf(connection, objects)
  const surveyed = async () => {
    const { sha256, lines, notUtf8Line } = await survey(text)
    return { sha256, lines, delimiters: 0, problems: notUtf8Line === undefined ? [] : [notUtf8(file, notUtf8Line)] }
  }
  if (!listed.ok) {
    const { problems } = await surveyed()
    if (problems.length > 0) return { ok: false, problems }
    return {
      ok: false,
      problems: isArray ? [arrayProblem(file, listed.reason)] : await badLines(file, text, listed.reason),
    }
  }
  const names = listed.names
  if (names.length === 0)
    return refuse(file, 'the file is empty', 'no keys in its objects', 'give one JSON object a line')
  return {
    ok: true,
    value: {
      file,
      names,
      types: names.map(() => 'VARCHAR'),
      place: 'line',
      query: (positions) => cellsQuery(objects, positions, (position) => `/${pointerPart(names[position])}`),
      survey: surveyed,
      locate: async (outcome, { lines }) => {
        if ('failure' in outcome) return { problems: await badLines(file, text, reasonOf(outcome.failure)) }
        if (!isArray && outcome.rows === lines) return { lineOfRow: consecutive(1, outcome.rows) }
        return { lineOfRow: await objectLines(text, isArray ? 1 : 0) }
      },
    },
  }
}

export function refuse(file: string, what: string, found: string, todo: string): Checked<never> {
  return { ok: false, problems: [{ file, what, found, todo }] }
}

function objectsQuery(text: TextFile, format: string): string {
  return `SELECT json FROM read_json_objects(${literal(text.path)}, format = '${format}',
    compression = '${text.isGzip ? 'gzip' : 'uncompressed'}')`
}

/** Every key of any object, those of the commonest shape first; or why the file can't be read. */
export async function keysOf(
  connection: DuckDBConnection,
  objects: string,
): Promise<{ ok: true; names: readonly string[] } | { ok: false; reason: string }> {
  try {
    const shapes = await rowsOf(
      connection,
      `SELECT CASE WHEN json_type(json) = 'OBJECT' THEN json_keys(json) END AS keys, count(*) AS rows
       FROM (${objects}) GROUP BY 1 ORDER BY 2 DESC, CAST(keys AS VARCHAR)`,
    )
    if (shapes.some(([keys]) => keys === null)) return { ok: false, reason: 'a value that is no object' }
    return { ok: true, names: [...new Set(shapes.flatMap(([keys]) => keys as string[]))] }
  } catch (error) {
    return { ok: false, reason: reasonOf(error) }
  }
}

/**
 * Cells of JSON objects as texts: strings as they are, numbers shortest, null and absent keys NULL.
 * Pointers (RFC 6901) keep names exact, capitals and all.
 */
export function cellsQuery(
  objects: string,
  positions: readonly number[],
  pointer: (position: number) => string,
): string {
  const paths = positions.map((position) => literal(pointer(position)))
  const cells = positions.map((position, i) => {
    const cell = `cells[${i + 1}]`
    const number = `TRY_CAST(${cell} AS DOUBLE)`
    return `CASE WHEN json_type(${cell}) = 'DOUBLE' AND isfinite(${number}) THEN ${shortestSql(number)}
      ELSE ${cell} ->> '$' END AS ${alias(position)}`
  })
  return positions.length === 0
    ? `SELECT 1 FROM (${objects})`
    : `SELECT ${cells.join(', ')} FROM (SELECT json_extract(json, [${paths.join(', ')}]) AS cells FROM (${objects}))`
}

/** A name within a JSON pointer. */
export function pointerPart(name: string): string {
  return name.replaceAll('~', '~0').replaceAll('/', '~1')
}

function arrayProblem(file: string, reason: string): Problem {
  return {
    file,
    what: 'must be an array of JSON objects',
    found: reason.replace(/ in file "[^"]*"/, ''),
    todo: 'check the brackets, commas and quotes',
  }
}

/** Every line that isn't one object, found by parsing each; or DuckDB's reason where each line is one. */
async function badLines(file: string, text: TextFile, reason: string): Promise<readonly Problem[]> {
  const problems: Problem[] = []
  let count = 0
  await eachLine(text, (content, line) => {
    const found = faultOfLine(line === 1 ? content.replace(/^\ufeff/, '') : content)
    if (found !== undefined && count++ < PROBLEM_LIMIT)
      problems.push({ file, line, what: 'each line must be one JSON object', found, todo: 'mend or delete the line' })
  })
  if (count > problems.length)
    problems.push({ file, what: 'more lines like these', found: `${count - problems.length}`, todo: 'mend the file' })
  return problems.length > 0
    ? problems
    : [
        {
          file,
          what: "can't be read as JSON lines",
          found: reason.replace(/ in file "[^"]*"/, ''),
          todo: 'write one object a line',
        },
      ]
}

function faultOfLine(content: string): string | undefined {
  try {
    const value = JSON.parse(content)
    if (Array.isArray(value)) return 'an array'
    return value !== null && typeof value === 'object' ? undefined : JSON.stringify(value)
  } catch (error) {
    return (error as Error).message.slice(0, 200)
  }
}

/** Line on which each object at `depth` begins. The text is valid JSON by now. */
async function objectLines(text: TextFile, depth: number): Promise<Int32Array> {
  const lines: number[] = []
  let [line, level] = [1, 0]
  let [isText, isEscaped] = [false, false]
  await eachChunk(text, (chunk) => {
    for (const byte of chunk) {
      if (byte === 10) line++
      if (isText) {
        if (isEscaped) isEscaped = false
        else if (byte === 92) isEscaped = true
        else if (byte === 34) isText = false
      } else if (byte === 34) isText = true
      else if (byte === 123 || byte === 91) {
        if (level++ === depth) lines.push(line)
      } else if (byte === 125 || byte === 93) level--
    }
  })
  return Int32Array.from(lines)
}
