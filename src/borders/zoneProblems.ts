/** What can be wrong with the polygons of one zone, each with its exact place; counts in places start at 0. */
import { bbox, booleanPointInPolygon } from '@turf/turf'
import Flatbush from 'flatbush'
import type { Problem } from '../problem.js'
import { crossingsOf, type EdgePlace } from './crossings.js'
import {
  isObject,
  listed,
  type MultiPolygonCoords,
  type Position,
  placeText,
  type RingCoords,
  shown,
} from './geojson.js'
import { type Extent, extend, inRange } from './positions.js'
import { doubleArea, unwrapped } from './rings.js'

/** Adds a problem of the feature at hand. */
type Say = (what: string, found: string, todo: string) => void

/** Problems of one kind in one feature that are written out; more are a symptom, not news. */
const mostPerFeature = 5
/** Twice the area, in square degrees, under which a ring is empty: about six square millimetres at the equator. */
const leastArea = 1e-15

export function sayer(file: string, feature: number, problems: Problem[]): Say {
  return (what, found, todo) => problems.push({ file, feature, what, found, todo })
}

/**
 * The polygons of a Polygon or MultiPolygon geometry, rings unwrapped across the antimeridian; undefined where a
 * problem was added. Positions out of range are only entered in `extent`: they are one problem of the whole file.
 */
export function readPolygons(
  geometry: unknown,
  feature: number,
  extent: Extent,
  say: Say,
): MultiPolygonCoords | undefined {
  if (!isObject(geometry)) throw new Error('readPolygons wants a geometry object')
  const isMulti = geometry.type === 'MultiPolygon'
  const polygons: unknown = isMulti ? geometry.coordinates : [geometry.coordinates]
  if (!Array.isArray(polygons) || polygons.length === 0) {
    say('coordinates must be a list of polygons', shown(polygons), 'give the zone its polygons')
    return undefined
  }
  let isGood = true
  const read = polygons.map((polygon: unknown, p): RingCoords[] => {
    const place = isMulti ? `polygon ${p}, ` : ''
    if (!Array.isArray(polygon) || polygon.length === 0) {
      say(`${place || 'coordinates: '}a polygon must be a list of rings`, shown(polygon), 'give it an outer ring')
      isGood = false
      return []
    }
    return polygon.map((ring: unknown, r): RingCoords => {
      const clean = readRing(ring, feature, `${place}ring ${r}`, extent, say)
      if (!clean) isGood = false
      return clean ?? []
    })
  })
  if (!isGood) return undefined
  if (ringsWithArea(read).length > 0) return read
  const positions = new Set(read[0][0].map((p) => placeText(p[0], p[1])))
  const place = isMulti ? 'polygon 0, ring 0' : 'ring 0'
  const shape = positions.size < 3 ? 'is one position or two, repeated' : 'encloses no area'
  say(`${place} ${shape}`, listed([...positions], 4), 'draw the ring, or remove the zone')
  return undefined
}

function readRing(ring: unknown, feature: number, place: string, extent: Extent, say: Say): RingCoords | undefined {
  const positions = readPositions(ring, feature, place, extent, say)
  if (!positions) return undefined
  const n = positions.length
  if (n < 4) {
    say(`${place}: a ring needs at least 4 positions, the last equal to the first`, `${n}`, 'complete the ring')
    return undefined
  }
  const [first, last] = [positions[0], positions[n - 1]]
  if (first[0] !== last[0] || first[1] !== last[1]) {
    const found = `first ${placeText(first[0], first[1])}, last ${placeText(last[0], last[1])}`
    say(`${place} is not closed`, found, 'repeat the first position at the end')
    return undefined
  }
  return unwrapped(positions, true)
}

function hasArea(ring: RingCoords): boolean {
  return Math.abs(doubleArea(ring)) >= leastArea
}

/**
 * The rings that enclose an area. Generalised files carry islands shrunk to a point; as parts of a zone with other
 * parts they hold nothing and are left out. A ring of no area that crosses itself stays, to be named as such.
 */
export function ringsWithArea(zone: MultiPolygonCoords): MultiPolygonCoords {
  const isKept = (ring: RingCoords) => hasArea(ring) || crossingsOf([[ring]], 1).length > 0
  return zone.filter(([outer]) => isKept(outer)).map((polygon) => polygon.filter(isKept))
}

/** Positions as [longitude, latitude], a height left out; undefined where one is not two finite numbers. */
export function readPositions(
  list: unknown,
  feature: number,
  place: string,
  extent: Extent,
  say: Say,
): Position[] | undefined {
  if (!Array.isArray(list)) {
    say(`${place} must be a list of positions`, shown(list), 'write [[longitude, latitude], ...]')
    return undefined
  }
  const bad: number[] = []
  const read: Position[] = list.map((position: unknown, i) => {
    if (!Array.isArray(position) || !Number.isFinite(position[0]) || !Number.isFinite(position[1])) {
      bad.push(i)
      return [Number.NaN, Number.NaN]
    }
    extend(extent, position[0], position[1], feature, `${place}, position ${i}`)
    return [position[0], position[1]]
  })
  if (bad.length === 0) return read
  const more = bad.length > 1 ? `, and ${bad.length - 1} more` : ''
  const what = `${place}, position ${bad[0]} is not a pair of finite numbers`
  say(what, `${shown(list[bad[0]])}${more}`, 'write [longitude, latitude]')
  return undefined
}

/** Problems of the shape of a zone whose positions are all good: self-crossings, and holes outside their polygon. */
export function shapeProblems(zone: MultiPolygonCoords, isMulti: boolean, say: Say): void {
  if (!zone.every((polygon) => polygon.every((ring) => ring.every((p) => inRange(p[0], p[1]))))) return
  const crossings = crossingsOf(zone, mostPerFeature + 1)
  for (const { lon, lat, edges } of crossings.slice(0, mostPerFeature)) {
    const isOneRing = edges[0].polygon === edges[1].polygon && edges[0].ring === edges[1].ring
    const what = isOneRing ? 'a ring crosses itself' : 'two rings of a zone cross'
    const places = edges.map((edge) => edgeText(edge, isMulti)).join(' and ')
    say(`${what} at ${placeText(lon, lat)}`, `the edges from ${places}`, 'redraw the ring without the crossing')
  }
  if (crossings.length > mostPerFeature)
    say('more crossings in this zone', `more than ${mostPerFeature}`, 'redraw the zone')
  if (crossings.length === 0) {
    holesOutside(zone, isMulti, say)
    partsInside(zone, say)
  }
}

function edgeText(edge: EdgePlace, isMulti: boolean): string {
  return `${isMulti ? `polygon ${edge.polygon}, ` : ''}ring ${edge.ring}, position ${edge.position}`
}

function holesOutside(zone: MultiPolygonCoords, isMulti: boolean, say: Say): void {
  zone.forEach((polygon, p) => {
    const outer = { type: 'Polygon' as const, coordinates: [polygon[0].map((position) => [...position])] }
    polygon.forEach((hole, r) => {
      if (r === 0 || !hasArea(hole)) return
      const out = hole.find((position) => !booleanPointInPolygon([...position], outer))
      if (!out) return
      const what = `${isMulti ? `polygon ${p}, ` : ''}ring ${r} is a hole outside its polygon`
      say(what, `position ${placeText(out[0], out[1])}`, 'make it a polygon of its own (MultiPolygon), or remove it')
    })
  })
}

/** Parts of one zone that lie inside one another: what is covered twice would count as outside. */
function partsInside(zone: MultiPolygonCoords, say: Say): void {
  if (zone.length < 2) return
  const parts = zone.map((polygon) => ({
    type: 'Polygon' as const,
    coordinates: polygon.map((ring) => ring.map((position) => [...position])),
  }))
  const index = new Flatbush(parts.length)
  for (const part of parts) {
    const [west, south, east, north] = bbox(part)
    index.add(west, south, east, north)
  }
  index.finish()
  zone.forEach(([outer], p) => {
    if (!hasArea(outer)) return
    const [lon, lat] = outer[0]
    for (const other of index.search(lon, lat, lon, lat)) {
      if (other === p) continue
      const isInside = outer.some((position) =>
        booleanPointInPolygon([...position], parts[other], { ignoreBoundary: true }),
      )
      if (isInside)
        say(`polygon ${p} lies inside polygon ${other} of the same zone`, placeText(lon, lat), 'merge the two into one')
    }
  })
}
