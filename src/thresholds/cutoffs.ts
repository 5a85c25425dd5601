/** Which cutoffs each unit serves: the same for all, its own column's, its schedule's, or a ladder's nearest two. */
import { FATE } from './fate.js'
import { type Groups, groupRows, type Labels, lineLabel } from './labels.js'
import { ladderEntries } from './ladder.js'
import { type Schedule, scheduleKey } from './schedule.js'
import type { TreatedSide } from './side.js'

export type CutoffSource =
  | { readonly kind: 'value'; readonly value: number }
  /** values: the cutoff of each row, score units; NaN = missing. */
  | { readonly kind: 'column'; readonly values: Float64Array; readonly name: string }
  /** keys: the records' columns, in the order of the schedule's `by`. */
  | { readonly kind: 'schedule'; readonly schedule: Schedule; readonly keys: readonly Labels[] }
  /** steps: finite, strictly ascending. */
  | { readonly kind: 'ladder'; readonly steps: Float64Array }

/** A key that records have and the schedule has not. */
export interface MissingKey {
  /** 'region North, year 2015' */
  readonly key: string
  /** Units that have it and a score. */
  readonly units: number
}

/** One entry per row, but on a ladder one for each step that a unit serves. */
export interface CutoffsServed {
  /** Row of each entry, ascending. */
  readonly unit: Int32Array
  /** Cutoff of each entry; NaN where the unit has none. */
  readonly cutoff: Float64Array
  /** The lines that the cutoffs themselves make. */
  readonly groups: Groups
  /** Names of the columns that `groups` is made of. */
  readonly names: readonly string[]
  /** Cutoffs that exist whether or not a unit serves them, one per group. */
  readonly fixedCutoffs?: Float64Array
  readonly isLadder: boolean
  readonly missingKeys: readonly MissingKey[]
}

/** fate: by unit, 0 where it can still be placed; units found without a cutoff are marked in it. */
export function cutoffsServed(
  source: CutoffSource,
  score: Float64Array,
  treated: TreatedSide,
  fate: Uint8Array,
): CutoffsServed {
  switch (source.kind) {
    case 'value':
      return ofValue(source.value, score.length)
    case 'column':
      return ofColumn(source.values, source.name, fate)
    case 'schedule':
      return ofSchedule(source.schedule, source.keys, fate)
    case 'ladder':
      return ofLadder(source.steps, score, treated)
  }
}

function ofValue(value: number, count: number): CutoffsServed {
  if (!Number.isFinite(value)) throw new RangeError(`the cutoff is ${value}`)
  return {
    unit: firstIntegers(count),
    cutoff: new Float64Array(count).fill(value),
    groups: { ofRow: new Int32Array(count), values: [[String(value)]] },
    names: ['cutoff'],
    fixedCutoffs: Float64Array.of(value),
    isLadder: false,
    missingKeys: [],
  }
}

function ofColumn(values: Float64Array, name: string, fate: Uint8Array): CutoffsServed {
  checkLength(name, values.length, fate.length)
  const count = values.length
  const cutoff = new Float64Array(count)
  const codes = new Int32Array(count)
  const labels: string[] = []
  const codeOf = new Map<number, number>()
  for (let i = 0; i < count; i++) {
    const value = values[i]
    if (!Number.isFinite(value)) {
      cutoff[i] = Number.NaN
      codes[i] = -1
      if (fate[i] === FATE.placed) fate[i] = Number.isNaN(value) ? FATE.cutoffMissing : FATE.cutoffNotFinite
      continue
    }
    cutoff[i] = value
    let code = codeOf.get(value)
    if (code === undefined) {
      code = labels.push(String(value)) - 1
      codeOf.set(value, code)
    }
    codes[i] = code
  }
  const names = ['cutoff']
  const groups = groupRows([{ name: names[0], codes, labels }])
  return { unit: firstIntegers(count), cutoff, groups, names, isLadder: false, missingKeys: [] }
}

function ofSchedule(schedule: Schedule, keys: readonly Labels[], fate: Uint8Array): CutoffsServed {
  if (keys.length !== schedule.by.length) {
    throw new RangeError(`the schedule has ${schedule.by.length} keys, the records give ${keys.length}`)
  }
  for (const key of keys) checkLength(key.name, key.codes.length, fate.length)
  const all = groupRows(keys)
  const names = keys.map((key) => key.name)
  const cutoffOf = Float64Array.from(all.values, (values) => schedule.cutoffs.get(scheduleKey(values)) ?? Number.NaN)
  const unitsWithout = new Int32Array(all.values.length)
  const count = fate.length
  const cutoff = new Float64Array(count)
  for (let i = 0; i < count; i++) {
    const group = all.ofRow[i]
    cutoff[i] = group < 0 ? Number.NaN : cutoffOf[group]
    if (fate[i] !== FATE.placed || Number.isFinite(cutoff[i])) continue
    fate[i] = group < 0 ? FATE.scheduleKeyMissing : FATE.notInSchedule
    if (group >= 0) unitsWithout[group]++
  }
  const missingKeys: MissingKey[] = []
  for (let group = 0; group < unitsWithout.length; group++) {
    if (unitsWithout[group] === 0) continue
    missingKeys.push({ key: lineLabel(names, all.values[group]), units: unitsWithout[group] })
  }
  const groups = keepGroups(all, (group) => Number.isFinite(cutoffOf[group]))
  return { unit: firstIntegers(count), cutoff, groups, names, isLadder: false, missingKeys }
}

function ofLadder(steps: Float64Array, score: Float64Array, treated: TreatedSide): CutoffsServed {
  const { unit, step } = ladderEntries(score, steps, treated)
  const cutoff = new Float64Array(step.length)
  for (let e = 0; e < step.length; e++) cutoff[e] = steps[step[e]]
  return {
    unit,
    cutoff,
    groups: { ofRow: step, values: Array.from(steps, (value) => [String(value)]) },
    names: ['cutoff'],
    fixedCutoffs: steps,
    isLadder: true,
    missingKeys: [],
  }
}

/** The groups that pass, renumbered; rows of the others belong to none. */
function keepGroups(groups: Groups, isKept: (group: number) => boolean): Groups {
  const values: (readonly string[])[] = []
  const renumbered = Int32Array.from(groups.values, (value, group) => (isKept(group) ? values.push(value) - 1 : -1))
  return { ofRow: groups.ofRow.map((group) => (group < 0 ? -1 : renumbered[group])), values }
}

function firstIntegers(count: number): Int32Array {
  const integers = new Int32Array(count)
  for (let i = 0; i < count; i++) integers[i] = i
  return integers
}

function checkLength(name: string, rows: number, expected: number): void {
  if (rows !== expected) throw new RangeError(`column ${name} has ${rows} rows, the score has ${expected}`)
}
