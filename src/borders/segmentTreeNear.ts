import { earthCentred, equatorialMetres } from '../math/index.js'
import { collectPieces, nodeStack } from './nearestSearch.js'
import type { SegmentTree } from './segmentTreeBuild.js'

const metresPerDegree = (equatorialMetres * 1.004 * Math.PI) / 180

/**
 * Edges that may come within `metres` of any point of the straight edge from (lon0, lat0) to (lon1, lat1). Sets `out` to
 * their indices, ascending, each once: every edge that does come so near, and some that don't (the edge is covered with
 * discs). Longitudes as written, across 180° unwrapped.
 */
export function edgesNearEdge(
  tree: SegmentTree,
  lon0: number,
  lat0: number,
  lon1: number,
  lat1: number,
  metres: number,
  out: number[],
): void {
  const pieces: number[] = []
  coverEdge(tree, nodeStack(tree), lon0, lat0, lon1, lat1, metres, pieces)
  distinctEdges(tree, pieces, out)
}

function distinctEdges(tree: SegmentTree, pieces: number[], out: number[]): void {
  for (let k = 0; k < pieces.length; k++) pieces[k] = tree.pieceEdge[pieces[k]]
  pieces.sort((a, b) => a - b)
  out.length = 0
  for (let k = 0; k < pieces.length; k++) if (k === 0 || pieces[k] !== pieces[k - 1]) out.push(pieces[k])
}

/** Splits the edge in two until a half is no longer than 500 m or `metres`. */
function coverEdge(
  tree: SegmentTree,
  stack: Int32Array,
  lon0: number,
  lat0: number,
  lon1: number,
  lat1: number,
  metres: number,
  pieces: number[],
): void {
  const north = (lat1 - lat0) * metresPerDegree
  const east = (lon1 - lon0) * metresPerDegree * cosineNearestEquator(lat0, lat1)
  const half = Math.sqrt(north * north + east * east) / 2
  const middleLon = (lon0 + lon1) / 2
  const middleLat = (lat0 + lat1) / 2
  if (half > Math.max(500, metres)) {
    coverEdge(tree, stack, lon0, lat0, middleLon, middleLat, metres, pieces)
    coverEdge(tree, stack, middleLon, middleLat, lon1, lat1, metres, pieces)
  } else collectDisc(tree, stack, middleLon, middleLat, half + metres, pieces)
}

function cosineNearestEquator(lat0: number, lat1: number): number {
  if (lat0 * lat1 <= 0) return 1
  return Math.cos((Math.min(Math.abs(lat0), Math.abs(lat1)) * Math.PI) / 180)
}

function collectDisc(
  tree: SegmentTree,
  stack: Int32Array,
  lon: number,
  lat: number,
  radiusMetres: number,
  pieces: number[],
): void {
  const point = new Float64Array(3)
  earthCentred(lon, lat, point, 0)
  const { origin } = tree
  collectPieces(
    tree,
    stack,
    point[0] - origin[0],
    point[1] - origin[1],
    point[2] - origin[2],
    radiusMetres + 1e-6,
    pieces,
  )
}
