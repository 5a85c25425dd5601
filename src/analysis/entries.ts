/** The entries of a placement that one outcome can use, grouped by line once and shared by every estimate. */
import type { Entries } from '../jump/index.js'
import { numbersOf, type Table } from '../records/index.js'
import type { Study } from '../study/index.js'
import type { Placed } from './placing.js'

export interface OutcomeEntries {
  /** Usable entries, ordered by line; within a line in the order of the rows. */
  readonly all: Entries
  /** First entry of each line in `all`, and the number of entries at the end. */
  readonly start: Int32Array
  /** Units placed that have the outcome and all that its estimate needs. */
  readonly units: number
  /** Units placed that lack the outcome, and those that have it and lack a covariate or the take-up. */
  readonly missing: number
  readonly incomplete: number
  /** By row of the table. */
  readonly takeUp?: NamedColumn
  readonly covariates: readonly NamedColumn[]
}

export interface NamedColumn {
  readonly name: string
  readonly values: Float64Array
}

/** Entries with a finite outcome, covariates and take-up. */
export function entriesOf(study: Study, table: Table, placed: Placed, outcome: string): OutcomeEntries {
  const column = (name: string): NamedColumn => ({ name, values: numbersOf(table, name) })
  const covariates = study.covariates.map(column)
  const takeUp = study.takeUp === undefined ? undefined : column(study.takeUp)
  const needed = [...covariates, ...(takeUp ? [takeUp] : [])].map(({ values }) => values)
  const entries = entriesOfValues(study, table, placed, numbersOf(table, outcome), needed)
  return { ...entries, covariates, ...(takeUp ? { takeUp } : {}) }
}

/**
 * Entries with a finite value, and finite values of all that is needed beside it; each of one element per row of the
 * table. `group` is the line; `cluster` that of the placed units, where they have one.
 */
export function entriesOfValues(
  study: Study,
  table: Table,
  placed: Placed,
  y: Float64Array,
  needed: readonly Float64Array[] = [],
): OutcomeEntries {
  const { placement, cluster } = placed
  const isComplete = (unit: number) => needed.every((values) => Number.isFinite(values[unit]))
  const isKept = (unit: number) => Number.isFinite(y[unit]) && (needed.length === 0 || isComplete(unit))
  const weight = study.records.weight === undefined ? undefined : numbersOf(table, study.records.weight)
  const lineCount = placement.lines.length
  const start = new Int32Array(lineCount + 1)
  let units = 0
  let missing = 0
  let incomplete = 0
  let previous = -1
  for (let e = 0; e < placement.unit.length; e++) {
    const unit = placement.unit[e]
    const isUsable = isKept(unit)
    if (isUsable) start[placement.line[e] + 1]++
    if (unit === previous) continue
    previous = unit
    if (isUsable) units++
    else if (Number.isFinite(y[unit])) incomplete++
    else missing++
  }
  for (let line = 0; line < lineCount; line++) start[line + 1] += start[line]
  const size = start[lineCount]
  const next = start.slice(0, lineCount)
  const x = new Float64Array(size)
  const treated = new Uint8Array(size)
  const unitOf = new Int32Array(size)
  const group = new Int32Array(size)
  const outcomes = new Float64Array(size)
  const weights = weight && new Float64Array(size)
  const clusters = cluster && new Int32Array(size)
  for (let e = 0; e < placement.unit.length; e++) {
    const unit = placement.unit[e]
    if (!isKept(unit)) continue
    const at = next[placement.line[e]]++
    x[at] = placement.x[e]
    treated[at] = placement.treated[e]
    unitOf[at] = unit
    group[at] = placement.line[e]
    outcomes[at] = y[unit]
    if (weights && weight) weights[at] = weight[unit]
    if (clusters && cluster) clusters[at] = cluster[unit]
  }
  const repeats = size > units
  return {
    all: { x, treated, unit: unitOf, y: outcomes, w: weights, cluster: clusters, group, repeats },
    start,
    units,
    missing,
    incomplete,
    covariates: [],
  }
}

/** The entries of one line, as views. */
export function entriesOfLine(entries: OutcomeEntries, line: number): Entries {
  const from = entries.start[line]
  const to = entries.start[line + 1]
  const { all } = entries
  return {
    x: all.x.subarray(from, to),
    treated: all.treated.subarray(from, to),
    unit: all.unit.subarray(from, to),
    y: all.y.subarray(from, to),
    w: all.w?.subarray(from, to),
    cluster: all.cluster?.subarray(from, to),
  }
}
