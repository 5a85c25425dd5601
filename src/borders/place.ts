/** Places units at a signed distance from the border (METHODS sections 1 and 10). */
import type { Line, Placement } from '../placement.js'
import type { Border } from './border.js'
import { pointOfEdge } from './boundaries.js'
import { edgeLengthMetres } from './geodesy.js'
import { nearestEdges } from './segmentTree.js'
import { locateInZones, manyZones, noZone } from './zoneGrid.js'

/** Where each unit given stands on the ground; one element per unit. */
export interface Ground {
  /** Index of its zone; -1 in no zone, in more than one, or without a position. */
  readonly zone: Int32Array
  /** Index of its piece; -1 where the unit was not placed, as all that follows is NaN. */
  readonly piece: Int32Array
  readonly footLon: Float64Array
  readonly footLat: Float64Array
  /** Of the foot, along its pair's border. */
  readonly positionMetres: Float64Array
}

export interface BorderPlacement {
  /** Lines are the pieces not set aside; the unit is its row, from 0. */
  readonly placement: Placement
  readonly ground: Ground
  /** Units not placed, by reason. */
  readonly setAside: Map<string, number>
}

export interface PlaceOptions {
  /** Metres in one unit of the study's length. */
  readonly metresPerUnit: number
  /** Units farther from the border are set aside; absent: none. */
  readonly reachMetres?: number
}

/** A unit nearer to the border than this is on it, and on neither side. */
const onBorderMetres = 0.001
/** A foot nearer than this to the end of an edge is at that end. */
const sameFootMetres = 1e-6

/**
 * Each unit gets one entry, or one reason: its side from the zone it stands in (never from the nearest segment),
 * its line from the nearest piece. Where two pieces meet at the foot, a piece of the unit's own zone goes first, then
 * the first in order. lon, lat: degrees, one pair per unit, NaN where missing. x is in the study's unit, positive where
 * treated. Throws RangeError where the lists differ in length or metresPerUnit is not positive.
 */
export function placeOnBorder(
  border: Border,
  lon: Float64Array,
  lat: Float64Array,
  options: PlaceOptions,
  progress?: (done: number) => void,
): BorderPlacement {
  const { metresPerUnit, reachMetres = Infinity } = options
  const count = lon.length
  if (lat.length !== count) throw new RangeError(`lon has ${count} units, lat has ${lat.length}`)
  if (!(metresPerUnit > 0)) throw new RangeError(`metresPerUnit must be above 0: got ${metresPerUnit}`)
  if (!(reachMetres > 0)) throw new RangeError(`reachMetres must be above 0: got ${reachMetres}`)
  const located = locateInZones(border.grid, lon, lat)
  const nearest = nearestEdges(border.tree, lon, lat, progress)
  const meetings = pieceMeetings(border)
  const { lineOfPiece, lines } = keptLines(border)
  const ground = emptyGround(located)
  const setAside = new Map<string, number>()
  const entry = { unit: new Int32Array(count), line: new Int32Array(count), x: new Float64Array(count) }
  const treated = new Uint8Array(count)
  let placed = 0
  for (let i = 0; i < count; i++) {
    const metres = nearest.distanceMetres[i]
    const edge = Number.isNaN(metres) ? -1 : ownEdge(border, meetings, nearest.edge[i], nearest.fraction[i], located[i])
    const reason = whyNot(border, lon[i], lat[i], located[i], metres, edge, reachMetres)
    if (reason !== undefined) {
      setAside.set(reason, (setAside.get(reason) ?? 0) + 1)
      continue
    }
    const piece = border.pieceOfEdge[edge]
    // the edge that the foot was measured on; `edge` meets it at the foot
    const measured = nearest.edge[i]
    const [footLon, footLat] = pointOfEdge(border.edges, measured, nearest.fraction[i])
    ground.piece[i] = piece
    ground.footLon[i] = footLon
    ground.footLat[i] = footLat
    ground.positionMetres[i] =
      edge === measured
        ? positionAlong(border, edge, nearest.fraction[i])
        : positionOfEnd(border, edge, footLon, footLat)
    entry.unit[placed] = i
    entry.line[placed] = lineOfPiece[piece]
    treated[placed] = border.treatedZone[located[i]]
    entry.x[placed] = ((treated[placed] ? 1 : -1) * metres) / metresPerUnit
    placed++
  }
  const placement = {
    lines,
    unit: entry.unit.slice(0, placed),
    line: entry.line.slice(0, placed),
    x: entry.x.slice(0, placed),
    treated: treated.slice(0, placed),
  }
  return { placement, ground, setAside }
}

/** Why a unit is not placed, or undefined. */
function whyNot(
  border: Border,
  lon: number,
  lat: number,
  zone: number,
  metres: number,
  edge: number,
  reachMetres: number,
): string | undefined {
  if (Number.isNaN(lon) || Number.isNaN(lat)) return 'position missing'
  if (edge < 0) return 'position out of range'
  if (metres < onBorderMetres) return 'exactly on the border'
  if (zone === noZone) return 'in no zone'
  if (zone === manyZones) return 'in more than one zone'
  if (border.pieces[border.pieceOfEdge[edge]].setAside !== undefined) return 'nearest piece set aside: barrier'
  return metres > reachMetres ? 'beyond reach' : undefined
}

/** Zone where it is one zone; everything else not known yet. */
function emptyGround(located: Int32Array): Ground {
  const nothing = () => new Float64Array(located.length).fill(Number.NaN)
  return {
    zone: located.map((zone) => (zone >= 0 ? zone : -1)),
    piece: new Int32Array(located.length).fill(-1),
    footLon: nothing(),
    footLat: nothing(),
    positionMetres: nothing(),
  }
}

function keptLines(border: Border): { lineOfPiece: Int32Array; lines: Line[] } {
  const lineOfPiece = new Int32Array(border.pieces.length).fill(-1)
  const lines: Line[] = []
  border.pieces.forEach(({ label, zones, piece, lengthMetres, setAside }, p) => {
    if (setAside !== undefined) return
    lineOfPiece[p] = lines.length
    lines.push({ id: label, label, zones, piece, lengthMetres })
  })
  return { lineOfPiece, lines }
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
  const name = zone >= 0 ? border.zones.names[zone] : undefined
  for (const candidate of meeting) {
    const [untreated, treated] = border.pieces[border.pieceOfEdge[candidate]].zones
    if (untreated === name || treated === name) return candidate
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
