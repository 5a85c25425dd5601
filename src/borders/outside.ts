/**
 * The border of zones with the land outside every zone: what is left of a boundary when the stretches shared with other
 * zones are taken away (METHODS section 10). A hole that no zone fills is land outside, too.
 */
import { type Boundaries, pointOfEdge } from './boundaries.js'
import { edgesNearby } from './edgeBoxes.js'
import { edgeLengthMetres } from './geodesy.js'
import { coincidence, localPlane } from './localPlane.js'
import { coincidentMetres, NEAR, type Nearness } from './nearness.js'
import { turnsTo } from './rings.js'
import type { SharedPath } from './sharedBorders.js'

/** A stretch of one treated zone's boundary. */
export interface OutsidePath {
  readonly treated: number
  readonly points: readonly (readonly [number, number])[]
}

/** From and to as positions on a ring: edges from its first, plus the fraction. */
type Interval = readonly [from: number, to: number]

/** Positions closer together than this are one. */
const samePosition = 1e-9

/**
 * The stretches of treated zones' boundaries beyond the tolerance of every other zone, each lengthened to where the
 * shared border on either side ends (`shared`: paths along these boundaries, without whiskers, with zones of any
 * status). Seams, where a zone's boundary runs along itself as at a cut at the antimeridian, are no border.
 */
export function outsidePaths(
  boundaries: Boundaries,
  nearness: Nearness,
  isTreated: Uint8Array,
  shared: readonly SharedPath[],
): OutsidePath[] {
  const { ringStart, zoneOfRing, ringOfEdge } = boundaries
  const covered = new Map<number, Interval[]>()
  for (const { steps } of shared) {
    const ring = ringOfEdge[steps[0].edge]
    const list = covered.get(ring) ?? []
    covered.set(ring, list)
    for (const { edge, from, to } of steps) {
      const first = edge - ringStart[ring]
      list.push([first + Math.min(from, to), first + Math.max(from, to)])
    }
  }
  const paths: OutsidePath[] = []
  for (let ring = 0; ring < zoneOfRing.length; ring++) {
    if (!isTreated[zoneOfRing[ring]]) continue
    const count = ringStart[ring + 1] - ringStart[ring]
    const taken = [...(covered.get(ring) ?? []), ...seamsOfRing(boundaries, ring)]
    const near = nearOfRing(boundaries, nearness, ring)
    for (const free of complement(taken, count)) {
      if (!isBeyondReach(boundaries, ring, free, near)) continue
      paths.push({ treated: zoneOfRing[ring], points: pointsOf(boundaries, ring, free) })
    }
  }
  return paths
}

/** What the intervals leave of a ring of `count` edges; the one over its start is a single interval that ends past `count`. */
function complement(intervals: readonly Interval[], count: number): Interval[] {
  const sorted = [...intervals].sort((a, b) => a[0] - b[0])
  const free: Interval[] = []
  let reached = 0
  for (const [from, to] of sorted) {
    if (from > reached + samePosition) free.push([reached, from])
    reached = Math.max(reached, to)
  }
  if (reached < count - samePosition) free.push([reached, count])
  if (free.length > 1 && free[0][0] === 0 && free[free.length - 1][1] === count) {
    const [, end] = free.shift() as Interval
    free[free.length - 1] = [free[free.length - 1][0], count + end]
  }
  return free
}

function nearOfRing({ ringStart }: Boundaries, nearness: Nearness, ring: number): Interval[] {
  const near: Interval[] = []
  for (let e = ringStart[ring]; e < ringStart[ring + 1]; e++) {
    for (let i = nearness.start[e]; i < nearness.start[e + 1]; i++) {
      const first = e - ringStart[ring]
      if (nearness.kind[i] === NEAR) near.push([first + nearness.from[i], first + nearness.to[i]])
    }
  }
  return near.sort((a, b) => a[0] - b[0])
}

/** Is more than a millimetre of the stretch beyond the tolerance of every other zone? */
function isBeyondReach(boundaries: Boundaries, ring: number, [from, to]: Interval, near: readonly Interval[]): boolean {
  const count = boundaries.ringStart[ring + 1] - boundaries.ringStart[ring]
  const turned = to > count ? near.map(([a, b]): Interval => [a + count, b + count]) : []
  let reached = from
  let metres = 0
  for (const [a, b] of [...near, ...turned, [to, to] as const]) {
    if (b < reached) continue
    if (a > reached) metres += lengthOf(boundaries, ring, [reached, Math.min(a, to)])
    if (metres > 0.001) return true
    reached = Math.max(reached, b)
    if (reached >= to) break
  }
  return false
}

function lengthOf(boundaries: Boundaries, ring: number, stretch: Interval): number {
  const points = pointsOf(boundaries, ring, stretch)
  return points.slice(1).reduce((sum, [lon, lat], i) => sum + edgeLengthMetres(points[i][0], points[i][1], lon, lat), 0)
}

/** Points of a stretch, from the ring's vertices; positions may run past the ring's end. */
function pointsOf({ edges, ringStart }: Boundaries, ring: number, [from, to]: Interval): [number, number][] {
  const [first, count] = [ringStart[ring], ringStart[ring + 1] - ringStart[ring]]
  const at = (edge: number, fraction: number) => pointOfEdge(edges, first + (edge % count), fraction)
  const points: [number, number][] = [at(Math.floor(from), from - Math.floor(from))]
  let edge = Math.floor(from)
  for (; edge + 1 < to - samePosition; edge++) points.push(at(edge, 1))
  points.push(at(edge, Math.min(1, to - edge)))
  return points
}

/** Stretches of a ring along another edge of its own zone, or at a pole. */
export function seamsOfRing({ edges, boxes, ringStart, zoneOfEdge }: Boundaries, ring: number): Interval[] {
  const { lon0, lat0, lon1, lat1 } = edges
  const seams: Interval[] = []
  const overlap = new Float64Array(2)
  for (let e = ringStart[ring]; e < ringStart[ring + 1]; e++) {
    const first = e - ringStart[ring]
    if (Math.abs(lat0[e]) === 90 && lat0[e] === lat1[e]) {
      seams.push([first, first + 1])
      continue
    }
    const plane = localPlane((lon0[e] + lon1[e]) / 2, (lat0[e] + lat1[e]) / 2)
    for (const f of edgesNearby(boxes, lon0[e], lat0[e], lon1[e], lat1[e], coincidentMetres)) {
      if (f === e || zoneOfEdge[f] !== zoneOfEdge[e]) continue
      const shift = turnsTo((lon0[f] + lon1[f]) / 2, plane.lon) - lon0[e]
      const way = coincidence(
        (lon1[e] - lon0[e]) * plane.metresPerLon,
        (lat1[e] - lat0[e]) * plane.metresPerLat,
        (lon0[f] + shift) * plane.metresPerLon,
        (lat0[f] - lat0[e]) * plane.metresPerLat,
        (lon1[f] + shift) * plane.metresPerLon,
        (lat1[f] - lat0[e]) * plane.metresPerLat,
        coincidentMetres,
        overlap,
      )
      if (way !== 0) seams.push([first + overlap[0], first + overlap[1]])
    }
  }
  return seams
}
