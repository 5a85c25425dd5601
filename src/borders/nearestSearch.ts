import { longestChordMetres, pieceMetres } from './nearestMeasure.js'
import { fanOut, pieceSize, type SegmentTree } from './segmentTreeBuild.js'

/** Distances that differ by less are equal: the rounding of earth-centred coordinates. */
export function tieMetres(distanceMetres: number): number {
  return 1e-8 + 4e-15 * distanceMetres
}

const tieRoom = 16

/** Room to work in, made once for many searches. */
export interface SearchRoom {
  readonly stackNode: Int32Array
  readonly stackSquare: Float64Array
  readonly foot: Float64Array
  /** Pieces as near as the nearest, their distance and u. */
  readonly tiePiece: Int32Array
  readonly tieDistance: Float64Array
  readonly tieFoot: Float64Array
}

export function searchRoom(tree: SegmentTree): SearchRoom {
  const stackNode = nodeStack(tree)
  return {
    stackNode,
    stackSquare: new Float64Array(stackNode.length),
    foot: new Float64Array(1),
    tiePiece: new Int32Array(tieRoom),
    tieDistance: new Float64Array(tieRoom),
    tieFoot: new Float64Array(tieRoom),
  }
}

/**
 * The nearest pieces to q (relative to the tree's origin), beginning with a guess `start`, better the nearer it is.
 * Writes every piece within `tieMetres` of the nearest to the room's tie arrays (and perhaps some that are not) and
 * returns how many; -1 where there are more than the room holds. Which pieces tie does not depend on `start`.
 */
export function searchNearest(
  tree: SegmentTree,
  room: SearchRoom,
  qx: number,
  qy: number,
  qz: number,
  start: number,
): number {
  const { pieces, boxes, firstChild, childCount, firstLeaf, pieceCount, largestBulgeMetres } = tree
  const { stackNode, stackSquare, foot, tiePiece, tieDistance, tieFoot } = room
  let best = pieceMetres(tree, start, qx, qy, qz, foot)
  tiePiece[0] = start
  tieDistance[0] = best
  tieFoot[0] = foot[0]
  let ties = 1
  let overflow = false
  let bound = longestChordMetres(best + tieMetres(best)) + 1e-8
  let boxSquare = bound * bound
  let chordSquare = (bound + largestBulgeMetres) ** 2
  let depth = 1
  stackNode[0] = 0
  stackSquare[0] = 0
  while (depth > 0) {
    depth--
    if (stackSquare[depth] > boxSquare) continue
    const node = stackNode[depth]
    if (node < firstLeaf) {
      const base = depth
      const end = firstChild[node] + childCount[node]
      for (let child = firstChild[node]; child < end; child++) {
        const at = child * 6
        let x = Math.abs(qx - boxes[at]) - boxes[at + 3]
        let y = Math.abs(qy - boxes[at + 1]) - boxes[at + 4]
        let z = Math.abs(qz - boxes[at + 2]) - boxes[at + 5]
        x += Math.abs(x)
        y += Math.abs(y)
        z += Math.abs(z)
        const square = (x * x + y * y + z * z) * 0.25
        if (square > boxSquare) continue
        // nearest on top
        let slot = depth++
        while (slot > base && stackSquare[slot - 1] < square) {
          stackSquare[slot] = stackSquare[slot - 1]
          stackNode[slot] = stackNode[slot - 1]
          slot--
        }
        stackSquare[slot] = square
        stackNode[slot] = child
      }
      continue
    }
    const from = (node - firstLeaf) * fanOut
    const to = Math.min(from + fanOut, pieceCount)
    for (let piece = from; piece < to; piece++) {
      const at = piece * pieceSize
      const wx = qx - pieces[at]
      const wy = qy - pieces[at + 1]
      const wz = qz - pieces[at + 2]
      const dx = pieces[at + 3]
      const dy = pieces[at + 4]
      const dz = pieces[at + 5]
      const u = Math.max(0, Math.min(1, (wx * dx + wy * dy + wz * dz) * pieces[at + 9]))
      const rx = wx - u * dx
      const ry = wy - u * dy
      const rz = wz - u * dz
      if (rx * rx + ry * ry + rz * rz > chordSquare || piece === start) continue
      const distance = pieceMetres(tree, piece, qx, qy, qz, foot)
      const tie = tieMetres(best)
      if (distance > best + tie) continue
      if (distance < best) {
        if (distance < best - tie) {
          ties = 0
          overflow = false
        }
        best = distance
        bound = longestChordMetres(best + tieMetres(best)) + 1e-8
        boxSquare = bound * bound
        chordSquare = (bound + largestBulgeMetres) ** 2
      }
      if (ties === tieRoom) overflow = true
      else {
        tiePiece[ties] = piece
        tieDistance[ties] = distance
        tieFoot[ties++] = foot[0]
      }
    }
  }
  if (!overflow) return ties
  tieDistance[0] = best
  return -1
}

/** Room for the nodes still to be visited. */
export function nodeStack(tree: SegmentTree): Int32Array {
  return new Int32Array(fanOut * (Math.ceil(Math.log2(tree.pieceCount + 1) / 2) + 2))
}

/** Appends to `out` all pieces whose boxed chord comes within `chordMetres` of q: a superset of those whose curve does. */
export function collectPieces(
  tree: SegmentTree,
  stack: Int32Array,
  qx: number,
  qy: number,
  qz: number,
  chordMetres: number,
  out: number[],
): void {
  const { pieces, boxes, firstChild, childCount, firstLeaf, pieceCount, largestBulgeMetres } = tree
  const boxSquare = chordMetres * chordMetres
  const chordSquare = (chordMetres + largestBulgeMetres) ** 2
  let depth = pieceCount > 0 ? 1 : 0
  stack[0] = 0
  while (depth > 0) {
    const node = stack[--depth]
    const at = node * 6
    const x = Math.max(0, Math.abs(qx - boxes[at]) - boxes[at + 3])
    const y = Math.max(0, Math.abs(qy - boxes[at + 1]) - boxes[at + 4])
    const z = Math.max(0, Math.abs(qz - boxes[at + 2]) - boxes[at + 5])
    if (x * x + y * y + z * z > boxSquare) continue
    if (node < firstLeaf) {
      for (let k = 0; k < childCount[node]; k++) stack[depth++] = firstChild[node] + k
      continue
    }
    const from = (node - firstLeaf) * fanOut
    const to = Math.min(from + fanOut, pieceCount)
    for (let piece = from; piece < to; piece++) {
      const p = piece * pieceSize
      const wx = qx - pieces[p]
      const wy = qy - pieces[p + 1]
      const wz = qz - pieces[p + 2]
      const u = (wx * pieces[p + 3] + wy * pieces[p + 4] + wz * pieces[p + 5]) * pieces[p + 9]
      const t = Math.max(0, Math.min(1, u))
      const square = (wx - t * pieces[p + 3]) ** 2 + (wy - t * pieces[p + 4]) ** 2 + (wz - t * pieces[p + 5]) ** 2
      if (square <= chordSquare) out.push(piece)
    }
  }
}
