/** Pooling shares: one number per line, from a column of the schedule or of the records, or from a file of their own. */
import type { Placement } from '../placement.js'
import type { Checked, Problem } from '../problem.js'
import { labelsOf, numbersOf, type Table } from '../records/index.js'
import type { SharesFile, Study } from '../study/index.js'
import { scheduleKey } from '../thresholds/index.js'
import type { AnalysisInputs } from './inputs.js'

/** The share of each line; undefined where the target needs none. Lines whose units disagree, or have none, are problems. */
export function sharesOfLines(
  study: Study,
  inputs: AnalysisInputs,
  placement: Placement,
): Checked<Float64Array | undefined> {
  const { target } = study.pooling
  if (typeof target !== 'object') return { ok: true, value: undefined }
  if ('shares' in target) return sharesOfFile(target, inputs, placement)
  const { file, values: shares, second } = valuesOfLines(study, inputs, placement, target.column)
  const what = `pooling.target.column: ${target.column}`
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
  return problems.length > 0 ? { ok: false, problems } : { ok: true, value: shares }
}

/** Rows that name no line of the study are problems too: a name written otherwise would be lost. */
function sharesOfFile(
  { line: lineColumn, value: valueColumn }: SharesFile,
  { shares: table }: AnalysisInputs,
  { lines }: Placement,
): Checked<Float64Array> {
  if (!table) throw new Error('the study has a file of shares, but none was read')
  const { file, lineOfRow } = table
  const names = labelsOf(table, lineColumn)
  const values = numbersOf(table, valueColumn)
  const known = new Map(lines.flatMap(({ id, label }, i) => [[label, i] as const, [id, i] as const]))
  const rowOf = new Map<number, number>()
  const problems: Problem[] = []
  const refuse = (row: number, what: string, found: string, todo: string) =>
    problems.push({ file, line: lineOfRow[row], what, found, todo })
  for (let row = 0; row < table.rows; row++) {
    const name = names.codes[row] < 0 ? '' : names.labels[names.codes[row]]
    const line = known.get(name)
    if (line === undefined)
      refuse(row, `${lineColumn}: no line of the study`, name, `write ${lines[0]?.id ?? 'a line'}`)
    else if (rowOf.has(line)) refuse(row, `${lineColumn}: line given twice`, name, 'keep one of the rows')
    else rowOf.set(line, row)
    if (values[row] >= 0 && values[row] < Number.POSITIVE_INFINITY) continue
    const found = Number.isNaN(values[row]) ? 'an empty cell' : String(values[row])
    refuse(row, `${valueColumn}: must be 0 or more`, found, 'give every line a share of 0 or more')
  }
  const missing = lines.filter((_, i) => !rowOf.has(i))
  for (const { id } of missing)
    problems.push({
      file,
      what: `${lineColumn}: no row for a line of the study`,
      found: id,
      todo: 'give it a share, 0 to leave it out',
    })
  if (problems.length > 0) return { ok: false, problems }
  return { ok: true, value: Float64Array.from(lines, (_, i) => values[rowOf.get(i) as number]) }
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
