/** Measures units against the border, once: no rule about pieces or sides enters here (METHODS sections 1 and 10). */
import { equatorialMetres, flattening } from '../math/index.js'
import type { Border } from './border.js'
import { edgeArrays, pointOfEdge, setEdge } from './boundaries.js'
import { edgeLengthMetres } from './geodesy.js'
import { hilbertOrder } from './hilbert.js'
import { nearestInOrder, nearestRoom } from './nearest.js'
import { isOwnZoneOnly } from './ownZone.js'
import { buildSegmentTree, type Edges, type Nearest, type SegmentTree } from './segmentTree.js'
import { locateInZones, noZone } from './zoneGrid.js'

/** `piece` of a unit without a position. */
export const positionMissing = -1
/** `piece` of a unit whose coordinates are no place on earth. */
export const positionOutOfRange = -2
/** `piece` of a unit whose own zone has no border, where units serve their own zone's borders alone (`isOwnZoneOnly`). */
export const noBorderOfZone = -3

/** One element per unit. */
export interface Measured {
  /** Index into the border's `names` of the zone on the map; -1 in no zone, -2 in more than one. */
  readonly zone: Int32Array
  /** The nearest piece, or one of the negative codes of this file, with NaN in what follows. */
  readonly piece: Int32Array
  /** Geodesic metres to the foot, the nearest point of the border. */
  readonly distanceMetres: Float64Array
  readonly footLon: Float64Array
  readonly footLat: Float64Array
  /** Of the foot, along its pair's border. */
  readonly positionMetres: Float64Array
}

/** What units are measured by: numbers, texts and typed arrays alone, so that it can be sent to another thread. */
export type MeasuredBorder = Pick<
  Border,
  | 'names'
  | 'outsideZone'
  | 'doses'
  | 'isEqualStatus'
  | 'edges'
  | 'tree'
  | 'grid'
  | 'pieceOfEdge'
  | 'untreatedOfPiece'
  | 'treatedOfPiece'
  | 'positionMetres'
  | 'lengthMetres'
>

const eccentricitySquared = flattening * (2 - flattening)
const radiansPerDegree = Math.PI / 180

/** A foot nearer than this to the end of an edge is at that end. */
const sameFootMetres = 1e-6
/** Units in work at a time: room for them stays small, and they lie close together along the curve. */
const chunkUnits = 262_144

/**
 * Zone, nearest piece, foot and distance of every unit. Where pieces meet at the foot, one of the unit's own zone goes
 * first, then the first in order. With doses, and between zones of equal status, a unit in one zone is measured against
 * the borders of that zone alone.
 * lon, lat: degrees, NaN where missing. The answer for a unit does not depend on the others.
 * The answers take 40 bytes a unit; while they are worked out, another 30 MB.
 * Throws RangeError where the lists differ in length.
 */
export function measureUnits(
  border: MeasuredBorder,
  lon: Float64Array,
  lat: Float64Array,
  progress?: (done: number) => void,
): Measured {
  const count = lon.length
  if (lat.length !== count) throw new RangeError(`lon has ${count} units, lat has ${lat.length}`)
  const measured = roomFor(count)
  const measure = unitMeasurer(border)
  for (let from = 0; from < count; from += chunkUnits) {
    const to = Math.min(count, from + chunkUnits)
    putMeasured(measured, from, measure(lon.subarray(from, to), lat.subarray(from, to)))
    progress?.(to)
  }
  return measured
}

/** Room for the answers of `count` units. */
function roomFor(count: number): Measured {
  return {
    zone: new Int32Array(count),
    piece: new Int32Array(count),
    distanceMetres: new Float64Array(count),
    footLon: new Float64Array(count),
    footLat: new Float64Array(count),
    positionMetres: new Float64Array(count),
  }
}

/** Puts the answers of a part of the units in their place, from unit `first` on. */
export function putMeasured(whole: Measured, first: number, part: Measured): void {
  whole.zone.set(part.zone, first)
  whole.piece.set(part.piece, first)
  whole.distanceMetres.set(part.distanceMetres, first)
  whole.footLon.set(part.footLon, first)
  whole.footLat.set(part.footLat, first)
  whole.positionMetres.set(part.positionMetres, first)
}

/**
 * Measures any units against the border, part after part: what is made of the border for it is made once.
 * The units of a part are worked through along a Hilbert curve, so that neighbours meet the same edges and cells.
 */
export function unitMeasurer(border: MeasuredBorder): (lon: Float64Array, lat: Float64Array) => Measured {
  const meetings = pieceMeetings(border)
  const nearestOf = isOwnZoneOnly(border) ? ownZoneSearch(border) : undefined
  return (lon, lat) => {
    const order = hilbertOrder(lon, lat)
    const x = picked(lon, order)
    const y = picked(lat, order)
    const zone = locateInZones(border.grid, x, y)
    if (border.outsideZone >= 0) giveOutside(zone, x, y, border.outsideZone)
    const nearest = nearestOf ? nearestOf(x, y, zone) : nearestInOrder(border.tree, x, y)
    const measured = roomFor(order.length)
    for (let k = 0; k < order.length; k++) {
      const i = order[k]
      measured.zone[i] = zone[k]
      measured.distanceMetres[i] = nearest.distanceMetres[k]
      // the edge that the foot was measured on; the unit's own edge may be another one that meets it at the foot
      const edge = nearest.edge[k]
      if (edge < 0) {
        measured.piece[i] = reasonWithout(x[k], y[k])
        measured.footLon[i] = Number.NaN
        measured.footLat[i] = Number.NaN
        measured.positionMetres[i] = Number.NaN
        continue
      }
      const fraction = nearest.fraction[k]
      const own = ownEdge(border, meetings, edge, fraction, zone[k])
      const [footLon, footLat] = pointOfEdge(border.edges, edge, fraction)
      measured.piece[i] = border.pieceOfEdge[own]
      measured.footLon[i] = footLon
      measured.footLat[i] = footLat
      measured.positionMetres[i] =
        own === edge ? positionAlong(border, edge, fraction) : positionOfEnd(border, own, footLon, footLat)
    }
    return measured
  }
}

/** Why a unit has no nearest edge: a code of `piece`. */
export function reasonWithout(lon: number, lat: number): number {
  if (Number.isNaN(lon) || Number.isNaN(lat)) return positionMissing
  return isOnEarth(lon, lat) ? noBorderOfZone : positionOutOfRange
}

function isOnEarth(lon: number, lat: number): boolean {
  return Math.abs(lat) <= 90 && Math.abs(lon) < Infinity
}

/** Units in no zone are in the land outside. */
function giveOutside(zone: Int32Array, lon: Float64Array, lat: Float64Array, outsideZone: number): void {
  for (let i = 0; i < zone.length; i++) if (zone[i] === noZone && isOnEarth(lon[i], lat[i])) zone[i] = outsideZone
}

/**
 * Nearest edges among those of each unit's own zone; of the whole border for units that are not in one zone.
 * The search tree of a zone is built when a unit first asks for it.
 */
function ownZoneSearch(border: MeasuredBorder): (lon: Float64Array, lat: Float64Array, zone: Int32Array) => Nearest {
  const edgesOfZone = edgesByZone(border)
  const treeOfZone: SegmentTree[] = []
  return (lon, lat, zone) => {
    const nearest = nearestRoom(lon.length)
    unitsByZone(zone, border.names.length).forEach((units, own) => {
      if (units.length === 0) return
      // the last group: units in no zone or in several
      const edges = own === border.names.length ? undefined : edgesOfZone[own]
      if (edges) treeOfZone[own] ??= buildSegmentTree(pickedEdges(border.edges, edges))
      const found = nearestInOrder(edges ? treeOfZone[own] : border.tree, picked(lon, units), picked(lat, units))
      for (let k = 0; k < units.length; k++) {
        if (found.edge[k] < 0) continue
        nearest.edge[units[k]] = edges ? edges[found.edge[k]] : found.edge[k]
        nearest.fraction[units[k]] = found.fraction[k]
        nearest.distanceMetres[units[k]] = found.distanceMetres[k]
      }
    })
    return nearest
  }
}

/** Rows of each zone, and in a last group those of no single zone. */
function unitsByZone(zone: Int32Array, zones: number): Int32Array[] {
  const sizes = new Int32Array(zones + 1)
  for (let i = 0; i < zone.length; i++) sizes[zone[i] < 0 ? zones : zone[i]]++
  const groups = Array.from(sizes, (size) => new Int32Array(size))
  const filled = new Int32Array(zones + 1)
  for (let i = 0; i < zone.length; i++) {
    const group = zone[i] < 0 ? zones : zone[i]
    groups[group][filled[group]++] = i
  }
  return groups
}

/** Indices of the border's edges on either side of which each zone lies, ascending. */
export function edgesByZone({ names, pieceOfEdge, untreatedOfPiece, treatedOfPiece }: MeasuredBorder): Int32Array[] {
  const lists = names.map((): number[] => [])
  for (let e = 0; e < pieceOfEdge.length; e++) {
    lists[untreatedOfPiece[pieceOfEdge[e]]].push(e)
    lists[treatedOfPiece[pieceOfEdge[e]]].push(e)
  }
  return lists.map((list) => Int32Array.from(list))
}

export function pickedEdges(edges: Edges, wanted: ArrayLike<number>): Edges {
  const few = edgeArrays(wanted.length)
  for (let i = 0; i < wanted.length; i++) {
    const e = wanted[i]
    setEdge(few, i, edges.lon0[e], edges.lat0[e], edges.lon1[e], edges.lat1[e])
  }
  return few
}

export function picked(values: Float64Array, rows: ArrayLike<number>): Float64Array {
  const few = new Float64Array(rows.length)
  for (let i = 0; i < rows.length; i++) few[i] = values[rows[i]]
  return few
}

/** Where pieces meet. */
interface Meetings {
  /** By 2·edge, plus 1 for its end: 1 where a piece ends there. */
  readonly isAt: Uint8Array
  /** By the same number, the first or last edges of the pieces that meet there. */
  readonly edges: ReadonlyMap<number, readonly number[]>
}

function pieceMeetings({ edges, pieceOfEdge }: MeasuredBorder): Meetings {
  const edgesAt = new Map<string, number[]>()
  const endsAt: [string, number][] = []
  const add = (lon: number, lat: number, edge: number, isEnd: 0 | 1) => {
    const place = `${(lon + 540) % 360} ${lat}`
    const list = edgesAt.get(place)
    if (list) list.push(edge)
    else edgesAt.set(place, [edge])
    endsAt.push([place, 2 * edge + isEnd])
  }
  for (let e = 0; e < pieceOfEdge.length; e++) {
    if (pieceOfEdge[e] !== pieceOfEdge[e - 1]) add(edges.lon0[e], edges.lat0[e], e, 0)
    if (pieceOfEdge[e] !== pieceOfEdge[e + 1]) add(edges.lon1[e], edges.lat1[e], e, 1)
  }
  const isAt = new Uint8Array(2 * pieceOfEdge.length)
  for (const [, end] of endsAt) isAt[end] = 1
  return { isAt, edges: new Map(endsAt.map(([place, end]) => [end, edgesAt.get(place) as number[]])) }
}

/** The edge whose piece the unit belongs to: the nearest, or where pieces meet at the foot, one of its own zone's. */
function ownEdge(border: MeasuredBorder, meetings: Meetings, edge: number, fraction: number, zone: number): number {
  const length = border.lengthMetres[edge]
  const isAtStart = fraction * length < sameFootMetres
  if (!isAtStart && (1 - fraction) * length >= sameFootMetres) return edge
  const end = 2 * edge + (isAtStart ? 0 : 1)
  if (meetings.isAt[end] === 0) return edge
  const meeting = meetings.edges.get(end) as readonly number[]
  for (const candidate of meeting) {
    const piece = border.pieceOfEdge[candidate]
    if (border.untreatedOfPiece[piece] === zone || border.treatedOfPiece[piece] === zone) return candidate
  }
  return meeting[0]
}

/** Edges shorter than this are uniform in their fraction to a few centimetres. */
const uniformMetres = 1000
/** Up to this length, and this latitude, three places of an edge give its length to 1e-8 m. */
const mildMetres = 20_000
const mildLatitude = 80

/** Position along the pair's border at a fraction of an edge. */
function positionAlong(border: MeasuredBorder, e: number, fraction: number): number {
  const { edges, positionMetres, lengthMetres } = border
  if (lengthMetres[e] < uniformMetres || fraction === 1) return positionMetres[e] + fraction * lengthMetres[e]
  if (lengthMetres[e] < mildMetres && Math.abs(edges.lat0[e]) < mildLatitude)
    return positionMetres[e] + mildMetresTo(edges, e, fraction)
  const [lon, lat] = pointOfEdge(edges, e, fraction)
  return positionMetres[e] + edgeLengthMetres(edges.lon0[e], edges.lat0[e], lon, lat)
}

/** Ground length of an edge up to a fraction of it. Gauss and Legendre's three points: Abramowitz & Stegun (1964), table 25.4. */
function mildMetresTo({ lon0, lat0, lon1, lat1 }: Edges, e: number, fraction: number): number {
  const north = (lat1[e] - lat0[e]) * fraction
  const east = (lon1[e] - lon0[e]) * fraction
  const middle = lat0[e] + north / 2
  const off = (north / 2) * 0.7745966692414834
  const sides = groundMetres(middle - off, north, east) + groundMetres(middle + off, north, east)
  return (8 * groundMetres(middle, north, east) + 5 * sides) / 18
}

/** Length of a short step of so many degrees, as the ground is at a latitude. */
function groundMetres(latDegrees: number, northDegrees: number, eastDegrees: number): number {
  const lat = latDegrees * radiansPerDegree
  const sine = Math.sin(lat)
  const w2 = 1 - eccentricitySquared * sine * sine
  const north = ((1 - eccentricitySquared) / w2) * northDegrees
  const east = Math.cos(lat) * eastDegrees
  return ((equatorialMetres * radiansPerDegree) / Math.sqrt(w2)) * Math.sqrt(north * north + east * east)
}

function positionOfEnd(
  { edges, positionMetres, lengthMetres }: MeasuredBorder,
  e: number,
  lon: number,
  lat: number,
): number {
  const fromStart = Math.abs(edges.lat0[e] - lat) + Math.abs(Math.sin((edges.lon0[e] - lon) * (Math.PI / 360)))
  const fromEnd = Math.abs(edges.lat1[e] - lat) + Math.abs(Math.sin((edges.lon1[e] - lon) * (Math.PI / 360)))
  return fromStart <= fromEnd ? positionMetres[e] : positionMetres[e] + lengthMetres[e]
}
