/** What else is near a unit's foot: the nearest corner, and the border of another pair of zones that lost. */
import type { Border } from './border.js'
import { edgeArrays, setEdge } from './boundaries.js'
import { edgesByZone, type Measured, picked, pickedEdges } from './measured.js'
import { isOwnZoneOnly } from './ownZone.js'
import { buildSegmentTree, nearestEdges } from './segmentTree.js'

/** Metres from each unit's foot to the nearest corner; Infinity where the border has none, NaN without a foot. */
export function metresToCorner(border: Border, measured: Measured): Float64Array {
  const { corners } = border
  if (corners.length === 0)
    return measured.footLon.map((lon) => (Number.isNaN(lon) ? Number.NaN : Number.POSITIVE_INFINITY))
  const points = edgeArrays(corners.length)
  corners.forEach(({ lon, lat }, e) => {
    setEdge(points, e, lon, lat, lon, lat)
  })
  return nearestEdges(buildSegmentTree(points), measured.footLon, measured.footLat).distanceMetres
}

/** One element for each of the units asked for. */
export interface RunnerUps {
  /** The nearest piece of another pair of zones than that of the unit's own piece; -1 where there is none. */
  readonly piece: Int32Array
  /** Geodesic metres to it; NaN where there is none. */
  readonly distanceMetres: Float64Array
}

/** Distances closer together than this are equal, and the first piece in order goes first. */
const tieMetres = 1e-8

/**
 * Exact: each pair gets a number, and the borders of all other pairs are those whose number differs in some binary
 * digit: one search tree for each digit and value, as many searches per unit as digits. Where units serve their own
 * zone alone, among the borders of that zone. `units`: rows, absent: all. lon, lat: of all units, as they were measured.
 */
export function runnerUps(
  border: Border,
  measured: Measured,
  lon: Float64Array,
  lat: Float64Array,
  units: Int32Array = Int32Array.from(lon, (_, i) => i),
): RunnerUps {
  const best = {
    piece: new Int32Array(units.length).fill(-1),
    distanceMetres: new Float64Array(units.length).fill(Number.NaN),
  }
  const pairOfPiece = pairsOf(border)
  const asked = units.map((_, k) => k).filter((k) => measured.piece[units[k]] >= 0)
  if (!isOwnZoneOnly(border)) {
    const all = border.pieceOfEdge.map((_, e) => e)
    searchOtherPairs(border, measured, pairOfPiece, lon, lat, units, asked, all, best)
    return best
  }
  const edgesOfZone = edgesByZone(border)
  const askedOfZone = new Map<number, number[]>()
  for (const k of asked) {
    const zone = measured.zone[units[k]]
    const list = askedOfZone.get(zone)
    if (list) list.push(k)
    else askedOfZone.set(zone, [k])
  }
  for (const [zone, own] of askedOfZone) {
    const edges = zone < 0 ? border.pieceOfEdge.map((_, e) => e) : edgesOfZone[zone]
    searchOtherPairs(border, measured, pairOfPiece, lon, lat, units, Int32Array.from(own), edges, best)
  }
  return best
}

/** Number of the pair of each piece; the pieces of a pair stand together. */
function pairsOf({ untreatedOfPiece, treatedOfPiece }: Border): Int32Array {
  const pairs = new Int32Array(untreatedOfPiece.length)
  for (let p = 1; p < pairs.length; p++) {
    const isSame = untreatedOfPiece[p] === untreatedOfPiece[p - 1] && treatedOfPiece[p] === treatedOfPiece[p - 1]
    pairs[p] = pairs[p - 1] + (isSame ? 0 : 1)
  }
  return pairs
}

/** Searches `edges` of the border for the units at places `asked` of `units`, and keeps what is nearer than `best`. */
function searchOtherPairs(
  border: Border,
  measured: Measured,
  pairOfPiece: Int32Array,
  lon: Float64Array,
  lat: Float64Array,
  units: Int32Array,
  asked: Int32Array,
  edges: Int32Array,
  best: { readonly piece: Int32Array; readonly distanceMetres: Float64Array },
): void {
  const pairs = [...new Set(Array.from(edges, (e) => pairOfPiece[border.pieceOfEdge[e]]))].sort((a, b) => a - b)
  const rank = new Map(pairs.map((pair, i) => [pair, i]))
  const rankOf = (piece: number) => rank.get(pairOfPiece[piece]) as number
  for (let digit = 1; digit < pairs.length; digit *= 2) {
    for (const value of [0, digit]) {
      const others = edges.filter((e) => (rankOf(border.pieceOfEdge[e]) & digit) !== value)
      const searching = asked.filter((k) => (rankOf(measured.piece[units[k]]) & digit) === value)
      if (others.length === 0 || searching.length === 0) continue
      const rows = searching.map((k) => units[k])
      const tree = buildSegmentTree(pickedEdges(border.edges, others))
      const found = nearestEdges(tree, picked(lon, rows), picked(lat, rows))
      for (let i = 0; i < searching.length; i++) {
        const k = searching[i]
        const piece = border.pieceOfEdge[others[found.edge[i]]]
        const nearer = best.distanceMetres[k] - found.distanceMetres[i]
        if (nearer < -tieMetres || (nearer <= tieMetres && piece >= best.piece[k])) continue
        best.piece[k] = piece
        best.distanceMetres[k] = found.distanceMetres[i]
      }
    }
  }
}
