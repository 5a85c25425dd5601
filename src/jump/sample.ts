/**
 * The units of one estimate, split at the line and sorted by distance from it.
 * Ties in distance are ordered by line, outcome, weight and cluster, so that the order of rows in a file
 * cannot change a single bit of any sum.
 */
import { argsort, argsortBy } from '../math/index.js'
import { countWithin } from './kernel.js'

export interface BySide<T> {
  readonly untreated: T
  readonly treated: T
}

/** One side of the line; arrays of equal length, by increasing t. */
export interface Side {
  /** |x| >= 0. */
  readonly t: Float64Array
  /** Outcome less the sample's `centre`. */
  readonly y: Float64Array
  /** Sampling weights > 0; null: all 1. */
  readonly w: Float64Array | null
  /** Row of the unit. */
  readonly unit: Int32Array
  /** Cluster code >= 0; null: not clustered. */
  readonly cluster: Int32Array | null
  /** Line of the entry, where several lines are pooled; null: one line. */
  readonly group: Int32Array | null
}

export interface Sample {
  readonly untreated: Side
  readonly treated: Side
  /** Mean outcome of all entries, taken out of y for accuracy. */
  readonly centre: number
  /** Whether a unit may have several entries (lines of a ladder pooled). */
  readonly repeats: boolean
}

/** Entries of a placement with what an estimate needs of them; arrays of equal length. */
export interface Entries {
  readonly x: Float64Array
  readonly treated: Uint8Array
  readonly unit: Int32Array
  readonly y: Float64Array
  readonly w?: Float64Array
  readonly cluster?: Int32Array
  readonly group?: Int32Array
  /** Whether a unit may appear more than once. */
  readonly repeats?: boolean
}

/** Splits and sorts entries. y must be finite, w > 0, cluster codes >= 0; entries with |x| < donut are left out. */
export function buildSample(entries: Entries, donut = 0): Sample {
  const n = entries.x.length
  if (entries.y.length !== n) throw new RangeError(`x has ${n} entries, y has ${entries.y.length}`)
  const picks = [new Int32Array(n), new Int32Array(n)]
  const counts = [0, 0]
  let total = 0
  for (let i = 0; i < n; i++) {
    if (donut > 0 && Math.abs(entries.x[i]) < donut) continue
    const side = entries.treated[i]
    picks[side][counts[side]++] = i
  }
  const sides = picks.map((pick, side) => sortSide(entries, pick.subarray(0, counts[side])))
  for (const side of sides) total += blockSum(side.y)
  const centre = counts[0] + counts[1] > 0 ? total / (counts[0] + counts[1]) : 0
  for (const side of sides) for (let i = 0; i < side.y.length; i++) side.y[i] -= centre
  return { untreated: sides[0], treated: sides[1], centre, repeats: entries.repeats ?? false }
}

function sortSide(entries: Entries, pick: Int32Array): Side {
  const distances = pickNumbers(entries.x, pick)
  for (let i = 0; i < pick.length; i++) distances[i] = Math.abs(distances[i])
  let order = argsort(distances)
  const t = pickNumbers(distances, order)
  if (hasTies(t)) {
    const others = [entries.group, entries.y, entries.w, entries.cluster].filter((values) => values !== undefined)
    order = argsortBy([distances, ...others.map((values) => pickNumbers(values, pick))])
  }
  const sorted = pickCodes(pick, order)
  return {
    t,
    y: pickNumbers(entries.y, sorted),
    w: entries.w ? pickNumbers(entries.w, sorted) : null,
    unit: pickCodes(entries.unit, sorted),
    cluster: entries.cluster ? pickCodes(entries.cluster, sorted) : null,
    group: entries.group ? pickCodes(entries.group, sorted) : null,
  }
}

function hasTies(sorted: Float64Array): boolean {
  for (let i = 1; i < sorted.length; i++) if (sorted[i] === sorted[i - 1]) return true
  return false
}

export function pickNumbers(values: Float64Array | Int32Array, pick: Int32Array | Uint32Array): Float64Array {
  const out = new Float64Array(pick.length)
  for (let i = 0; i < out.length; i++) out[i] = values[pick[i]]
  return out
}

export function pickCodes(values: Int32Array, pick: Int32Array | Uint32Array): Int32Array {
  const out = new Int32Array(pick.length)
  for (let i = 0; i < out.length; i++) out[i] = values[pick[i]]
  return out
}

/** Sum in blocks of 4,096, which keeps rounding near that of pairwise summation. */
export function blockSum(values: Float64Array): number {
  let total = 0
  for (let start = 0; start < values.length; start += 4096) {
    const end = Math.min(values.length, start + 4096)
    let part = 0
    for (let i = start; i < end; i++) part += values[i]
    total += part
  }
  return total
}

/** The same sample with other outcomes (already centred), as after covariates or fixed effects are taken out. */
export function withOutcomes(sample: Sample, untreated: Float64Array, treated: Float64Array): Sample {
  return {
    ...sample,
    untreated: { ...sample.untreated, y: untreated },
    treated: { ...sample.treated, y: treated },
  }
}

/** The entries with |x| at or above `donut`, as views; the centre stays. */
export function outsideDonut(sample: Sample, donut: number): Sample {
  const cut = (side: Side) => viewOf(side, firstAtOrAbove(side.t, donut), side.t.length)
  return donut > 0 ? { ...sample, untreated: cut(sample.untreated), treated: cut(sample.treated) } : sample
}

/** The entries with |x| at or below a bandwidth on each side, as views; the centre stays. */
export function withinBandwidth(sample: Sample, { untreated, treated }: BySide<number>): Sample {
  const cut = (side: Side, h: number) => viewOf(side, 0, countWithin(side.t, h, 'uniform'))
  return { ...sample, untreated: cut(sample.untreated, untreated), treated: cut(sample.treated, treated) }
}

type SideArray = Float64Array | Int32Array

function changed(side: Side, change: <T extends SideArray>(values: T) => T): Side {
  const { t, y, w, unit, cluster, group } = side
  return {
    t: change(t),
    y: change(y),
    w: w === null ? null : change(w),
    unit: change(unit),
    cluster: cluster === null ? null : change(cluster),
    group: group === null ? null : change(group),
  }
}

function viewOf(side: Side, from: number, to: number): Side {
  return changed(side, <T extends SideArray>(values: T) => values.subarray(from, to) as T)
}

function firstAtOrAbove(t: Float64Array, value: number): number {
  let low = 0
  let high = t.length
  while (low < high) {
    const middle = (low + high) >> 1
    if (t[middle] < value) low = middle + 1
    else high = middle
  }
  return low
}

/**
 * One side of a sample cut in two at distance `at`, the part farther from the line treated where the side is: a line that
 * is none. Units exactly there are on the farther part.
 */
export function splitSide(sample: Sample, name: 'untreated' | 'treated', at: number): Sample {
  const side = sample[name]
  const place = firstAtOrAbove(side.t, at)
  const far = viewOf(side, place, side.t.length)
  const near = reversed(viewOf(side, 0, place))
  const shifted = (part: Side, sign: number) => ({ ...part, t: part.t.map((t) => sign * (t - at)) })
  const [inner, outer] = [shifted(near, -1), shifted(far, 1)]
  return name === 'treated'
    ? { ...sample, untreated: inner, treated: outer }
    : { ...sample, untreated: outer, treated: inner }
}

function reversed(side: Side): Side {
  return changed(side, <T extends SideArray>(values: T) => values.slice().reverse() as T)
}

/** Number of distinct values among the first `count` ascending values, counting no further than `enough`. */
export function distinctWithin(t: Float64Array, count: number, enough = Number.POSITIVE_INFINITY): number {
  let distinct = 0
  for (let i = 0; i < count && distinct < enough; i++) if (i === 0 || t[i] !== t[i - 1]) distinct++
  return distinct
}
