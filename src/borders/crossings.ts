/** Where the boundary of a zone crosses itself. */
import { lineIntersect } from '@turf/turf'
import Flatbush from 'flatbush'
import { orient2d } from 'robust-predicates'
import type { MultiPolygonCoords, Position } from './geojson.js'

export interface Crossing {
  readonly lon: number
  readonly lat: number
  /** Polygon, ring and position (all from 0) where each of the two edges begins. */
  readonly edges: readonly [EdgePlace, EdgePlace]
}

export interface EdgePlace {
  readonly polygon: number
  readonly ring: number
  readonly position: number
}

/**
 * The first places, in file order, where two edges of one zone cross properly, and how many there are.
 * Touching at a vertex or along an edge is no crossing. Exact: orientations by robust predicates, candidates by boxes.
 * The search ends after `most` crossings, so a file of scribbles costs no more than a good one.
 */
export function crossingsOf(zone: MultiPolygonCoords, most: number): Crossing[] {
  const places: EdgePlace[] = []
  const ends: [Position, Position][] = []
  zone.forEach((polygon, p) => {
    polygon.forEach((ring, r) => {
      for (let i = 0; i + 1 < ring.length; i++) {
        places.push({ polygon: p, ring: r, position: i })
        ends.push([ring[i], ring[i + 1]])
      }
    })
  })
  const index = new Flatbush(ends.length)
  for (const [a, b] of ends) {
    index.add(Math.min(a[0], b[0]), Math.min(a[1], b[1]), Math.max(a[0], b[0]), Math.max(a[1], b[1]))
  }
  index.finish()
  const found: Crossing[] = []
  for (let i = 0; i < ends.length && found.length < most; i++) {
    const [a, b] = ends[i]
    const [west, east] = a[0] < b[0] ? [a[0], b[0]] : [b[0], a[0]]
    const [south, north] = a[1] < b[1] ? [a[1], b[1]] : [b[1], a[1]]
    const crossed = index.search(west, south, east, north, (j) => j > i && cross(a, b, ends[j][0], ends[j][1]))
    for (const j of crossed.sort((p, q) => p - q)) {
      const [lon, lat] = crossingPoint(ends[i], ends[j])
      found.push({ lon, lat, edges: [places[i], places[j]] })
    }
  }
  return found
}

/** Do the segments cross in a point interior to both? */
function cross(a: Position, b: Position, c: Position, d: Position): boolean {
  const side = (p: Position, q: Position, r: Position) => Math.sign(orient2d(p[0], p[1], q[0], q[1], r[0], r[1]))
  return side(a, b, c) * side(a, b, d) < 0 && side(c, d, a) * side(c, d, b) < 0
}

function crossingPoint(first: [Position, Position], second: [Position, Position]): Position {
  const line = ([from, to]: [Position, Position]) => ({
    type: 'LineString' as const,
    coordinates: [
      [from[0], from[1]],
      [to[0], to[1]],
    ],
  })
  const met = lineIntersect(line(first), line(second)).features[0]
  return met ? met.geometry.coordinates : first[0]
}
