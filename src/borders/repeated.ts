/** Coordinates that many units share: condominiums, or centroids of areas where addresses should be. */
import { argsort, argsortBy, quantileOfSorted, type Random } from '../math/index.js'
import { localPlane } from './localPlane.js'
import { turnsTo } from './rings.js'

/** No coordinate is in it. */
export interface RepeatedPoints {
  /** Units with a position. */
  readonly units: number
  /** Distinct points. */
  readonly distinct: number
  /** Share of the units that stand at a point with another unit; NaN without units. */
  readonly repeatedShare: number
  /** The most repeated points: `points` of them have `units` each; ten rows at most, most units first. */
  readonly most: readonly { readonly units: number; readonly points: number }[]
  /** Point of each unit, numbered from the south-west by longitude, then latitude; -1 without a position. */
  readonly point: Int32Array
  /** Middle of the distances from distinct points to their nearest other point; NaN with fewer than two points. */
  readonly spacingMetres: number
}

/** Distances are taken from this many points at most, evenly through their order. */
const mostSpacings = 1000

/**
 * Positions equal to the last digit are one point; whole turns of longitude are no difference. lon, lat: degrees, NaN
 * where missing. Throws RangeError where the lists differ in length.
 */
export function repeatedPoints(lon: Float64Array, lat: Float64Array): RepeatedPoints {
  if (lat.length !== lon.length) throw new RangeError(`lon has ${lon.length} units, lat has ${lat.length}`)
  const count = lon.length
  const point = new Int32Array(count).fill(-1)
  const rows = new Int32Array(count)
  const x = new Float64Array(count)
  const y = new Float64Array(count)
  let units = 0
  for (let i = 0; i < count; i++) {
    if (!(Math.abs(lon[i]) < Infinity && Math.abs(lat[i]) <= 90)) continue
    rows[units] = i
    x[units] = lon[i] + turnsTo(lon[i], 0)
    y[units++] = lat[i]
  }
  // size and place of each distinct point, in order
  const sizes = new Int32Array(units)
  const pointLon = new Float64Array(units)
  const pointLat = new Float64Array(units)
  let distinct = 0
  for (const k of argsortBy([x.subarray(0, units), y.subarray(0, units)])) {
    if (distinct === 0 || x[k] !== pointLon[distinct - 1] || y[k] !== pointLat[distinct - 1]) {
      pointLon[distinct] = x[k]
      pointLat[distinct++] = y[k]
    }
    sizes[distinct - 1]++
    point[rows[k]] = distinct - 1
  }
  const pointsOfSize = new Map<number, number>()
  for (const size of sizes.subarray(0, distinct))
    if (size > 1) pointsOfSize.set(size, (pointsOfSize.get(size) ?? 0) + 1)
  const most = [...pointsOfSize].map(([size, points]) => ({ units: size, points })).sort((a, b) => b.units - a.units)
  return {
    units,
    distinct,
    repeatedShare: most.reduce((sum, row) => sum + row.units * row.points, 0) / units,
    most: most.slice(0, 10),
    point,
    spacingMetres: spacingOf(pointLon.subarray(0, distinct), pointLat.subarray(0, distinct)),
  }
}

/** The middle distance to the nearest other point, in local planes: good to a few parts in a thousand, for words. */
function spacingOf(lon: Float64Array, lat: Float64Array): number {
  const count = lon.length
  if (count < 2) return Number.NaN
  const order = argsort(lat)
  const asked = Math.min(count, mostSpacings)
  const spacings = new Float64Array(asked)
  for (let s = 0; s < asked; s++) {
    const at = Math.floor(((s + 0.5) * count) / asked)
    spacings[s] = nearestOther(lon, lat, order, at)
  }
  return quantileOfSorted(spacings.sort(), 0.5)
}

/** Outward in latitude from the point at place `at` of the order, until latitude alone is farther than the nearest. */
function nearestOther(lon: Float64Array, lat: Float64Array, order: Uint32Array, at: number): number {
  const own = order[at]
  const plane = localPlane(lon[own], lat[own])
  let least = Infinity
  for (const step of [-1, 1]) {
    for (let k = at + step; k >= 0 && k < order.length; k += step) {
      const other = order[k]
      const north = (lat[other] - lat[own]) * plane.metresPerLat
      if (Math.abs(north) >= least) break
      const east = (lon[other] + turnsTo(lon[other], lon[own]) - lon[own]) * plane.metresPerLon
      least = Math.min(least, Math.hypot(east, north))
    }
  }
  return least
}

/**
 * 1 for each unit beyond `cap` at its point: of those at one point, the ones kept are drawn at random. Units are drawn
 * in the order of `key` (distinct numbers, such as ranks of ids; absent: rows), so that the order of rows is none.
 * Throws RangeError where cap is not a whole number above 0.
 */
export function beyondCap(
  { point, distinct }: Pick<RepeatedPoints, 'point' | 'distinct'>,
  cap: number,
  random: Random,
  key?: ArrayLike<number>,
): Uint8Array {
  if (!(Number.isInteger(cap) && cap > 0)) throw new RangeError(`the cap must be a whole number above 0: got ${cap}`)
  const isBeyond = new Uint8Array(point.length)
  const unitsAt = Array.from({ length: distinct }, (): number[] => [])
  for (let i = 0; i < point.length; i++) if (point[i] >= 0) unitsAt[point[i]].push(i)
  for (const units of unitsAt) {
    if (units.length <= cap) continue
    if (key) units.sort((a, b) => key[a] - key[b])
    // the first `cap` places of a random order (Fisher and Yates)
    for (let k = 0; k < cap; k++) {
      const other = k + random.integer(units.length - k)
      const swapped = units[k]
      units[k] = units[other]
      units[other] = swapped
    }
    for (let k = cap; k < units.length; k++) isBeyond[units[k]] = 1
  }
  return isBeyond
}

/** Share of units at repeated points from which on positions look like centroids. */
const mostRepeated = 0.8

/**
 * Why the positions look like centroids of areas, too far apart for a bandwidth, or undefined: more than 80% of units
 * share their point with others, and the middle spacing of points is above the bandwidth. Common practice, no source.
 */
export function centroidSuspicion(points: RepeatedPoints, bandwidthMetres: number): string | undefined {
  const { units, distinct, repeatedShare, spacingMetres } = points
  if (!(repeatedShare > mostRepeated && spacingMetres > bandwidthMetres)) return undefined
  const metres = (value: number) => `${Number(value.toPrecision(3)).toLocaleString('en-US')} m`
  const share = Math.floor(repeatedShare * 100)
  return (
    `${share}% of ${units} units share their position with others (${distinct} distinct positions), and positions lie ` +
    `${metres(spacingMetres)} apart in the middle case, more than the bandwidth of ${metres(bandwidthMetres)}: they look ` +
    'like centres of areas, and the distance of a centre says little about its units'
  )
}
