/** Coordinates that many units share: condominiums, or centroids of areas where addresses should be. */
import { argsortBy, quantileOfSorted, type Random } from '../math/index.js'
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
  const point = new Int32Array(lon.length).fill(-1)
  const rows: number[] = []
  for (let i = 0; i < lon.length; i++) if (Math.abs(lon[i]) < Infinity && Math.abs(lat[i]) <= 90) rows.push(i)
  const x = Float64Array.from(rows, (i) => lon[i] + turnsTo(lon[i], 0))
  const y = Float64Array.from(rows, (i) => lat[i])
  const sizes: number[] = []
  const first: number[] = []
  let before = -1
  for (const k of argsortBy([x, y])) {
    if (before < 0 || x[k] !== x[before] || y[k] !== y[before]) {
      sizes.push(0)
      first.push(k)
    }
    sizes[sizes.length - 1]++
    point[rows[k]] = sizes.length - 1
    before = k
  }
  const pointsOfSize = new Map<number, number>()
  for (const size of sizes) if (size > 1) pointsOfSize.set(size, (pointsOfSize.get(size) ?? 0) + 1)
  const most = [...pointsOfSize].map(([units, points]) => ({ units, points })).sort((a, b) => b.units - a.units)
  return {
    units: rows.length,
    distinct: sizes.length,
    repeatedShare: most.reduce((sum, { units, points }) => sum + units * points, 0) / rows.length,
    most: most.slice(0, 10),
    point,
    spacingMetres: spacingOf(
      Float64Array.from(first, (k) => x[k]),
      Float64Array.from(first, (k) => y[k]),
    ),
  }
}

/** The middle distance to the nearest other point, in local planes: good to a few parts in a thousand, for words. */
function spacingOf(lon: Float64Array, lat: Float64Array): number {
  const count = lon.length
  if (count < 2) return Number.NaN
  const order = argsortBy([lat, lon])
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
