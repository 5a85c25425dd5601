/** A target's shares from a file of their own: which rows are for which lines, and which are for none. */
import type { Line } from '../placement.js'
import type { Checked, Problem } from '../problem.js'
import { labelsOf, numbersOf, type Table } from '../records/index.js'
import type { SharesFile } from '../study/index.js'
import { lineId } from '../thresholds/index.js'
import type { AnalysisInputs } from './inputs.js'

/** What rows name lines by; `lengthMetres` where they are pieces of a border. */
export type NamedLine = Pick<Line, 'id' | 'label' | 'zones' | 'lengthMetres'>

/** Shares by line, and the rows that went to none. */
export interface SharesRead {
  readonly file: string
  /** Of the column that holds them. */
  readonly name: string
  readonly shares: Float64Array
  /** In the order of the file; without a line: the share of a row for no line of the study. */
  readonly entries: readonly { readonly line?: number; readonly share: number }[]
}

/**
 * Every line needs one row with a finite share of 0 or more. A row names a line by its key or its label, several columns
 * being the parts of its key in their order; on a border two columns may name the zones of a pair, in either order, whose
 * share is then divided among its pieces by length. Rows for other lines are passed over. All problems at once.
 */
export function readShares(
  target: SharesFile,
  { shares: table }: Pick<AnalysisInputs, 'shares'>,
  lines: readonly NamedLine[],
): Checked<SharesRead> {
  if (!table) throw new Error('the study has a file of shares, but none was read')
  const { file, lineOfRow } = table
  const values = numbersOf(table, target.value)
  const keyOf = keysOf(table, target.line)
  const known = linesByKey(lines)
  const named = target.line.join(', ')
  const rowOf = new Map<number, number>()
  const unknown: string[] = []
  const entries: { line?: number; share: number }[] = []
  const problems: Problem[] = []
  for (let row = 0; row < table.rows; row++) {
    const refuse = (what: string, found: string, todo: string) =>
      problems.push({ file, line: lineOfRow[row], what, found, todo })
    const share = values[row]
    if (!(share >= 0 && share < Number.POSITIVE_INFINITY)) {
      const found = Number.isNaN(share) ? 'an empty cell' : String(share)
      refuse(`${target.value}: must be 0 or more`, found, 'give every line a share of 0 or more')
    }
    const key = keyOf(row)
    if (key === undefined) {
      refuse(`${named}: the line of the share`, 'an empty cell', 'name the line, or remove the row')
      continue
    }
    const own = known.get(key)
    const before = own?.map((line) => rowOf.get(line)).find((other) => other !== undefined)
    if (own === undefined) {
      unknown.push(key)
      entries.push({ share })
    } else if (before === undefined) {
      const parts = partsOf(lines, own)
      own.forEach((line, i) => {
        rowOf.set(line, row)
        entries.push({ line, share: share * parts[i] })
      })
    } else {
      const found = `${key} on lines ${lineOfRow[before]} and ${lineOfRow[row]}`
      refuse(`${named}: line given twice`, found, 'keep one of the rows')
    }
  }
  for (const { id } of lines.filter((_, line) => !rowOf.has(line))) {
    const found = unknown.length > 0 ? `${id}, while ${noLine(unknown)}` : id
    const todo = 'give it a share, 0 to leave it out'
    problems.push({ file, what: `${named}: no row for a line of the study`, found, todo })
  }
  if (problems.length > 0) return { ok: false, problems }
  const shares = new Float64Array(lines.length)
  for (const { line, share } of entries) if (line !== undefined) shares[line] = share
  return { ok: true, value: { file, name: target.value, shares, entries } }
}

function noLine([first, ...more]: readonly string[]): string {
  return more.length === 0 ? `${first} is no line` : `${first} and ${more.length} more are no line`
}

/** The key of each row as a line's id is written; undefined where a cell is empty. */
function keysOf(table: Table, columns: readonly string[]): (row: number) => string | undefined {
  const parts = columns.map((name) => labelsOf(table, name))
  return (row) => {
    if (parts.some(({ codes }) => codes[row] < 0)) return undefined
    return lineId(parts.map(({ codes, labels }) => labels[codes[row]]))
  }
}

/** Lines by everything a row may call them; a pair of zones stands for all its pieces, a piece's own name comes first. */
function linesByKey(lines: readonly NamedLine[]): Map<string, readonly number[]> {
  const known = new Map<string, number[]>()
  lines.forEach(({ zones }, i) => {
    if (!zones) return
    const [one, other] = zones
    const pieces = known.get(lineId([one, other])) ?? []
    pieces.push(i)
    for (const key of [lineId([one, other]), lineId([other, one])]) known.set(key, pieces)
  })
  for (const [i, { label }] of lines.entries()) known.set(label, [i])
  for (const [i, { id }] of lines.entries()) known.set(id, [i])
  return known
}

/** What part of a pair's share each of its pieces has; they sum to 1. */
function partsOf(lines: readonly NamedLine[], own: readonly number[]): number[] {
  if (own.length === 1) return [1]
  const metres = own.map((line) => lines[line].lengthMetres as number)
  const total = metres.reduce((sum, length) => sum + length, 0)
  return metres.map((length) => length / total)
}
