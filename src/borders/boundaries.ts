/** The boundaries of all zones as edges, written in one canonical order: nothing after this sees feature or ring order. */
import { type EdgeBoxes, edgeBoxes } from './edgeBoxes.js'
import type { MultiPolygonCoords } from './geojson.js'
import { type CanonicalRing, canonicalRing, comparePaths } from './rings.js'
import type { Edges } from './segmentTree.js'

export interface Boundaries {
  /** Ring after ring, the rings of a zone together, zones in the order given. */
  readonly edges: Edges
  readonly boxes: EdgeBoxes
  readonly zoneOfEdge: Int32Array
  readonly ringOfEdge: Int32Array
  /** First edge of each ring, and at the end the number of edges. */
  readonly ringStart: Int32Array
  /** +1 where the zone lies left of the ring's edges, -1 where right. */
  readonly insideOfRing: Int8Array
  readonly zoneOfRing: Int32Array
}

/** Boundaries of the zones, in the order of `polygons`; outer rings and holes alike. */
export function boundariesOf(polygons: readonly MultiPolygonCoords[]): Boundaries {
  const rings: (CanonicalRing & { zone: number })[] = []
  polygons.forEach((zone, index) => {
    const own = zone.flatMap((polygon) => polygon.map((ring, r) => canonicalRing(ring, r > 0)))
    own.sort((a, b) => comparePaths(a.positions, b.positions))
    for (const ring of own) rings.push({ ...ring, zone: index })
  })
  const count = rings.reduce((sum, ring) => sum + ring.positions.length - 1, 0)
  const edges = edgeArrays(count)
  const zoneOfEdge = new Int32Array(count)
  const ringOfEdge = new Int32Array(count)
  const ringStart = new Int32Array(rings.length + 1)
  let e = 0
  rings.forEach(({ positions, zone }, r) => {
    ringStart[r] = e
    for (let i = 0; i + 1 < positions.length; i++, e++) {
      setEdge(edges, e, positions[i][0], positions[i][1], positions[i + 1][0], positions[i + 1][1])
      zoneOfEdge[e] = zone
      ringOfEdge[e] = r
    }
  })
  ringStart[rings.length] = e
  return {
    edges,
    boxes: edgeBoxes(edges),
    zoneOfEdge,
    ringOfEdge,
    ringStart,
    insideOfRing: Int8Array.from(rings, (ring) => ring.inside),
    zoneOfRing: Int32Array.from(rings, (ring) => ring.zone),
  }
}

export function edgeArrays(count: number): Edges {
  return {
    lon0: new Float64Array(count),
    lat0: new Float64Array(count),
    lon1: new Float64Array(count),
    lat1: new Float64Array(count),
  }
}

export function setEdge(edges: Edges, e: number, lon0: number, lat0: number, lon1: number, lat1: number): void {
  edges.lon0[e] = lon0
  edges.lat0[e] = lat0
  edges.lon1[e] = lon1
  edges.lat1[e] = lat1
}

/** Longitude and latitude at a fraction of an edge; fractions 0 and 1 give its ends to the bit. */
export function pointOfEdge(edges: Edges, e: number, fraction: number): [number, number] {
  if (fraction === 1) return [edges.lon1[e], edges.lat1[e]]
  return [
    edges.lon0[e] + fraction * (edges.lon1[e] - edges.lon0[e]),
    edges.lat0[e] + fraction * (edges.lat1[e] - edges.lat0[e]),
  ]
}
