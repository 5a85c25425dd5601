/** How a place lies to another zone: how far from its edge, inside it or outside, and does that edge face ours? */
import { type Boundaries, pointOfEdge } from './boundaries.js'
import { edgesNearby } from './edgeBoxes.js'
import { edgeLengthMetres } from './geodesy.js'
import { footOnSegment, type LocalPlane, localPlane } from './localPlane.js'
import { coincidentMetres, nearestOfZone, samePlaceMetres, type ZoneFoot } from './nearness.js'
import { turnsTo } from './rings.js'

/** A nearest point of a zone's boundary. */
export interface SignedFoot extends ZoneFoot {
  /** Metres to it: positive outside the zone, negative inside, 0 within a millimetre. */
  readonly signedMetres: number
}

/** Two edges face each other where the way between them leaves ours at most this far from square to it. */
const facingCosine = Math.SQRT1_2

/** [longitude, latitude] in degrees of the two ends of a straight edge or of a part of one. */
export type Segment = readonly [lon0: number, lat0: number, lon1: number, lat1: number]

/**
 * Nearest point of a zone's boundary no farther than `metres`, signed. The sign is that of the edge at the foot, at a
 * vertex that of the sum of both edges' normals. Source: Bærentzen & Aanæs (2005), Signed distance computation using
 * the angle weighted pseudonormal (in a plane the angles are equal).
 */
export function signedFoot(
  boundaries: Boundaries,
  zone: number,
  lon: number,
  lat: number,
  metres: number,
): SignedFoot | undefined {
  const foot = nearestOfZone(boundaries, zone, lon, lat, metres)
  if (!foot) return undefined
  if (foot.metres <= coincidentMetres) return { ...foot, signedMetres: 0 }
  const plane = localPlane(lon, lat)
  const [x, y] = wayTo(plane, foot.lon, foot.lat)
  let [normalX, normalY] = outwardNormal(boundaries, plane, foot.edge)
  if (foot.fraction === 0 || foot.fraction === 1) {
    const [otherX, otherY] = outwardNormal(boundaries, plane, neighbourEdge(boundaries, foot.edge, foot.fraction))
    normalX += otherX
    normalY += otherY
  }
  const isInside = x * normalX + y * normalY > 0
  return { ...foot, signedMetres: isInside ? -foot.metres : foot.metres }
}

/** Metres east and north to a place, the short way round. */
function wayTo(plane: LocalPlane, lon: number, lat: number): [number, number] {
  const shift = turnsTo(lon, plane.lon)
  return [(lon + shift - plane.lon) * plane.metresPerLon, (lat - plane.lat) * plane.metresPerLat]
}

/** Unit normal of an edge, out of its zone. */
function outwardNormal({ edges, ringOfEdge, insideOfRing }: Boundaries, plane: LocalPlane, e: number) {
  const x = (edges.lon1[e] - edges.lon0[e]) * plane.metresPerLon
  const y = (edges.lat1[e] - edges.lat0[e]) * plane.metresPerLat
  const scale = insideOfRing[ringOfEdge[e]] / (Math.hypot(x, y) || 1)
  return [y * scale, -x * scale]
}

/** The edge of the same ring that meets the edge at its start (0) or its end (1). */
export function neighbourEdge({ ringOfEdge, ringStart }: Boundaries, e: number, end: number): number {
  const [first, last] = [ringStart[ringOfEdge[e]], ringStart[ringOfEdge[e] + 1] - 1]
  if (end === 0) return e === first ? last : e - 1
  return e === last ? first : e + 1
}

/**
 * The nearest point of a zone's boundary to a place of the edge e where it lies over against the edge, across a gap or in
 * an overlap: no farther than `metres`, and within 45 degrees of square to the edge; or, in an overlap, where its edge
 * lies square to ours behind a nearer one at the overlap's end. Else undefined.
 */
export function squareFoot(
  boundaries: Boundaries,
  e: number,
  fraction: number,
  zone: number,
  metres: number,
): SignedFoot | undefined {
  const [lon, lat] = pointOfEdge(boundaries.edges, e, fraction)
  const foot = signedFoot(boundaries, zone, lon, lat, metres)
  if (!foot || foot.signedMetres === 0) return foot
  const plane = localPlane(lon, lat)
  const [x, y] = wayTo(plane, foot.lon, foot.lat)
  const [normalX, normalY] = outwardNormal(boundaries, plane, e)
  const outward = (x * normalX + y * normalY) / Math.hypot(x, y)
  if (outward * Math.sign(foot.signedMetres) >= facingCosine) return foot
  const isOverAgainst = foot.signedMetres < 0 && crosses(boundaries, zone, plane, -normalX * metres, -normalY * metres)
  return isOverAgainst ? foot : undefined
}

/** Does a zone's boundary cross the way from the plane's place to (x, y)? */
function crosses({ edges, boxes, zoneOfEdge }: Boundaries, zone: number, plane: LocalPlane, x: number, y: number) {
  const [lon, lat] = [plane.lon + x / plane.metresPerLon, plane.lat + y / plane.metresPerLat]
  return edgesNearby(boxes, plane.lon, plane.lat, lon, lat, 0).some(
    (f) => zoneOfEdge[f] === zone && crossingOf(plane, x, y, edges, f) !== undefined,
  )
}

/** The same, where nothing lies between. */
export function facingFoot(
  boundaries: Boundaries,
  e: number,
  fraction: number,
  zone: number,
  metres: number,
): SignedFoot | undefined {
  const foot = squareFoot(boundaries, e, fraction, zone, metres)
  if (!foot || foot.signedMetres === 0) return foot
  const plane = localPlane(...pointOfEdge(boundaries.edges, e, fraction))
  const [x, y] = wayTo(plane, foot.lon, foot.lat)
  return isOpenWay(boundaries, plane, x, y, [boundaries.zoneOfEdge[e], zone]) ? foot : undefined
}

/**
 * Does no edge cross the way from the plane's place to (x, y), and no third zone lie there that has its edges along both
 * of ours?
 */
function isOpenWay(boundaries: Boundaries, plane: LocalPlane, x: number, y: number, zones: readonly number[]): boolean {
  const { edges, boxes, zoneOfEdge } = boundaries
  const [lon, lat] = [plane.lon + x / plane.metresPerLon, plane.lat + y / plane.metresPerLat]
  const thirds = new Set<number>()
  for (const f of edgesNearby(boxes, plane.lon, plane.lat, lon, lat, coincidentMetres)) {
    const crossing = crossingOf(plane, x, y, edges, f)
    if (crossing !== undefined && crossing > 1e-6 && crossing < 1 - 1e-6) return false
    if (!zones.includes(zoneOfEdge[f])) thirds.add(zoneOfEdge[f])
  }
  const isInside = (zone: number) => {
    const foot = signedFoot(
      boundaries,
      zone,
      plane.lon + (lon - plane.lon) / 2,
      (plane.lat + lat) / 2,
      Math.hypot(x, y),
    )
    return foot !== undefined && foot.signedMetres < 0
  }
  return ![...thirds].some(isInside)
}

/** Fraction of the way from the plane's place to (x, y) at which the edge f crosses it. */
function crossingOf(
  plane: LocalPlane,
  x: number,
  y: number,
  edges: Boundaries['edges'],
  f: number,
): number | undefined {
  const shift = turnsTo((edges.lon0[f] + edges.lon1[f]) / 2, plane.lon) - plane.lon
  const bx = (edges.lon0[f] + shift) * plane.metresPerLon
  const by = (edges.lat0[f] - plane.lat) * plane.metresPerLat
  const ux = (edges.lon1[f] + shift) * plane.metresPerLon - bx
  const uy = (edges.lat1[f] - plane.lat) * plane.metresPerLat - by
  const denominator = x * uy - y * ux
  if (denominator === 0) return undefined
  const own = (bx * uy - by * ux) / denominator
  const other = (bx * y - by * x) / denominator
  return own >= 0 && own <= 1 && other >= 0 && other <= 1 ? own : undefined
}

/**
 * Fractions of a segment, ascending from 0 to 1, between which the distance to a zone's boundary has no bend: where the
 * zone's vertices lie over against it, no farther than `metres`, and where the two cross. The plane is that of the
 * segment's middle; fractions closer together than a micrometre are one.
 */
export function bendsAlong(boundaries: Boundaries, segment: Segment, zone: number, metres: number): number[] {
  const [lon0, lat0, lon1, lat1] = segment
  const { edges, boxes, zoneOfEdge } = boundaries
  const plane = { ...localPlane((lon0 + lon1) / 2, (lat0 + lat1) / 2), lon: lon0, lat: lat0 }
  const [x, y] = [(lon1 - lon0) * plane.metresPerLon, (lat1 - lat0) * plane.metresPerLat]
  const length = Math.hypot(x, y)
  if (!(length > 0)) return [0, 1]
  const found: number[] = []
  const off = new Float64Array(1)
  for (const f of edgesNearby(boxes, lon0, lat0, lon1, lat1, metres)) {
    if (zoneOfEdge[f] !== zone) continue
    const crossing = crossingOf(plane, x, y, edges, f)
    if (crossing !== undefined) found.push(crossing)
    const ends = [wayTo(plane, edges.lon0[f], edges.lat0[f]), wayTo(plane, edges.lon1[f], edges.lat1[f])]
    for (const [bx, by] of ends) {
      const fraction = footOnSegment(-bx, -by, x - bx, y - by, off)
      if (off[0] <= metres) found.push(fraction)
    }
  }
  const slack = samePlaceMetres / length
  const bends = [0]
  for (const fraction of found.sort((a, b) => a - b)) {
    if (fraction - bends[bends.length - 1] > slack && fraction < 1 - slack) bends.push(fraction)
  }
  return [...bends, 1]
}

/** A part of an edge. */
export function segmentOf({ edges }: Boundaries, e: number, from: number, to: number): Segment {
  const [lon0, lat0] = pointOfEdge(edges, e, from)
  const [lon1, lat1] = pointOfEdge(edges, e, to)
  return [lon0, lat0, lon1, lat1]
}

/** Ground length of a part of an edge. */
export function partMetres(boundaries: Boundaries, e: number, from: number, to: number): number {
  return edgeLengthMetres(...segmentOf(boundaries, e, from, to))
}
