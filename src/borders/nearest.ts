import { earthCentred } from '../math/index.js'
import { hilbertOrder } from './hilbert.js'
import { edgeFraction, resolveNearest } from './nearestFar.js'
import { closeMetres } from './nearestMeasure.js'
import { type SearchRoom, searchNearest, searchRoom, tieMetres } from './nearestSearch.js'
import type { SegmentTree } from './segmentTreeBuild.js'

/** One element for each point. Without an answer (NaN or impossible coordinates, no edges): edge -1, the others NaN. */
export interface Nearest {
  readonly edge: Int32Array
  /** Foot along the edge, 0 to 1, linear in longitude and latitude. */
  readonly fraction: Float64Array
  /** Geodesic metres from the point to the foot, never negative. */
  readonly distanceMetres: Float64Array
}

const chunkSize = 262_144

/**
 * Nearest edge, foot and geodesic distance (WGS 84) of every point; METHODS section 10.
 * Error against Karney's inverse over every point of every edge: below 1e-5 m to 200 km; beyond, the distance to the
 * foot is his, to 15 nanometres, and the foot's choice costs less than 1e-6 of it.
 * Edges nearer than 1e-8 m to each other in distance are tied, and the smallest index wins: the answer for a point does
 * not depend on the others or on their order. Points are searched along a Hilbert curve, each from its neighbour's
 * answer, about as fast as log(edges). Throws RangeError where the arrays differ in length.
 */
export function nearestEdges(
  tree: SegmentTree,
  lonDegrees: Float64Array,
  latDegrees: Float64Array,
  progress?: (done: number) => void,
): Nearest {
  const count = lonDegrees.length
  if (latDegrees.length !== count)
    throw new RangeError(`lonDegrees has ${count} points, latDegrees has ${latDegrees.length}`)
  const nearest = nearestRoom(count)
  for (let from = 0; from < count; from += chunkSize) {
    const to = Math.min(count, from + chunkSize)
    const order = hilbertOrder(lonDegrees.subarray(from, to), latDegrees.subarray(from, to))
    for (let k = 0; k < order.length; k++) order[k] += from
    search(tree, lonDegrees, latDegrees, order, nearest)
    progress?.(to)
  }
  return nearest
}

/** The same for points that follow a Hilbert curve already: each is searched from the answer before it. */
export function nearestInOrder(tree: SegmentTree, lonDegrees: Float64Array, latDegrees: Float64Array): Nearest {
  const nearest = nearestRoom(lonDegrees.length)
  search(tree, lonDegrees, latDegrees, undefined, nearest)
  return nearest
}

/** No answer for any point yet. */
export function nearestRoom(count: number): Nearest {
  return {
    edge: new Int32Array(count).fill(-1),
    fraction: new Float64Array(count).fill(Number.NaN),
    distanceMetres: new Float64Array(count).fill(Number.NaN),
  }
}

/** Searches for the points of `order`, one after the other; for all as they come where there is none. */
function search(
  tree: SegmentTree,
  lonDegrees: Float64Array,
  latDegrees: Float64Array,
  order: Uint32Array | undefined,
  nearest: Nearest,
): void {
  if (tree.pieceCount === 0) return
  const { origin, pieceEdge } = tree
  const room = searchRoom(tree)
  const { tiePiece, tieDistance, tieFoot } = room
  const point = new Float64Array(3)
  const count = order ? order.length : lonDegrees.length
  let start = 0
  let previous = -1
  for (let k = 0; k < count; k++) {
    const i = order ? order[k] : k
    const lon = lonDegrees[i]
    const lat = latDegrees[i]
    if (!(Math.abs(lat) <= 90 && Math.abs(lon) < Infinity)) continue
    if (previous >= 0 && lonDegrees[previous] === lon && latDegrees[previous] === lat) {
      nearest.edge[i] = nearest.edge[previous]
      nearest.fraction[i] = nearest.fraction[previous]
      nearest.distanceMetres[i] = nearest.distanceMetres[previous]
      continue
    }
    previous = i
    earthCentred(lon, lat, point, 0)
    const x = point[0] - origin[0]
    const y = point[1] - origin[1]
    const z = point[2] - origin[2]
    const ties = searchNearest(tree, room, x, y, z, start)
    start = tiePiece[0]
    let rough = tieDistance[0]
    for (let tie = 1; tie < ties; tie++) if (tieDistance[tie] < rough) rough = tieDistance[tie]
    if (ties < 0 || rough > closeMetres) {
      const foot = resolveNearest(tree, room, x, y, z, lon, lat, rough)
      nearest.edge[i] = foot.edge
      nearest.fraction[i] = foot.fraction
      nearest.distanceMetres[i] = foot.distanceMetres
      continue
    }
    const chosen = ties === 1 ? 0 : chosenTie(tree, room, ties, rough)
    nearest.edge[i] = pieceEdge[tiePiece[chosen]]
    nearest.fraction[i] = edgeFraction(tree, tiePiece[chosen], tieFoot[chosen])
    nearest.distanceMetres[i] = tieDistance[chosen]
  }
}

/** Which of the ties is the answer: the rule of `chosenFoot`, without an object for each. */
function chosenTie(tree: SegmentTree, room: SearchRoom, ties: number, nearestMetres: number): number {
  const { tiePiece, tieDistance, tieFoot } = room
  const limit = nearestMetres + tieMetres(nearestMetres)
  let chosen = -1
  for (let k = 0; k < ties; k++) {
    if (tieDistance[k] > limit) continue
    if (chosen >= 0) {
      const order =
        tree.pieceEdge[tiePiece[k]] - tree.pieceEdge[tiePiece[chosen]] ||
        tieDistance[k] - tieDistance[chosen] ||
        edgeFraction(tree, tiePiece[k], tieFoot[k]) - edgeFraction(tree, tiePiece[chosen], tieFoot[chosen])
      if (order >= 0) continue
    }
    chosen = k
  }
  return chosen
}
