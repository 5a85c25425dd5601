/** Zones that overlap by more than the tolerance: refused, because a unit there is on both sides. */
import { bbox, booleanPointInPolygon } from '@turf/turf'
import Flatbush from 'flatbush'
import type { Problem } from '../problem.js'
import { type Boundaries, pointOfEdge } from './boundaries.js'
import { edgeLengthMetres } from './geodesy.js'
import { type MultiPolygonCoords, placeText } from './geojson.js'
import { footOnSegment, localPlane } from './localPlane.js'
import { NEAR, type Nearness, SAME_SIDE } from './nearness.js'
import { turnsTo } from './rings.js'

/** What the search needs of one zone. */
interface ZoneShape {
  readonly geometry: { type: 'MultiPolygon'; coordinates: number[][][][] }
  readonly box: readonly [west: number, south: number, east: number, north: number]
}

interface Overlap {
  readonly zones: readonly [number, number]
  readonly lon: number
  readonly lat: number
  /** Distance of the place from the nearer-lying boundary, so the overlap is at least as wide. */
  readonly metres: number
}

/**
 * One problem for each pair of zones that overlap by more than `metres`. Where the boundary of one zone lies inside
 * another and farther than `metres` from that zone's boundary, they overlap; between two places where it comes near,
 * it is inside or outside as a whole, so one point decides for each such run. Zones with one outline in common on the
 * same side are tested `metres` inside it. `names` and `polygons` are in the order of the boundaries' zones.
 */
export function overlapProblems(
  boundaries: Boundaries,
  nearness: Nearness,
  polygons: readonly MultiPolygonCoords[],
  names: readonly string[],
  file: string,
  metres: number,
): Problem[] {
  const shapes = polygons.map(shapeOf)
  const index = indexOf(shapes)
  const worst = new Map<string, Overlap>()
  const keep = (overlap: Overlap) => {
    const key = `${Math.min(...overlap.zones)} ${Math.max(...overlap.zones)}`
    const before = worst.get(key)
    if (!before || overlap.metres > before.metres) worst.set(key, overlap)
  }
  for (let ring = 0; ring + 1 < boundaries.ringStart.length; ring++) {
    overlapsOfRing(boundaries, nearness, shapes, index, ring, keep)
    sharedOutlines(boundaries, nearness, shapes, ring, metres, keep)
  }
  return [...worst.values()].map(({ zones, lon, lat, metres: width }) => ({
    file,
    what: `zones ${listPair(names, zones)} overlap by more than snap (${metres} m)`,
    found: `at least ${width >= 10 ? Math.round(width) : Number(width.toPrecision(2))} m wide near ${placeText(lon, lat)}`,
    todo: 'cut one of them back, or raise snap if the overlap is a sliver',
  }))
}

function listPair(names: readonly string[], zones: readonly [number, number]): string {
  const [a, b] = [...zones].sort((x, y) => x - y)
  return `${names[a]} and ${names[b]}`
}

function shapeOf(polygons: MultiPolygonCoords): ZoneShape {
  const coordinates = polygons.map((polygon) => polygon.map((ring) => ring.map((p) => [p[0], p[1]])))
  const geometry = { type: 'MultiPolygon' as const, coordinates }
  const [west, south, east, north] = bbox(geometry)
  return { geometry, box: [west, south, east, north] }
}

function indexOf(shapes: readonly ZoneShape[]): Flatbush {
  const index = new Flatbush(shapes.length)
  for (const { box } of shapes) index.add(...box)
  index.finish()
  return index
}

function contains({ geometry, box }: ZoneShape, lon: number, lat: number): boolean {
  const turned = lon + turnsTo(lon, (box[0] + box[2]) / 2)
  if (turned < box[0] || turned > box[2] || lat < box[1] || lat > box[3]) return false
  return booleanPointInPolygon([turned, lat], geometry, { ignoreBoundary: true })
}

/** Runs of a ring that keep away from another zone's boundary, tested at their middle. */
function overlapsOfRing(
  boundaries: Boundaries,
  nearness: Nearness,
  shapes: readonly ZoneShape[],
  index: Flatbush,
  ring: number,
  keep: (overlap: Overlap) => void,
): void {
  const { ringStart, zoneOfRing, edges } = boundaries
  const [first, end] = [ringStart[ring], ringStart[ring + 1]]
  const own = zoneOfRing[ring]
  const test = (zone: number, position: number) => {
    const e = first + Math.floor(position)
    const [lon, lat] = pointOfEdge(edges, e, position - Math.floor(position))
    if (!contains(shapes[zone], lon, lat)) return
    keep({ zones: [own, zone], lon, lat, metres: metresToBoundary(boundaries, zone, lon, lat) })
  }
  const near = nearRuns(nearness, first, end)
  for (const [zone, runs] of near) {
    runs.forEach(([, to], i) => {
      const next = i + 1 < runs.length ? runs[i + 1][0] : runs[0][0] + (end - first)
      if (next - to > 1e-9) test(zone, (to + (next - to) / 2) % (end - first))
    })
  }
  for (const turn of [-360, 0, 360]) {
    const [lon, lat] = [edges.lon0[first] + turn, edges.lat0[first]]
    for (const zone of index.search(lon, lat, lon, lat)) if (zone !== own && !near.has(zone)) test(zone, 0)
  }
}

/** For each other zone the stretches of a ring near it, as positions (edges from the ring's start, plus fraction). */
function nearRuns(nearness: Nearness, first: number, end: number): Map<number, [number, number][]> {
  const runs = new Map<number, [number, number][]>()
  for (let e = first; e < end; e++) {
    for (let i = nearness.start[e]; i < nearness.start[e + 1]; i++) {
      if (nearness.kind[i] !== NEAR) continue
      const [from, to] = [e - first + nearness.from[i], e - first + nearness.to[i]]
      const list = runs.get(nearness.zone[i])
      const last = list?.[list.length - 1]
      if (!list) runs.set(nearness.zone[i], [[from, to]])
      else if (last && from <= last[1] + 1e-9) last[1] = to
      else list.push([from, to])
    }
  }
  return runs
}

/** Stretches where two zones lie on the same side of one coincident edge, longer than a sliver is wide. */
function sharedOutlines(
  boundaries: Boundaries,
  nearness: Nearness,
  shapes: readonly ZoneShape[],
  ring: number,
  metres: number,
  keep: (overlap: Overlap) => void,
): void {
  const { edges, ringStart, zoneOfRing, insideOfRing } = boundaries
  const depth = Math.max(metres, 1)
  for (let e = ringStart[ring]; e < ringStart[ring + 1]; e++) {
    for (let i = nearness.start[e]; i < nearness.start[e + 1]; i++) {
      if (nearness.kind[i] !== SAME_SIDE) continue
      const [lon0, lat0] = pointOfEdge(edges, e, nearness.from[i])
      const [lon1, lat1] = pointOfEdge(edges, e, nearness.to[i])
      if (edgeLengthMetres(lon0, lat0, lon1, lat1) <= depth) continue
      const plane = localPlane((lon0 + lon1) / 2, (lat0 + lat1) / 2)
      const [x, y] = [(lon1 - lon0) * plane.metresPerLon, (lat1 - lat0) * plane.metresPerLat]
      const step = (insideOfRing[ring] * depth) / Math.hypot(x, y)
      const lon = plane.lon - (step * y) / plane.metresPerLon
      const lat = plane.lat + (step * x) / plane.metresPerLat
      const [own, zone] = [zoneOfRing[ring], nearness.zone[i]]
      if (!contains(shapes[own], lon, lat) || !contains(shapes[zone], lon, lat)) continue
      keep({ zones: [own, zone], lon, lat, metres: depth })
    }
  }
}

/** Metres to the nearest edge of a zone, for messages: within a percent up to about 50 km. */
function metresToBoundary(boundaries: Boundaries, zone: number, lon: number, lat: number): number {
  const { edges, zoneOfEdge } = boundaries
  const plane = localPlane(lon, lat)
  const distance = new Float64Array(1)
  let least = Infinity
  for (let e = 0; e < zoneOfEdge.length; e++) {
    if (zoneOfEdge[e] !== zone) continue
    const shift = turnsTo((edges.lon0[e] + edges.lon1[e]) / 2, lon) - lon
    footOnSegment(
      (edges.lon0[e] + shift) * plane.metresPerLon,
      (edges.lat0[e] - lat) * plane.metresPerLat,
      (edges.lon1[e] + shift) * plane.metresPerLon,
      (edges.lat1[e] - lat) * plane.metresPerLat,
      distance,
    )
    least = Math.min(least, distance[0])
  }
  return least
}
