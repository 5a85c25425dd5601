/**
 * The units near one point of a border, in metres east and north of it, split at the border.
 * Each side is sorted by distance from the point; ties are ordered by everything else an estimate sees, so that the order
 * of rows in a file cannot change a single bit of any sum.
 */
import { argsortBy } from '../math/index.js'
import { type BySide, blockSum, pickCodes, pickNumbers, type Side } from './sample.js'

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
  const { eastMetres, treated, y } = entries
  const n = eastMetres.length
  for (const [name, values] of Object.entries(entries) as [string, ArrayLike<number> | undefined][]) {
    if (values === undefined || values.length === n) continue
    throw new RangeError(`eastMetres has ${n} units, ${name} has ${values.length}`)
  }
  const picks = [new Int32Array(n), new Int32Array(n)]
  const counts = [0, 0]
  for (let i = 0; i < n; i++) picks[treated[i]][counts[treated[i]]++] = i
  const [untreatedSide, treatedSide] = picks.map((pick, side) => sortSide(entries, pick.subarray(0, counts[side])))
  const centre = n > 0 ? (blockSum(untreatedSide.y) + blockSum(treatedSide.y)) / n : 0
  for (const side of [untreatedSide, treatedSide]) for (let i = 0; i < side.y.length; i++) side.y[i] -= centre
  if (y.length > 0 && !Number.isFinite(centre)) throw new RangeError('an outcome is not finite')
  return { untreated: untreatedSide, treated: treatedSide, centre }
}

function sortSide({ eastMetres, northMetres, y, w, cluster, unit }: PlaneEntries, pick: Int32Array): PlaneSide {
  const east = pickNumbers(eastMetres, pick)
  const north = pickNumbers(northMetres, pick)
  const distance = new Float64Array(pick.length)
  for (let i = 0; i < distance.length; i++) distance[i] = Math.sqrt(east[i] * east[i] + north[i] * north[i])
  const keys = [distance, east, north]
  for (const values of [y, w, cluster]) if (values) keys.push(pickNumbers(values, pick))
  const order = argsortBy(keys)
  const sorted = pickCodes(pick, order)
  return {
    t: pickNumbers(distance, order),
    eastMetres: pickNumbers(east, order),
    northMetres: pickNumbers(north, order),
    y: pickNumbers(y, sorted),
    w: w ? pickNumbers(w, sorted) : null,
    unit: pickCodes(unit, sorted),
    cluster: cluster ? pickCodes(cluster, sorted) : null,
    group: null,
  }
}

/** The same over both sides. */
export function bothSides<T>(make: (name: 'untreated' | 'treated') => T): BySide<T> {
  return { untreated: make('untreated'), treated: make('treated') }
}
