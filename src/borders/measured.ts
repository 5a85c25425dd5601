/** Measures units against the border, once: no rule about pieces or sides enters here (METHODS sections 1 and 10). */
import { type Border, isOwnZoneOnly } from './border.js'
import { edgeArrays, pointOfEdge, setEdge } from './boundaries.js'
import { edgeLengthMetres } from './geodesy.js'
import { buildSegmentTree, type Edges, type Nearest, nearestEdges } from './segmentTree.js'
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

/** A foot nearer than this to the end of an edge is at that end. */
const sameFootMetres = 1e-6

/**
 * Zone, nearest piece, foot and distance of every unit. Where pieces meet at the foot, one of the unit's own zone goes
 * first, then the first in order. With doses, and between zones of equal status, a unit in one zone is measured against
 * the borders of that zone alone.
 * lon, lat: degrees, NaN where missing. The answer for a unit does not depend on the others.
 * Throws RangeError where the lists differ in length.
 */
export function measureUnits(
  border: Border,
  lon: Float64Array,
  lat: Float64Array,
  progress?: (done: number) => void,
): Measured {
  const count = lon.length
  if (lat.length !== count) throw new RangeError(`lon has ${count} units, lat has ${lat.length}`)
  const zone = locateInZones(border.grid, lon, lat)
  if (border.outsideZone >= 0) giveOutside(zone, lon, lat, border.outsideZone)
  const nearest = isOwnZoneOnly(border)
    ? nearestOfOwnZone(border, lon, lat, zone, progress)
    : nearestEdges(border.tree, lon, lat, progress)
  const meetings = pieceMeetings(border)
  const nothing = () => new Float64Array(count).fill(Number.NaN)
  const measured = {
    zone,
    piece: new Int32Array(count),
    distanceMetres: nearest.distanceMetres,
    footLon: nothing(),
    footLat: nothing(),
    positionMetres: nothing(),
  }
  for (let i = 0; i < count; i++) {
    // the edge that the foot was measured on; the unit's own edge may be another one that meets it at the foot
    const edge = nearest.edge[i]
    if (edge < 0) {
      measured.piece[i] =
        Number.isNaN(lon[i]) || Number.isNaN(lat[i])
          ? positionMissing
          : isOnEarth(lon[i], lat[i])
            ? noBorderOfZone
            : positionOutOfRange
      continue
    }
    const own = ownEdge(border, meetings, edge, nearest.fraction[i], zone[i])
    const [footLon, footLat] = pointOfEdge(border.edges, edge, nearest.fraction[i])
    measured.piece[i] = border.pieceOfEdge[own]
    measured.footLon[i] = footLon
    measured.footLat[i] = footLat
    measured.positionMetres[i] =
      own === edge ? positionAlong(border, edge, nearest.fraction[i]) : positionOfEnd(border, own, footLon, footLat)
  }
  return measured
}

function isOnEarth(lon: number, lat: number): boolean {
  return Math.abs(lat) <= 90 && Math.abs(lon) < Infinity
}

/** Units in no zone are in the land outside. */
function giveOutside(zone: Int32Array, lon: Float64Array, lat: Float64Array, outsideZone: number): void {
  for (let i = 0; i < zone.length; i++) if (zone[i] === noZone && isOnEarth(lon[i], lat[i])) zone[i] = outsideZone
}

/** Nearest edges among those of each unit's own zone; of the whole border for units that are not in one zone. */
function nearestOfOwnZone(
  border: Border,
  lon: Float64Array,
  lat: Float64Array,
  zone: Int32Array,
  progress?: (done: number) => void,
): Nearest {
  const count = lon.length
  const nearest = {
    edge: new Int32Array(count).fill(-1),
    fraction: new Float64Array(count).fill(Number.NaN),
    distanceMetres: new Float64Array(count).fill(Number.NaN),
  }
  const groups = unitsByZone(zone, border.names.length)
  const edgesOfZone = edgesByZone(border)
  let done = 0
  groups.forEach((units, own) => {
    if (units.length === 0) return
    // the last group: units in no zone or in several
    const isNowhere = own === border.names.length
    const edges = isNowhere ? undefined : edgesOfZone[own]
    const tree = edges ? buildSegmentTree(pickedEdges(border.edges, edges)) : border.tree
    const found = nearestEdges(tree, picked(lon, units), picked(lat, units))
    for (let k = 0; k < units.length; k++) {
      if (found.edge[k] < 0) continue
      nearest.edge[units[k]] = edges ? edges[found.edge[k]] : found.edge[k]
      nearest.fraction[units[k]] = found.fraction[k]
      nearest.distanceMetres[units[k]] = found.distanceMetres[k]
    }
    done += units.length
    progress?.(done)
  })
  return nearest
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
export function edgesByZone({ names, pieceOfEdge, untreatedOfPiece, treatedOfPiece }: Border): Int32Array[] {
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

/** Edges that end where pieces meet: by 2·edge, plus 1 for its end, the first or last edges of the pieces there. */
type Meetings = ReadonlyMap<number, readonly number[]>

function pieceMeetings({ edges, pieceOfEdge }: Border): Meetings {
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
  return new Map(endsAt.map(([place, end]) => [end, edgesAt.get(place) as number[]]))
}

/** The edge whose piece the unit belongs to: the nearest, or where pieces meet at the foot, one of its own zone's. */
function ownEdge(border: Border, meetings: Meetings, edge: number, fraction: number, zone: number): number {
  const length = border.lengthMetres[edge]
  const isAtStart = fraction * length < sameFootMetres
  if (!isAtStart && (1 - fraction) * length >= sameFootMetres) return edge
  const meeting = meetings.get(2 * edge + (isAtStart ? 0 : 1))
  if (!meeting) return edge
  for (const candidate of meeting) {
    const piece = border.pieceOfEdge[candidate]
    if (border.untreatedOfPiece[piece] === zone || border.treatedOfPiece[piece] === zone) return candidate
  }
  return meeting[0]
}

/** Position along the pair's border at a fraction of an edge; short edges are uniform in it to a few centimetres. */
function positionAlong({ edges, positionMetres, lengthMetres }: Border, e: number, fraction: number): number {
  if (lengthMetres[e] < 1000 || fraction === 1) return positionMetres[e] + fraction * lengthMetres[e]
  const [lon, lat] = pointOfEdge(edges, e, fraction)
  return positionMetres[e] + edgeLengthMetres(edges.lon0[e], edges.lat0[e], lon, lat)
}

function positionOfEnd({ edges, positionMetres, lengthMetres }: Border, e: number, lon: number, lat: number): number {
  const fromStart = Math.abs(edges.lat0[e] - lat) + Math.abs(Math.sin((edges.lon0[e] - lon) * (Math.PI / 360)))
  const fromEnd = Math.abs(edges.lat1[e] - lat) + Math.abs(Math.sin((edges.lon1[e] - lon) * (Math.PI / 360)))
  return fromStart <= fromEnd ? positionMetres[e] : positionMetres[e] + lengthMetres[e]
}
