/**
 * The units near one point of a border, in metres east and north of it, split at the border.
 * Each side is sorted by distance from the point; ties are ordered by everything else an estimate sees, so that the order
 * of rows in a file cannot change a single bit of any sum.
 */
import { argsortBy } from '../math/index.js'
import { type BySide, buildSample, type Side } from './sample.js'

/** One side of the border near a point; t is the distance from the point in metres. */
export interface PlaneSide extends Side {
  readonly eastMetres: Float64Array
  readonly northMetres: Float64Array
}

export interface PlaneSample {
  readonly untreated: PlaneSide
  readonly treated: PlaneSide
  /** Mean outcome of all units, taken out of y for accuracy. */
  readonly centre: number
}

/** Units with what an estimate needs of them; arrays of equal length, each unit once. */
export interface PlaneEntries {
  readonly eastMetres: Float64Array
  readonly northMetres: Float64Array
  readonly treated: Uint8Array
  readonly unit: Int32Array
  readonly y: Float64Array
  readonly w?: Float64Array
  readonly cluster?: Int32Array
}

/** Splits and sorts entries. y must be finite, w > 0, cluster codes >= 0. */
export function buildPlaneSample(entries: PlaneEntries): PlaneSample {
  const { eastMetres, northMetres } = entries
  for (const [name, values] of Object.entries(entries) as [string, ArrayLike<number> | undefined][]) {
    if (values === undefined || values.length === eastMetres.length) continue
    throw new RangeError(`eastMetres has ${eastMetres.length} units, ${name} has ${values.length}`)
  }
  const order = argsortBy([eastMetres, northMetres])
  const numbers = (values: Float64Array) => Float64Array.from(order, (i) => values[i])
  const codes = (values: Int32Array) => Int32Array.from(order, (i) => values[i])
  const east = numbers(eastMetres)
  const north = numbers(northMetres)
  const sample = buildSample({
    x: east.map((e, i) => Math.sqrt(e * e + north[i] * north[i])),
    treated: Uint8Array.from(order, (i) => entries.treated[i]),
    unit: Int32Array.from(order, (_, i) => i),
    y: numbers(entries.y),
    w: entries.w && numbers(entries.w),
    cluster: entries.cluster && codes(entries.cluster),
  })
  const placed = (side: Side): PlaneSide => ({
    ...side,
    unit: Int32Array.from(side.unit, (i) => entries.unit[order[i]]),
    eastMetres: Float64Array.from(side.unit, (i) => east[i]),
    northMetres: Float64Array.from(side.unit, (i) => north[i]),
  })
  return { untreated: placed(sample.untreated), treated: placed(sample.treated), centre: sample.centre }
}

/** The same over both sides. */
export function bothSides<T>(make: (name: 'untreated' | 'treated') => T): BySide<T> {
  return { untreated: make('untreated'), treated: make('treated') }
}
