/** Pooling shares: one number per line, from a column of the schedule or of the records, or from a file of their own. */
import { sum } from '../math/index.js'
import type { Placement } from '../placement.js'
import type { Checked } from '../problem.js'
import { labelsOf, numbersOf, type Table } from '../records/index.js'
import type { TargetPopulation } from '../results.js'
import type { Study } from '../study/index.js'
import { scheduleKey } from '../thresholds/index.js'
import type { AnalysisInputs } from './inputs.js'
import { readShares, type SharesRead } from './sharesOfFile.js'

/** The lines' shares of a stated target. */
export interface Shares {
  /** By line, 0 or more, of a sum above 0. */
  readonly values: Float64Array
  /** Whose they are. */
  readonly population: TargetPopulation
}

/** The share of each line; undefined where the target needs none. Lines whose units disagree, or have none, are problems. */
export function sharesOfLines(study: Study, inputs: AnalysisInputs, placement: Placement): Checked<Shares | undefined> {
  const { target } = study.pooling
  if (typeof target !== 'object') return { ok: true, value: undefined }
  const read =
    'shares' in target
      ? readShares(target, inputs, placement.lines)
      : sharesOfColumn(study, target.column, inputs, placement)
  if (!read.ok) return read
  const { file, name, shares, entries } = read.value
  const total = sum(shares)
  if (!(total > 0) && shares.length > 0) {
    const todo = 'give at least one line a share above 0'
    return { ok: false, problems: [{ file, what: `${name}: shares of the lines`, found: 'all are 0', todo }] }
  }
  const others = entries.filter(({ line }) => line === undefined).map(({ share }) => share)
  const passed = others.length > 0 ? { rows_passed_over: others.length, passed_over: sum(others) } : {}
  return { ok: true, value: { values: shares, population: { name, file, total, ...passed } } }
}

/** What is doubtful about the shares: rows for lines that the study has not. */
export function doubtfulShares({ population }: Shares): string[] {
  const { name, file, total, rows_passed_over: rows, passed_over: passed } = population
  if (rows === undefined || passed === undefined) return []
  const percent = Math.round((100 * passed) / (total + passed))
  return [`${rows} ${rows === 1 ? 'row' : 'rows'} of ${file} for no line of the study: ${percent}% of all ${name}`]
}

function sharesOfColumn(
  study: Study,
  column: string,
  inputs: AnalysisInputs,
  placement: Placement,
): Checked<SharesRead> {
  const { file, values: shares, second } = valuesOfLines(study, inputs, placement, column)
  const what = `pooling.target.column: ${column}`
  const problems = [...second].map(([line, value]) => ({
    file,
    what,
    found: `${shares[line]} and ${value} on line ${placement.lines[line].label}`,
    todo: 'give one share for each line',
  }))
  placement.lines.forEach((line, i) => {
    if (second.has(i) || shares[i] >= 0) return
    const found = Number.isNaN(shares[i]) ? `no value on line ${line.label}` : `${shares[i]} on line ${line.label}`
    problems.push({ file, what, found, todo: 'give every line a share of 0 or more' })
  })
  if (problems.length > 0) return { ok: false, problems }
  return { ok: true, value: { file, name: column, shares, entries: [] } }
}

/** What the study relates effects to: a column with one value a line, or the cutoffs where they differ. NaN where unknown. */
export function attributeOfLines(
  study: Study,
  inputs: AnalysisInputs,
  placement: Placement,
): { readonly name: string; readonly values: Float64Array } | undefined {
  const { slope } = study.pooling
  if (slope === undefined) {
    const cutoffs = Float64Array.from(placement.lines, ({ cutoff }) => cutoff ?? Number.NaN)
    const isKnown = new Set([...cutoffs].filter(Number.isFinite)).size > 1
    return isKnown ? { name: 'cutoff', values: cutoffs } : undefined
  }
  const { values, second } = valuesOfLines(study, inputs, placement, slope)
  return { name: slope, values: values.map((value, line) => (second.has(line) ? Number.NaN : value)) }
}

/** A column of the schedule or the records by line; `second`: lines at which it has another value too. */
function valuesOfLines(study: Study, { schedule, table }: AnalysisInputs, placement: Placement, column: string) {
  const fromSchedule = schedule?.columns.has(column) === true
  const byUnit = fromSchedule ? scheduleValues(study, schedule, table, column) : numbersOf(table, column)
  const values = new Float64Array(placement.lines.length).fill(Number.NaN)
  const second = new Map<number, number>()
  for (let e = 0; e < placement.unit.length; e++) {
    const line = placement.line[e]
    const value = byUnit[placement.unit[e]]
    if (Number.isNaN(value)) continue
    if (Number.isNaN(values[line])) values[line] = value
    else if (value !== values[line]) second.set(line, value)
  }
  return { file: fromSchedule ? schedule.file : table.file, values, second }
}

/** The schedule's column carried to the records by their keys; NaN where a record's key is not in the schedule. */
function scheduleValues(study: Study, schedule: Table, table: Table, column: string): Float64Array {
  if (study.line.kind !== 'score' || study.line.cutoff.kind !== 'schedule') throw new Error('the study has no schedule')
  const { by } = study.line.cutoff
  const keyOf = (from: Table) => {
    const keys = by.map((name) => labelsOf(from, name))
    return (row: number) => scheduleKey(keys.map((key) => key.labels[key.codes[row]]))
  }
  const values = numbersOf(schedule, column)
  const scheduled = keyOf(schedule)
  const byKey = new Map<string, number>()
  for (let row = 0; row < schedule.rows; row++) byKey.set(scheduled(row), values[row])
  const recorded = keyOf(table)
  const result = new Float64Array(table.rows)
  for (let row = 0; row < table.rows; row++) result[row] = byKey.get(recorded(row)) ?? Number.NaN
  return result
}
