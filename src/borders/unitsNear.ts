/** An index of the units on the ground: those within a distance of a place, in metres east and north of it. */
import Flatbush from 'flatbush'
import { equatorialMetres, flattening } from '../math/index.js'
import { type LocalMetres, localMetres } from './localMetres.js'

export interface UnitIndex {
  /** In degrees; longitudes brought to [−180, 180). */
  readonly lon: Float64Array
  readonly lat: Float64Array
  /** Absent where there is no unit. */
  readonly tree?: Flatbush
}

export interface NearUnits extends LocalMetres {
  /** Places of the units in the lists that were indexed; in no order. */
  readonly index: Int32Array
}

const degreesPerRadian = 180 / Math.PI
/** Least radius of curvature of the meridian, at the equator. */
const leastMeridianMetres = equatorialMetres * (1 - flattening) ** 2

/** Indexes units by their degrees; n log n once for all points and outcomes. Throws RangeError where a position is missing. */
export function indexUnits(lonDegrees: Float64Array, latDegrees: Float64Array): UnitIndex {
  const count = lonDegrees.length
  if (latDegrees.length !== count) throw new RangeError(`lon has ${count} units, lat has ${latDegrees.length}`)
  const lon = lonDegrees.map((degrees) => degrees - 360 * Math.floor((degrees + 180) / 360))
  if (count === 0) return { lon, lat: latDegrees }
  const tree = new Flatbush(count)
  for (let i = 0; i < count; i++) {
    if (Number.isNaN(lon[i]) || Number.isNaN(latDegrees[i])) throw new RangeError(`unit ${i} has no position`)
    tree.add(lon[i], latDegrees[i], lon[i], latDegrees[i])
  }
  tree.finish()
  return { lon, lat: latDegrees, tree }
}

/** The units no farther than radiusMetres (> 0) from the place, to about 1e-8 m; work goes with their number. */
export function unitsNear({ lon, lat, tree }: UnitIndex, lon0: number, lat0: number, radiusMetres: number): NearUnits {
  if (!(radiusMetres > 0)) throw new RangeError(`radiusMetres must be above 0: got ${radiusMetres}`)
  const found = tree ? boxesAround(lon0, lat0, radiusMetres).flatMap((box) => tree.search(...box)) : []
  const foundLon = new Float64Array(found.length)
  const foundLat = new Float64Array(found.length)
  for (let i = 0; i < found.length; i++) {
    foundLon[i] = lon[found[i]]
    foundLat[i] = lat[found[i]]
  }
  const place = localMetres(lon0, lat0, foundLon, foundLat)
  const index = new Int32Array(found.length)
  let kept = 0
  for (let i = 0; i < found.length; i++) {
    const east = place.eastMetres[i]
    const north = place.northMetres[i]
    if (east * east + north * north > radiusMetres * radiusMetres) continue
    index[kept] = found[i]
    place.eastMetres[kept] = east
    place.northMetres[kept] = north
    kept++
  }
  return {
    index: index.subarray(0, kept),
    eastMetres: place.eastMetres.subarray(0, kept),
    northMetres: place.northMetres.subarray(0, kept),
  }
}

type Box = [west: number, south: number, east: number, north: number]

/**
 * Boxes in degrees that hold every place within the radius, one or, across 180°, two. On a path no longer than the radius
 * the latitude changes by at most radius/M and the longitude by at most radius/(N cos φ), M and N at their least and φ the
 * latitude farthest from the equator; where that reaches a pole, all longitudes.
 */
function boxesAround(lon0: number, lat0: number, radiusMetres: number): Box[] {
  const room = 1 + 1e-9
  const tall = (room * radiusMetres * degreesPerRadian) / leastMeridianMetres
  const [south, north] = [lat0 - tall, lat0 + tall]
  const farthest = Math.max(Math.abs(south), Math.abs(north)) / degreesPerRadian
  const wide =
    farthest < Math.PI / 2
      ? (room * radiusMetres * degreesPerRadian) / (equatorialMetres * Math.cos(farthest))
      : Number.POSITIVE_INFINITY
  if (!(wide < 180)) return [[-180, south, 180, north]]
  const middle = lon0 - 360 * Math.floor((lon0 + 180) / 360)
  const boxes: Box[] = [[middle - wide, south, middle + wide, north]]
  if (middle - wide < -180) boxes.push([middle - wide + 360, south, 180, north])
  if (middle + wide >= 180) boxes.push([-180, south, middle + wide - 360, north])
  return boxes
}
