import type { Checked, Problem } from '../../problem.js'
import { headOf, survey, type TextFile } from './bytes.js'
import { literal, reasonOf } from './connection.js'
import { firstRow, type GridFault, walkGrid } from './delimited.js'
import {
  alias,
  consecutive,
  type Located,
  PROBLEM_LIMIT,
  type RowsOrFailure,
  type Source,
  type Surveyed,
} from './source.js'

const HEAD_BYTES = 1 << 20

/** Comma- or tab-separated values, by RFC 4180. Separated by semicolons, a file is refused by name. */
export async function csvSource(file: string, text: TextFile, delimiter: ',' | '\t'): Promise<Checked<Source>> {
  const head = await headOf(text, HEAD_BYTES)
  const header = readHeader(file, head, delimiter)
  if (!header.ok) return header
  const names = header.value
  return {
    ok: true,
    value: {
      file,
      names,
      types: names.map(() => 'VARCHAR'),
      place: 'line',
      query: (positions) => csvQuery(text, delimiter, names.length, positions),
      survey: () => surveyed(file, text, delimiter),
      locate: (outcome, found) => locate(file, text, delimiter, names.length, outcome, found),
    },
  }
}

/** Column names, or what is wrong with the first row. */
function readHeader(file: string, head: Buffer, delimiter: ',' | '\t'): Checked<readonly string[]> {
  const refuse = (what: string, found: string, todo: string): Checked<never> => ({
    ok: false,
    problems: [{ file, line: 1, what, found, todo }],
  })
  const wide = wideEncoding(head)
  if (wide !== undefined) return refuse('the text must be UTF-8', wide, 'save the file as UTF-8')
  const names = firstRow(head.toString('utf8'), delimiter)
  if (names === undefined)
    return refuse('a quote is never closed', 'in the header', 'close it, or double it inside a field')
  if (names.every((name) => name.trim() === '')) {
    return head.toString('utf8').trim() === ''
      ? {
          ok: false,
          problems: [
            {
              file,
              what: 'the file is empty',
              found: 'no header',
              todo: 'give a file with a row of column names, then records',
            },
          ],
        }
      : refuse('the first line must hold the column names', 'a blank line', 'delete the lines above the column names')
  }
  if (delimiter === ',' && names.length === 1 && names[0].includes(';'))
    return refuse(
      'columns must be separated by commas',
      'semicolons',
      'save the file with commas between columns and points in numbers',
    )
  if (delimiter === ',' && names.length === 1 && names[0].includes('\t'))
    return refuse('columns must be separated by commas', 'tabs', 'name the file .tsv')
  if (
    names.some((name) => name.trim() !== '') &&
    names.every((name) => name.trim() === '' || !Number.isNaN(Number(name)))
  )
    return refuse(
      'the first line must hold the column names',
      `numbers (${names.slice(0, 3).join(', ')})`,
      'add a header line',
    )
  const doubled = names.filter((name, i) => name !== '' && names.indexOf(name) !== i)
  if (doubled.length > 0)
    return {
      ok: false,
      problems: [...new Set(doubled)].map((name) => ({
        file,
        line: 1,
        what: `${name}: column names must differ`,
        found: `${names.filter((other) => other === name).length} columns of that name`,
        todo: 'rename or delete all but one',
      })),
    }
  return { ok: true, value: names }
}

function wideEncoding(head: Buffer): string | undefined {
  const isWide = (head[0] === 0xff && head[1] === 0xfe) || (head[0] === 0xfe && head[1] === 0xff)
  return isWide ? 'UTF-16' : undefined
}

function csvQuery(text: TextFile, delimiter: string, columns: number, positions: readonly number[]): string {
  const all = Array.from({ length: columns }, (_, i) => `${alias(i).replaceAll('"', "'")}: 'VARCHAR'`)
  const chosen = positions.length === 0 ? '1' : positions.map(alias).join(', ')
  return `SELECT ${chosen} FROM read_csv(${literal(text.path)}, auto_detect = false, header = true, delim = ${literal(delimiter)},
    quote = '"', escape = '"', compression = '${text.isGzip ? 'gzip' : 'none'}', columns = {${all.join(', ')}})`
}

async function surveyed(file: string, text: TextFile, delimiter: string): Promise<Surveyed> {
  const { sha256, lines, delimiters, notUtf8Line } = await survey(text, delimiter.charCodeAt(0))
  return { sha256, lines, delimiters, problems: notUtf8Line === undefined ? [] : [notUtf8(file, notUtf8Line)] }
}

/** Bytes that aren't UTF-8: Latin-1 as a rule, but nothing in the file says so. */
export function notUtf8(file: string, line: number): Problem {
  return {
    file,
    line,
    what: 'the text must be UTF-8',
    found: 'bytes of another encoding, such as Latin-1 or Windows-1252',
    todo: 'save the file as UTF-8',
  }
}

/**
 * Every row is one line, exactly, where lines and delimiters add up to the grid; else every byte is walked, which takes
 * longer and names each line that breaks the grid.
 */
async function locate(
  file: string,
  text: TextFile,
  delimiter: ',' | '\t',
  columns: number,
  outcome: RowsOrFailure,
  found: Surveyed,
): Promise<Located> {
  if ('rows' in outcome && outcome.rows === found.lines - 1 && found.delimiters === found.lines * (columns - 1))
    return { lineOfRow: consecutive(2, outcome.rows) }
  const grid = await walkGrid(text, delimiter.charCodeAt(0), columns, PROBLEM_LIMIT)
  if (grid.faultCount > 0) {
    const problems = grid.faults.map((fault) => gridProblem(file, fault, columns))
    const more = grid.faultCount - problems.length
    if (more > 0) problems.push({ file, what: 'more lines like these', found: `${more}`, todo: 'mend the file' })
    return { problems }
  }
  if ('failure' in outcome) {
    const { firstCrlfLine, firstLfLine } = grid
    if (firstCrlfLine > 0 && firstLfLine > 0)
      return {
        problems: [
          {
            file,
            line: Math.max(firstCrlfLine, firstLfLine),
            what: 'all lines must end alike',
            found: `${firstLfLine > firstCrlfLine ? 'LF after CR LF' : 'CR LF after LF'}`,
            todo: 'save the file with one kind of line end',
          },
        ],
      }
    return {
      problems: [{ file, ...tableFailure(outcome.failure) }],
    }
  }
  if (grid.lineOfRow.length !== outcome.rows)
    throw new Error(`${file}: ${outcome.rows} rows read, ${grid.lineOfRow.length} rows walked`)
  return { lineOfRow: grid.lineOfRow }
}

/** DuckDB's reason: the message of a row that can't be read names its line first and says why further down. */
function tableFailure(failure: unknown): Pick<Problem, 'line' | 'what' | 'found' | 'todo'> {
  const message = failure instanceof Error ? failure.message : ''
  const line = /CSV Error on Line: (\d+)/.exec(message)?.[1]
  const why = /^.*exceeded.*$/m
    .exec(message)?.[0]
    .replace(/\. Actual Size.*$/, '')
    .trim()
  return {
    line: line === undefined ? undefined : Number(line),
    what: "can't be read as a table",
    found: why ?? reasonOf(failure),
    todo: 'check quotes in this line, or save the file again as CSV',
  }
}

function gridProblem(file: string, fault: GridFault, columns: number): Problem {
  const at = { file, line: fault.line }
  switch (fault.kind) {
    case 'ragged':
      return {
        ...at,
        what: 'each row must have as many fields as the header',
        found: `${fault.fields} where the header has ${columns}`,
        todo: 'check commas, tabs and quotes in this line',
      }
    case 'unterminated':
      return {
        ...at,
        what: 'a quote is never closed',
        found: 'it opens on this line',
        todo: 'close it, or double it inside a field',
      }
    case 'after-quote':
      return {
        ...at,
        what: 'a field in quotes must end at its closing quote',
        found: 'text after a quote that opens on this line',
        todo: 'double the quotes inside the field',
      }
    case 'lone-return':
      return {
        ...at,
        what: 'lines must end in LF or CR LF',
        found: 'a carriage return alone',
        todo: 'save the file with ordinary line ends',
      }
  }
}
