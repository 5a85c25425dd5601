/**
 * Places on the ground and their neighbours within a cutoff, found without looking at all pairs.
 * Places are sorted into bands of latitude as tall as the cutoff, and within a band by longitude. The neighbours of a place
 * lie in its own band and the two beside it, in a window of longitudes; pairs are measured as they are met and never
 * kept, so memory goes with the places alone. Units that stand at one place are one place.
 */
import { argsortBy, earthCentred, equatorialMetres, flattening, surfaceMetres } from '../math/index.js'

/** Places in the order of the bands: nothing that is summed over them depends on the order of rows. */
export interface SpatialPlaces {
  /** Geodesic; neighbours lie nearer to each other than this. */
  readonly cutoffMetres: number
  readonly count: number
  /** Place of each unit, by row; -1 without a position. */
  readonly placeOfUnit: Int32Array
  /** By place. Longitudes in [−180, 180). */
  readonly lon: Float64Array
  readonly band: Int32Array
  /** Longitudes farther away than this, in degrees, are beyond the cutoff; 180 where none are. The same in all of a band. */
  readonly wide: Float64Array
  /** Earth-centred metres, three for each place. */
  readonly centred: Float64Array
}

const degreesPerRadian = 180 / Math.PI
/** Least radius of curvature of the meridian, at the equator. */
const leastMeridianMetres = equatorialMetres * (1 - flattening) ** 2
const room = 1 + 1e-9

/**
 * Sorts the units of a table for a cutoff in metres; n log n, once for all lines and outcomes.
 * lon, lat: degrees, by row, NaN where missing. Throws RangeError where they differ in length or the cutoff is not above 0.
 */
export function spatialPlaces(lonDegrees: Float64Array, latDegrees: Float64Array, cutoffMetres: number): SpatialPlaces {
  const n = lonDegrees.length
  if (latDegrees.length !== n) throw new RangeError(`lon has ${n} units, lat has ${latDegrees.length}`)
  if (!(cutoffMetres > 0 && cutoffMetres < Number.POSITIVE_INFINITY))
    throw new RangeError(`cutoffMetres must be above 0 and finite: got ${cutoffMetres}`)
  const tall = (room * cutoffMetres * degreesPerRadian) / leastMeridianMetres
  const rows = Int32Array.from(lonDegrees.keys()).filter((i) => isPosition(lonDegrees[i], latDegrees[i]))
  const lons = Float64Array.from(rows, (i) => lonDegrees[i] - 360 * Math.floor((lonDegrees[i] + 180) / 360))
  const lats = Float64Array.from(rows, (i) => latDegrees[i])
  const bands = lats.map((lat) => Math.floor((lat + 90) / tall))
  const order = argsortBy([bands, lons, lats])
  const placeOfUnit = new Int32Array(n).fill(-1)
  const first: number[] = []
  for (let k = 0; k < order.length; k++) {
    const [own, before] = [order[k], order[k - 1]]
    if (k === 0 || lons[own] !== lons[before] || lats[own] !== lats[before]) first.push(own)
    placeOfUnit[rows[own]] = first.length - 1
  }
  const centred = new Float64Array(3 * first.length)
  first.forEach((k, place) => {
    earthCentred(lons[k], lats[k], centred, 3 * place)
  })
  return {
    cutoffMetres,
    count: first.length,
    placeOfUnit,
    lon: Float64Array.from(first, (k) => lons[k]),
    band: Int32Array.from(first, (k) => bands[k]),
    wide: Float64Array.from(first, (k) => widestLongitude(bands[k], tall, cutoffMetres)),
    centred,
  }
}

function isPosition(lon: number, lat: number): boolean {
  return Math.abs(lat) <= 90 && Math.abs(lon) < Number.POSITIVE_INFINITY
}

/**
 * On a path no longer than the cutoff the longitude changes by at most cutoff/(a cos φ), φ the latitude farthest from the
 * equator that a path from the band can reach; near a pole by any amount.
 */
function widestLongitude(band: number, tall: number, cutoffMetres: number): number {
  const south = band * tall - 90
  const farthest = (Math.max(Math.abs(south), Math.abs(south + tall)) + tall) / degreesPerRadian
  if (!(farthest < Math.PI / 2)) return 180
  return Math.min(180, (room * cutoffMetres * degreesPerRadian) / (equatorialMetres * Math.cos(farthest)))
}

/** Told, for one of the places visited, which later ones are within the cutoff: `count` of them, and κ = 1 − d/D of each. */
export type VisitNeighbours = (at: number, later: Int32Array, kappa: Float64Array, count: number) => void

/**
 * Visits every pair of the given places (ascending, each once) that are nearer than the cutoff, each pair once. Numbers
 * told are places in the list `visited`, not of all places; every one of the list is visited, in order.
 */
export function eachNeighbourhood(places: SpatialPlaces, visited: Int32Array, visit: VisitNeighbours): void {
  const n = visited.length
  const lon = Float64Array.from(visited, (place) => places.lon[place])
  const starts = bandStarts(places, visited)
  const found = { later: new Int32Array(n), kappa: new Float64Array(n), count: 0 }
  const centred = gathered(places, visited)
  const collect = (own: number, from: number, to: number) => {
    collectNear(centred, places.cutoffMetres, own, from, to, found)
  }
  for (let run = 0; run + 1 < starts.length; run++) {
    const [from, to] = [starts[run], starts[run + 1]]
    const isBeside = to < n && places.band[visited[to]] === places.band[visited[from]] + 1
    for (let own = from; own < to; own++) {
      const wide = places.wide[visited[own]]
      found.count = 0
      if (wide < 180) {
        collect(own, own + 1, firstAbove(lon, own + 1, to, lon[own] + wide))
        collect(own, from, firstAbove(lon, from, own, lon[own] + wide - 360))
      } else collect(own, own + 1, to)
      if (isBeside) collectBeside(lon, own, wide, to, starts[run + 2], collect)
      visit(own, found.later, found.kappa, found.count)
    }
  }
}

/** The windows of longitudes in the band between `from` and `to`: around the place, and around it across 180°. */
function collectBeside(
  lon: Float64Array,
  own: number,
  wide: number,
  from: number,
  to: number,
  collect: (own: number, from: number, to: number) => void,
): void {
  if (wide >= 180) {
    collect(own, from, to)
    return
  }
  const [west, east] = [lon[own] - wide, lon[own] + wide]
  if (east >= 180) collect(own, from, firstAbove(lon, from, to, east - 360))
  collect(own, firstNotBelow(lon, from, to, west), firstAbove(lon, from, to, east))
  if (west < -180) collect(own, firstNotBelow(lon, from, to, west + 360), to)
}

interface Found {
  readonly later: Int32Array
  readonly kappa: Float64Array
  count: number
}

/** Adds those of the visited places between `from` and `to` that are nearer to `own` than the cutoff. */
function collectNear(
  centred: Float64Array,
  cutoffMetres: number,
  own: number,
  from: number,
  to: number,
  found: Found,
): void {
  const { later, kappa } = found
  const [x, y, z] = [centred[3 * own], centred[3 * own + 1], centred[3 * own + 2]]
  const largestSquare = cutoffMetres * cutoffMetres
  let count = found.count
  for (let other = from, at = 3 * from; other < to; other++, at += 3) {
    const dx = centred[at] - x
    const dy = centred[at + 1] - y
    const dz = centred[at + 2] - z
    const square = dx * dx + dy * dy + dz * dz
    // the chord is shorter than the way on the ground
    if (square >= largestSquare) continue
    const metres = surfaceMetres(square, dx, dy, dz, x, y, z)
    if (metres >= cutoffMetres) continue
    later[count] = other
    kappa[count++] = 1 - metres / cutoffMetres
  }
  found.count = count
}

function gathered({ centred }: SpatialPlaces, visited: Int32Array): Float64Array {
  const few = new Float64Array(3 * visited.length)
  for (let i = 0; i < visited.length; i++) few.set(centred.subarray(3 * visited[i], 3 * visited[i] + 3), 3 * i)
  return few
}

/** Where each band begins among the visited places, and their number at the end. */
function bandStarts({ band }: SpatialPlaces, visited: Int32Array): number[] {
  const starts: number[] = []
  for (let i = 0; i < visited.length; i++) if (i === 0 || band[visited[i]] !== band[visited[i - 1]]) starts.push(i)
  return [...starts, visited.length]
}

/** The first of the ascending values between `from` and `to` that is above the limit; `to` where none is. */
function firstAbove(values: Float64Array, from: number, to: number, limit: number): number {
  while (from < to) {
    const middle = (from + to) >> 1
    if (values[middle] > limit) to = middle
    else from = middle + 1
  }
  return from
}

function firstNotBelow(values: Float64Array, from: number, to: number, limit: number): number {
  while (from < to) {
    const middle = (from + to) >> 1
    if (values[middle] >= limit) to = middle
    else from = middle + 1
  }
  return from
}
