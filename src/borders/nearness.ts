/** Which stretches of every zone's boundary lie near, or along, the boundary of another zone (METHODS section 10). */
import { type Boundaries, pointOfEdge } from './boundaries.js'
import { edgesNearby, roomAround } from './edgeBoxes.js'
import { edgeLengthMetres } from './geodesy.js'
import { coincidence, footOnSegment, localPlane, withinOfSegment } from './localPlane.js'
import { turnsTo } from './rings.js'

/** Edges closer than this coincide. */
export const coincidentMetres = 0.001
/** The plane an edge is measured in reaches no farther than this. */
const planeMetres = 1000
/** Ends of stretches that lie closer together than this are one place. */
export const samePlaceMetres = 1e-6

/** Within the tolerance of the other zone. */
export const NEAR = 0
/** Coincident with its boundary, the two zones on opposite sides. */
export const EXACT = 1
/** Coincident with its boundary, the two zones on the same side: they overlap there, it is no border. */
export const SAME_SIDE = 2

/** Stretches of each edge; those of edge e are start[e] to start[e + 1], by zone, kind and place, disjoint within a kind. */
export interface Nearness {
  readonly start: Int32Array
  readonly zone: Int32Array
  readonly kind: Uint8Array
  /** Fractions of the edge. */
  readonly from: Float64Array
  readonly to: Float64Array
}

/** A stretch of one edge near, or along, another zone; `from` and `to` are fractions of the edge. */
export interface EdgeStretch {
  readonly zone: number
  readonly kind: number
  readonly from: number
  readonly to: number
}

/**
 * Measures every edge against the other zones' edges. Exact: along an edge the points within `metres` of a segment are
 * one interval, computed in closed form; where both are longer than 1 km, in planes of at most 1 km. Intervals are then
 * merged over the segments of a zone.
 */
export function measureNearness(boundaries: Boundaries, metres: number): Nearness {
  const count = boundaries.edges.lon0.length
  const start = new Int32Array(count + 1)
  const zone: number[] = []
  const kind: number[] = []
  const from: number[] = []
  const to: number[] = []
  for (let e = 0; e < count; e++) {
    for (const stretch of stretchesOfEdge(boundaries, e, metres)) {
      zone.push(stretch.zone)
      kind.push(stretch.kind)
      from.push(stretch.from)
      to.push(stretch.to)
    }
    start[e + 1] = zone.length
  }
  return {
    start,
    zone: Int32Array.from(zone),
    kind: Uint8Array.from(kind),
    from: Float64Array.from(from),
    to: Float64Array.from(to),
  }
}

/** The stretches of one edge near other zones, or near the wanted ones: by zone, kind and place, disjoint within a kind. */
export function stretchesOfEdge(
  boundaries: Boundaries,
  e: number,
  metres: number,
  isWanted: (zone: number) => boolean = () => true,
): EdgeStretch[] {
  const found: EdgeStretch[] = []
  const length = nearnessOfEdge(boundaries, e, metres, isWanted, found)
  return merged(found, samePlaceMetres / length)
}

/** Adds the stretches of one edge, unmerged, and returns the length of the edge. */
function nearnessOfEdge(
  boundaries: Boundaries,
  e: number,
  metres: number,
  isWanted: (zone: number) => boolean,
  found: EdgeStretch[],
): number {
  const { edges, boxes, zoneOfEdge } = boundaries
  const { lon0, lat0, lon1, lat1 } = edges
  const length = edgeLengthMetres(lon0[e], lat0[e], lon1[e], lat1[e])
  const room = roomAround(metres, lat0[e], lat1[e])
  for (const f of edgesNearby(boxes, lon0[e], lat0[e], lon1[e], lat1[e], metres)) {
    if (zoneOfEdge[f] === zoneOfEdge[e] || !isWanted(zoneOfEdge[f])) continue
    const shift = turnsTo((lon0[f] + lon1[f]) / 2, (lon0[e] + lon1[e]) / 2)
    const way = sameEdge(edges, e, f, shift)
    if (way !== 0) {
      found.push({ zone: zoneOfEdge[f], kind: NEAR, from: 0, to: 1 })
      found.push({ zone: zoneOfEdge[f], kind: sideOf(boundaries, e, f, way), from: 0, to: 1 })
      continue
    }
    const low = clip(lon0[e], lon1[e], lon0[f] + shift, lon1[f] + shift, room.lon, 0, 1)
    const [from, to] = clip(lat0[e], lat1[e], lat0[f], lat1[f], room.lat, low[0], low[1])
    if (!(from < to)) continue
    const parts = Math.max(1, Math.ceil(((to - from) * length) / planeMetres))
    for (let part = 0; part < parts; part++) {
      const t0 = part === 0 ? from : from + (part * (to - from)) / parts
      const t1 = part + 1 === parts ? to : from + ((part + 1) * (to - from)) / parts
      nearnessOfPart(boundaries, e, t0, t1, f, shift, metres, found)
    }
  }
  return length
}

/** Do the edges join the same two vertices? +1 where they run the same way, -1 against each other, else 0. */
function sameEdge({ lon0, lat0, lon1, lat1 }: Boundaries['edges'], e: number, f: number, shift: number): -1 | 0 | 1 {
  const [fLon0, fLon1] = [lon0[f] + shift, lon1[f] + shift]
  if (lon0[e] === fLon1 && lon1[e] === fLon0 && lat0[e] === lat1[f] && lat1[e] === lat0[f]) return -1
  if (lon0[e] === fLon0 && lon1[e] === fLon1 && lat0[e] === lat0[f] && lat1[e] === lat1[f]) return 1
  return 0
}

function sideOf({ ringOfEdge, insideOfRing }: Boundaries, e: number, f: number, way: -1 | 1): number {
  return way * insideOfRing[ringOfEdge[e]] * insideOfRing[ringOfEdge[f]] > 0 ? SAME_SIDE : EXACT
}

/** The part of [from, to] in which the value running from a0 to a1 is within `room` of the range from b0 to b1. */
function clip(a0: number, a1: number, b0: number, b1: number, room: number, from: number, to: number) {
  const [low, high] = b0 < b1 ? [b0 - room, b1 + room] : [b1 - room, b0 + room]
  if (a0 === a1) return a0 >= low && a0 <= high ? [from, to] : [1, 0]
  const [p, q] = [(low - a0) / (a1 - a0), (high - a0) / (a1 - a0)]
  return [Math.max(from, Math.min(p, q)), Math.min(to, Math.max(p, q))]
}

/** The part from t0 to t1 of an edge, no longer than its plane, against one segment. */
function nearnessOfPart(
  boundaries: Boundaries,
  e: number,
  t0: number,
  t1: number,
  f: number,
  shift: number,
  metres: number,
  found: EdgeStretch[],
): void {
  const { edges, zoneOfEdge } = boundaries
  const [lon0, lat0] = pointOfEdge(edges, e, t0)
  const [lon1, lat1] = pointOfEdge(edges, e, t1)
  const plane = localPlane((lon0 + lon1) / 2, (lat0 + lat1) / 2)
  const dx = (lon1 - lon0) * plane.metresPerLon
  const dy = (lat1 - lat0) * plane.metresPerLat
  const bx = (edges.lon0[f] + shift - lon0) * plane.metresPerLon
  const by = (edges.lat0[f] - lat0) * plane.metresPerLat
  const cx = (edges.lon1[f] + shift - lon0) * plane.metresPerLon
  const cy = (edges.lat1[f] - lat0) * plane.metresPerLat
  const interval = new Float64Array(2)
  const add = (kind: number) => {
    const from = t0 + interval[0] * (t1 - t0)
    const to = interval[1] === 1 ? t1 : t0 + interval[1] * (t1 - t0)
    found.push({ zone: zoneOfEdge[f], kind, from, to })
  }
  if (withinOfSegment(dx, dy, bx, by, cx, cy, metres, interval)) add(NEAR)
  const way = coincidence(dx, dy, bx, by, cx, cy, coincidentMetres, interval)
  if (way !== 0) add(sideOf(boundaries, e, f, way))
}

/** Sorted, with stretches of one zone and kind that touch or overlap made one, and ends at the edge's ends made exact. */
function merged(found: readonly EdgeStretch[], slack: number): EdgeStretch[] {
  const sorted = [...found].sort((a, b) => a.zone - b.zone || a.kind - b.kind || a.from - b.from || a.to - b.to)
  const result: EdgeStretch[] = []
  for (const { zone, kind, from: rawFrom, to: rawTo } of sorted) {
    const from = rawFrom < slack ? 0 : rawFrom
    const to = rawTo > 1 - slack ? 1 : rawTo
    const last = result[result.length - 1]
    if (last && last.zone === zone && last.kind === kind && from <= last.to + slack) {
      if (to > last.to) result[result.length - 1] = { zone, kind, from: last.from, to }
    } else result.push({ zone, kind, from, to })
  }
  return result
}

export interface ZoneFoot {
  readonly lon: number
  readonly lat: number
  readonly metres: number
  /** Of the boundaries, and where on it. */
  readonly edge: number
  readonly fraction: number
}

/** Nearest point of a zone's boundary to a place, or undefined where none is within `metres`. */
export function nearestOfZone(
  boundaries: Boundaries,
  zone: number,
  lon: number,
  lat: number,
  metres: number,
): ZoneFoot | undefined {
  const { edges, boxes, zoneOfEdge } = boundaries
  const plane = localPlane(lon, lat)
  const distance = new Float64Array(1)
  let best = { edge: -1, fraction: 0, metres: Infinity }
  for (const f of edgesNearby(boxes, lon, lat, lon, lat, metres)) {
    if (zoneOfEdge[f] !== zone) continue
    const shift = turnsTo((edges.lon0[f] + edges.lon1[f]) / 2, lon) - lon
    const fraction = footOnSegment(
      (edges.lon0[f] + shift) * plane.metresPerLon,
      (edges.lat0[f] - lat) * plane.metresPerLat,
      (edges.lon1[f] + shift) * plane.metresPerLon,
      (edges.lat1[f] - lat) * plane.metresPerLat,
      distance,
    )
    if (distance[0] < best.metres) best = { edge: f, fraction, metres: distance[0] }
  }
  if (!(best.metres <= metres)) return undefined
  const [footLon, footLat] = pointOfEdge(edges, best.edge, best.fraction)
  return { lon: footLon, lat: footLat, ...best }
}
