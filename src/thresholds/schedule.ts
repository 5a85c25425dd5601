/** A table of cutoffs keyed by one or more columns: a cutoff for each year, region, site … */
import type { Checked, Problem } from '../problem.js'
import { type Labels, lineLabel } from './labels.js'

export interface Schedule {
  /** Names of the key columns. */
  readonly by: readonly string[]
  /** Cutoff by key, as `scheduleKey` writes it. */
  readonly cutoffs: ReadonlyMap<string, number>
}

/** One text for a combination of key values, given in the order of `by`. */
export function scheduleKey(values: readonly string[]): string {
  return JSON.stringify(values)
}

export interface ScheduleRows {
  /** The key columns, at least one. */
  readonly by: readonly Labels[]
  /** The cutoff of each row, in score units; NaN where the cell is empty. */
  readonly value: Float64Array
  /** Line in the file of each row, from 1. */
  readonly lineOfRow: Int32Array
  /** As the user named it. */
  readonly file: string
  readonly valueName: string
}

/** Reads a schedule's rows: every key complete and given once, every cutoff a finite number. Reports all problems at once. */
export function readSchedule(rows: ScheduleRows): Checked<Schedule> {
  const { by, value, lineOfRow, file, valueName } = rows
  const names = by.map((column) => column.name)
  const problems: Problem[] = []
  const cutoffs = new Map<string, number>()
  const firstLine = new Map<string, number>()
  if (value.length === 0) {
    problems.push({ file, what: 'cutoff schedule', found: 'no rows', todo: 'give one row for each key' })
  }
  for (let row = 0; row < value.length; row++) {
    const line = lineOfRow[row]
    const missing = by.filter((column) => column.codes[row] < 0)
    for (const column of missing) {
      const todo = `fill in the ${column.name} that this cutoff is for, or remove the row`
      problems.push({ file, line, what: `${column.name}: key of the schedule`, found: 'an empty cell', todo })
    }
    if (!Number.isFinite(value[row])) {
      const found = Number.isNaN(value[row]) ? 'an empty cell' : String(value[row])
      const todo = 'give the cutoff in score units, or remove the row'
      problems.push({ file, line, what: `${valueName}: must be a finite number`, found, todo })
    }
    if (missing.length > 0) continue
    const values = by.map((column) => column.labels[column.codes[row]])
    const key = scheduleKey(values)
    const first = firstLine.get(key)
    if (first !== undefined) {
      const found = `${lineLabel(names, values)} on lines ${first} and ${line}`
      problems.push({ file, line, what: `${names.join(', ')}: key given twice`, found, todo: 'keep one of the rows' })
      continue
    }
    firstLine.set(key, line)
    cutoffs.set(key, value[row])
  }
  return problems.length > 0 ? { ok: false, problems } : { ok: true, value: { by: names, cutoffs } }
}
