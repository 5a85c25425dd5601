/**
 * Are the residuals of neighbours alike? Moran's I with its expectation and variance under randomisation.
 * Source: Moran 1950, Biometrika; Cliff & Ord 1981, Spatial Processes, sections 1.5 and 2.3.
 * I = (n/S0) Σ_ij w_ij z_i z_j / Σ z_i², z the residuals less their mean, w_ii = 0. Weights are κ_ij = max(0, 1 − d_ij/D), as in
 * the spatial variance (METHODS section 4), or 1 for the k nearest; each unit's are divided by their sum, so that I is the
 * slope of the mean of a unit's neighbours on its own residual. Units without a neighbour count in n and in Σ z² alone.
 * Residuals of a fit are taken as they are: with few units per coefficient they are less alike than the noise.
 */
import { eachNeighbourhood, type SpatialPlaces, spatialPlaces } from '../jump/index.js'
import { normalUpper } from '../math/index.js'
import { nearestUnits } from './nearestUnits.js'

/** Who is a neighbour: units nearer than a distance in metres, or the k nearest with all ties. */
export type Neighbourhood = { readonly withinMetres: number } | { readonly nearest: number }

export interface Moran {
  readonly ok: true
  readonly i: number
  /** −1/(n − 1). */
  readonly expected: number
  readonly variance: number
  /** (I − expected)/√variance. */
  readonly z: number
  /** Upper tail of the normal: the chance of residuals at least as alike, were they scattered at random. */
  readonly p: number
  readonly units: number
  /** Mean number of neighbours of a unit. */
  readonly neighbours: number
}

export type MoranOutcome = Moran | { readonly ok: false; readonly reason: string }

/** Sums of the weights, as in Cliff & Ord. */
interface WeightSums {
  /** Σ w_ij z_i z_j */
  readonly cross: number
  /** Σ w_ij */
  readonly s0: number
  /** ½ Σ (w_ij + w_ji)² */
  readonly s1: number
  /** Σ_i (Σ_j w_ij + Σ_j w_ji)² */
  readonly s2: number
  /** Number of w_ij above 0. */
  readonly pairs: number
}

/**
 * residuals: finite, by unit; lon, lat: degrees by unit, none missing. Too few units, no neighbours or residuals without
 * spread give a reason. Throws RangeError where the arrays differ in length or a position is missing.
 */
export function moran(
  residuals: Float64Array,
  lonDegrees: Float64Array,
  latDegrees: Float64Array,
  neighbourhood: Neighbourhood,
): MoranOutcome {
  const n = residuals.length
  if (lonDegrees.length !== n) throw new RangeError(`${n} residuals, ${lonDegrees.length} positions`)
  if (n < 4) return { ok: false, reason: `only ${n} units near the line, too few for Moran's I` }
  const z = lessMean(residuals)
  let [squares, fourths] = [0, 0]
  for (let i = 0; i < n; i++) {
    squares += z[i] ** 2
    fourths += z[i] ** 4
  }
  const largest = residuals.reduce((most, value) => Math.max(most, Math.abs(value)), 0)
  if (!(squares > n * (1e-12 * largest) ** 2))
    return { ok: false, reason: 'the residuals near the line are all the same' }
  if ('nearest' in neighbourhood && neighbourhood.nearest >= n)
    return { ok: false, reason: `only ${n} units near the line, too few for ${neighbourhood.nearest} neighbours each` }
  const sums =
    'nearest' in neighbourhood
      ? sumsOfNearest(z, lonDegrees, latDegrees, neighbourhood.nearest)
      : sumsWithin(z, lonDegrees, latDegrees, neighbourhood.withinMetres)
  const { cross, s0, s1, s2, pairs } = sums
  if (pairs === 0) return { ok: false, reason: 'no two units near the line are neighbours' }
  const kurtosis = (n * fourths) / squares ** 2
  const i = ((n / s0) * cross) / squares
  const expected = -1 / (n - 1)
  const second =
    (n * ((n * n - 3 * n + 3) * s1 - n * s2 + 3 * s0 * s0) - kurtosis * ((n * n - n) * s1 - 2 * n * s2 + 6 * s0 * s0)) /
    ((n - 1) * (n - 2) * (n - 3) * s0 * s0)
  const variance = second - expected * expected
  if (!(variance > 1e-12 * second))
    return { ok: false, reason: "every unit is as near as every other: Moran's I can't vary" }
  const score = (i - expected) / Math.sqrt(variance)
  return { ok: true, i, expected, variance, z: score, p: normalUpper(score), units: n, neighbours: pairs / n }
}

function lessMean(values: Float64Array): Float64Array {
  let mean = 0
  for (let i = 0; i < values.length; i++) mean += values[i] / values.length
  return values.map((value) => value - mean)
}

/** Units that stand at one place have κ = 1, and are summed before the pairs of places are visited, once for rows and once for sums. */
function sumsWithin(z: Float64Array, lon: Float64Array, lat: Float64Array, withinMetres: number): WeightSums {
  const places = spatialPlaces(lon, lat, withinMetres)
  const units = new Float64Array(places.count)
  const total = new Float64Array(places.count)
  const own = new Float64Array(places.count)
  for (let i = 0; i < z.length; i++) {
    const place = places.placeOfUnit[i]
    if (place < 0) throw new RangeError(`unit ${i} has no position`)
    units[place]++
    total[place] += z[i]
    own[place] += z[i] * z[i]
  }
  const row = rowSums(places, units)
  const share = row.map((sum) => (sum > 0 ? 1 / sum : 0))
  const received = units.map((count, place) => (count - 1) * share[place])
  let [cross, s0, s1, s2, pairs] = [0, 0, 0, 0, 0]
  eachPair(places, (a, b, kappa) => {
    const both = share[a] + share[b]
    cross += kappa * total[a] * total[b] * both
    s1 += units[a] * units[b] * (kappa * both) ** 2
    received[a] += kappa * units[b] * share[b]
    received[b] += kappa * units[a] * share[a]
    pairs += 2 * units[a] * units[b]
  })
  for (let place = 0; place < places.count; place++) {
    const [count, given] = [units[place], row[place] > 0 ? 1 : 0]
    cross += share[place] * (total[place] * total[place] - own[place])
    s0 += count * given
    s1 += 2 * count * (count - 1) * share[place] * share[place]
    s2 += count * (given + received[place]) ** 2
    pairs += count * (count - 1)
  }
  return { cross, s0, s1, s2, pairs }
}

/** Σ_j κ_ij of a unit of each place. */
function rowSums(places: SpatialPlaces, units: Float64Array): Float64Array {
  const row = units.map((count) => count - 1)
  eachPair(places, (a, b, kappa) => {
    row[a] += kappa * units[b]
    row[b] += kappa * units[a]
  })
  return row
}

function eachPair(places: SpatialPlaces, visit: (a: number, b: number, kappa: number) => void): void {
  const all = Int32Array.from({ length: places.count }, (_, place) => place)
  eachNeighbourhood(places, all, (at, later, kappa, found) => {
    for (let k = 0; k < found; k++) visit(at, later[k], kappa[k])
  })
}

/** The nearest of a unit share its row of weights; they need not be mutual. */
function sumsOfNearest(z: Float64Array, lon: Float64Array, lat: Float64Array, nearest: number): WeightSums {
  const { start, other } = nearestUnits(lon, lat, nearest)
  const received = new Float64Array(z.length)
  let [cross, s1] = [0, 0]
  for (let i = 0; i < z.length; i++) {
    const share = 1 / (start[i + 1] - start[i])
    s1 += share
    for (let k = start[i]; k < start[i + 1]; k++) {
      const j = other[k]
      cross += share * z[i] * z[j]
      received[j] += share
      if (holds(other, start[j], start[j + 1], i)) s1 += share / (start[j + 1] - start[j])
    }
  }
  let s2 = 0
  for (let i = 0; i < z.length; i++) s2 += (1 + received[i]) ** 2
  return { cross, s0: z.length, s1, s2, pairs: other.length }
}

/** Is the value among the ascending ones between `from` and `to`? */
function holds(values: Int32Array, from: number, to: number, value: number): boolean {
  while (from < to) {
    const middle = (from + to) >> 1
    if (values[middle] === value) return true
    if (values[middle] < value) from = middle + 1
    else to = middle
  }
  return false
}
