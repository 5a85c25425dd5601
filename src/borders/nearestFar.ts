import { earthCentred, equatorialMetres, surfaceMetres } from '../math/index.js'
import { geodesicMetres } from './geodesy.js'
import { closeMetres, longestChordMetres, measureErrorMetres, pieceMetres } from './nearestMeasure.js'
import { collectPieces, type SearchRoom, tieMetres } from './nearestSearch.js'
import { pieceSize, type SegmentTree } from './segmentTreeBuild.js'
import { along, edgePoint } from './segmentTreeSplit.js'

/** Beyond this Lambert's formula is too rough to find a foot by. */
const antipodalMetres = 1.2e7

/** One answer: the edge, the foot's fraction of it, the distance. */
interface Foot {
  readonly edge: number
  readonly fraction: number
  readonly distanceMetres: number
}

/** Fraction of the edge at u on a piece of it; exact at the edge's ends. */
export function edgeFraction(tree: SegmentTree, piece: number, u: number): number {
  return along(tree.pieceStart[piece], tree.pieceEnd[piece], u)
}

/** Smallest edge among the feet within `tie` of the nearest; of one edge, the nearer foot, then the smaller fraction. */
function chosenFoot(feet: readonly Foot[], tie: number): Foot {
  let nearest = Infinity
  for (const foot of feet) if (foot.distanceMetres < nearest) nearest = foot.distanceMetres
  let chosen = feet[0]
  let found = false
  for (const foot of feet) {
    if (foot.distanceMetres > nearest + tie) continue
    if (!found || isBefore(foot, chosen)) chosen = foot
    found = true
  }
  return chosen
}

function isBefore(a: Foot, b: Foot): boolean {
  if (a.edge !== b.edge) return a.edge < b.edge
  if (a.distanceMetres !== b.distanceMetres) return a.distanceMetres < b.distanceMetres
  return a.fraction < b.fraction
}

/**
 * The slow road, for points far from every edge or with many edges equally near: gathers every piece that may hold
 * the nearest point, given the distance `roughMetres` found by the search and the error of its measure.
 * Beyond `closeMetres` each edge's foot is moved to the least distance and measured by the inverse geodesic problem.
 * Good to 1e-6 of the distance, the antipode included.
 */
export function resolveNearest(
  tree: SegmentTree,
  room: SearchRoom,
  qx: number,
  qy: number,
  qz: number,
  lonDegrees: number,
  latDegrees: number,
  roughMetres: number,
): Foot {
  const isFar = roughMetres > closeMetres
  const limit = roughMetres + tieMetres(roughMetres) + (isFar ? 2 * measureErrorMetres(roughMetres) : 0)
  const candidates: number[] = []
  collectPieces(tree, room.stackNode, qx, qy, qz, longestChordMetres(limit) + 1e-8, candidates)
  const nearestOfEdge = new Map<number, { piece: number; fraction: number; distanceMetres: number }>()
  for (const piece of candidates) {
    const distanceMetres = pieceMetres(tree, piece, qx, qy, qz, room.foot)
    if (distanceMetres > limit) continue
    const edge = tree.pieceEdge[piece]
    const fraction = edgeFraction(tree, piece, room.foot[0])
    const known = nearestOfEdge.get(edge)
    if (known === undefined || isBefore({ edge, fraction, distanceMetres }, { edge, ...known }))
      nearestOfEdge.set(edge, { piece, fraction, distanceMetres })
  }
  const feet: Foot[] = []
  for (const [edge, { piece, fraction, distanceMetres }] of nearestOfEdge) {
    if (!isFar) feet.push({ edge, fraction, distanceMetres })
    else if (distanceMetres > antipodalMetres) feet.push(antipodalFoot(tree, edge, lonDegrees, latDegrees))
    else feet.push(measuredFoot(tree, edge, piece, fraction, lonDegrees, latDegrees))
  }
  // the inverse problem's own rounding is about 15 nanometres
  return chosenFoot(feet, isFar ? 4e-8 : tieMetres(roughMetres))
}

/** The foot on one edge, moved along it to the least distance by parabolas, then measured exactly. */
function measuredFoot(
  tree: SegmentTree,
  edge: number,
  piece: number,
  start: number,
  lonDegrees: number,
  latDegrees: number,
): Foot {
  const { edges } = tree
  const points = new Float64Array(6)
  earthCentred(lonDegrees, latDegrees, points, 0)
  const distanceAt = (t: number): number => {
    edgePoint(edges, edge, t, points, 3)
    const rx = points[0] - points[3]
    const ry = points[1] - points[4]
    const rz = points[2] - points[5]
    return surfaceMetres(rx * rx + ry * ry + rz * rz, rx, ry, rz, points[3], points[4], points[5])
  }
  const chordInverse = Math.sqrt(tree.pieces[piece * pieceSize + 9])
  const fractionPerMetre = chordInverse * (tree.pieceEnd[piece] - tree.pieceStart[piece])
  const stepFraction = 1e-4 * equatorialMetres * fractionPerMetre
  let fraction = start
  let distance = distanceAt(start)
  for (let round = 0; round < 6 && stepFraction > 0; round++) {
    const before = distanceAt(fraction - stepFraction)
    const after = distanceAt(fraction + stepFraction)
    const bend = before - 2 * distance + after
    const move = bend > 0 ? (before - after) / (2 * bend) : 0
    const next = Math.max(0, Math.min(1, fraction + stepFraction * Math.max(-50, Math.min(50, move))))
    const moved = distanceAt(next)
    if (!(moved < distance)) break
    const isSettled = Math.abs(next - fraction) < 1e-4 * stepFraction
    fraction = next
    distance = moved
    if (isSettled) break
  }
  return { edge, fraction, distanceMetres: inverseMetres(tree, edge, fraction, lonDegrees, latDegrees) }
}

function inverseMetres(tree: SegmentTree, edge: number, fraction: number, lon: number, lat: number): number {
  const { lon0, lat0, lon1, lat1 } = tree.edges
  return geodesicMetres(lon, lat, along(lon0[edge], lon1[edge], fraction), along(lat0[edge], lat1[edge], fraction))
}

/** The foot on one edge by the inverse problem alone: the best of 33 places, then golden section on both sides of it. */
function antipodalFoot(tree: SegmentTree, edge: number, lonDegrees: number, latDegrees: number): Foot {
  const places = 32
  const footAt = (fraction: number): Foot => ({
    edge,
    fraction,
    distanceMetres: inverseMetres(tree, edge, fraction, lonDegrees, latDegrees),
  })
  let best = footAt(0)
  for (let k = 1; k <= places; k++) {
    const foot = footAt(k / places)
    if (foot.distanceMetres < best.distanceMetres) best = foot
  }
  const golden = (Math.sqrt(5) - 1) / 2
  let from = Math.max(0, best.fraction - 1 / places)
  let to = Math.min(1, best.fraction + 1 / places)
  for (let step = 0; step < 40; step++) {
    const left = footAt(to - golden * (to - from))
    const right = footAt(from + golden * (to - from))
    if (left.distanceMetres < right.distanceMetres) to = right.fraction
    else from = left.fraction
    for (const foot of [left, right]) if (foot.distanceMetres < best.distanceMetres) best = foot
  }
  return best
}
