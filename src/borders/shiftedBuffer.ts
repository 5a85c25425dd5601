/**
 * The land within a distance of a border. turf's buffer works on a sphere, about the middle of the whole shape. So it is
 * given sections in metres around a place of their own, drawn as degrees at the equator, where its sphere and the plane
 * differ by less than 1e-4 within 80 km.
 */
import { buffer, earthRadius, featureCollection, feature as featureOf, union } from '@turf/turf'
import type { MultiLineString, MultiPolygon, Polygon } from 'geojson'
import { fromLocalMetres } from './fromLocalMetres.js'
import { edgeLengthMetres, geodesicMetres } from './geodesy.js'
import type { MultiPolygonCoords } from './geojson.js'
import { localMetres } from './localMetres.js'
import { turnsTo } from './rings.js'

type Point = readonly [number, number]
type Line = readonly Point[]

/** Points of a section lie within this of its first, and those of a group of sections within twice this of its place. */
const sectionMetres = 40_000
/** Corners are rounded by this many straight stretches to the quarter circle: the curve runs up to 3e-4 within it. */
const stretchesPerQuarter = 32
/** By this share of the distance a straight stretch of the curve may leave the straight lon/lat edge drawn for it. */
const sagShare = 1e-4
const metresPerDegree = (earthRadius * Math.PI) / 180

/**
 * Every place within `metres` (above 0) of the lines, as polygons in degrees, longitudes as in the first line. Straight
 * lines are followed to a few parts in 10,000 of the distance, hollows shallower than a hundredth of it are filled (JSTS).
 * Throws what turf throws where it can't unite the parts, RangeError nearer than 5 degrees to a pole.
 */
export function landWithin(lines: readonly Line[], metres: number): MultiPolygonCoords {
  const highest = lines.flat().reduce((most, [, lat]) => Math.max(most, Math.abs(lat)), 0)
  if (!(highest <= 85)) throw new RangeError('the border is too near a pole')
  const bend = Math.max(1, Math.tan((highest * Math.PI) / 180))
  const longest = Math.min(sectionMetres / 4, Math.sqrt((8 * earthRadius * metres * sagShare) / bend))
  const parts = groupsOf(sectionsOf(runsOf(lines), longest)).map((group) => withinOfGroup(group, metres, longest))
  if (parts.length === 1) return parts[0]
  const united = union(featureCollection(parts.map((part) => featureOf(multiPolygon(part)))))
  if (!united) throw new RangeError('no land')
  return polygonsOf(united.geometry)
}

/** Lines that go on where the one before ended, as one. */
function runsOf(lines: readonly Line[]): Line[] {
  const runs: Point[][] = []
  for (const line of lines) {
    const run = runs[runs.length - 1]
    const end = run?.[run.length - 1]
    if (end && end[0] === line[0][0] && end[1] === line[0][1]) for (const point of line.slice(1)) run.push(point)
    else runs.push([...line])
  }
  return runs
}

/** Cut so that edges are no longer than `longest` and every point is near the section's first. */
function sectionsOf(runs: readonly Line[], longest: number): Line[] {
  const sections: Point[][] = []
  for (const run of runs) {
    let section: Point[] = [run[0]]
    sections.push(section)
    for (let i = 1; i < run.length; i++) {
      const [from, to] = [run[i - 1], run[i]]
      const steps = Math.ceil(edgeLengthMetres(from[0], from[1], to[0], to[1]) / longest)
      for (let step = 1; step <= steps; step++) {
        const point = step === steps ? to : between(from, to, step / steps)
        if (geodesicMetres(section[0][0], section[0][1], point[0], point[1]) > sectionMetres) {
          section = [section[section.length - 1]]
          sections.push(section)
        }
        section.push(point)
      }
    }
  }
  return sections.flatMap(opened)
}

/** A closed section in two: JSTS leaves a hole in the middle of a closed line that is smaller than the distance. */
function opened(section: Line): Line[] {
  const [first, last] = [section[0], section[section.length - 1]]
  if (first[0] !== last[0] || first[1] !== last[1]) return [section]
  const middle = Math.floor(section.length / 2)
  return [section.slice(0, middle + 1), section.slice(middle)]
}

function between([lon0, lat0]: Point, [lon1, lat1]: Point, t: number): Point {
  return [lon0 + t * (lon1 - lon0), lat0 + t * (lat1 - lat0)]
}

interface Group {
  readonly place: Point
  readonly sections: Line[]
}

/** Sections that begin near one place, the first section's; longitudes of places are turned towards the first of all. */
function groupsOf(sections: readonly Line[]): Group[] {
  const groups: Group[] = []
  for (const section of sections) {
    const [lon, lat] = section[0]
    const near = groups.find(({ place }) => geodesicMetres(place[0], place[1], lon, lat) <= sectionMetres)
    if (near) near.sections.push(section)
    else groups.push({ place: [lon + turnsTo(lon, groups[0]?.place[0] ?? lon), lat], sections: [section] })
  }
  return groups
}

function withinOfGroup({ place, sections }: Group, metres: number, longest: number): MultiPolygonCoords {
  const shape: MultiLineString = {
    type: 'MultiLineString',
    coordinates: sections.map((section) => {
      const lon = Float64Array.from(section, ([x]) => x)
      const lat = Float64Array.from(section, ([, y]) => y)
      const { eastMetres, northMetres } = localMetres(place[0], place[1], lon, lat)
      return section.map((_, i) => [eastMetres[i] / metresPerDegree, northMetres[i] / metresPerDegree])
    }),
  }
  const made = buffer(shape, metres, { units: 'meters', steps: stretchesPerQuarter })
  if (!made) throw new RangeError('no land')
  return polygonsOf(made.geometry).map((polygon) => polygon.map((ring) => ringOnGround(ring, place, longest)))
}

/** A ring from degrees at the equator to degrees around the place, in stretches no longer than `longest`. */
function ringOnGround(ring: readonly (readonly number[])[], place: Point, longest: number): Point[] {
  const east: number[] = []
  const north: number[] = []
  for (let i = 0; i + 1 < ring.length; i++) {
    const [x0, y0, x1, y1] = [...ring[i], ...ring[i + 1]].map((degrees) => degrees * metresPerDegree)
    const steps = Math.max(1, Math.ceil(Math.hypot(x1 - x0, y1 - y0) / longest))
    for (let step = 0; step < steps; step++) {
      east.push(x0 + ((x1 - x0) * step) / steps)
      north.push(y0 + ((y1 - y0) * step) / steps)
    }
  }
  const { lon, lat } = fromLocalMetres(place[0], place[1], Float64Array.from(east), Float64Array.from(north))
  const points = Array.from(lon, (x, i): Point => [x, lat[i]])
  return [...points, points[0]]
}

function multiPolygon(polygons: MultiPolygonCoords): MultiPolygon {
  return { type: 'MultiPolygon', coordinates: polygons as number[][][][] }
}

function polygonsOf(shape: Polygon | MultiPolygon): MultiPolygonCoords {
  return shape.type === 'Polygon' ? [shape.coordinates] : shape.coordinates
}
