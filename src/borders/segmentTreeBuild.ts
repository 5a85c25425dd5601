import { hilbertOrder } from './hilbert.js'
import { along, type Edges, edgePoint, splitEdges } from './segmentTreeSplit.js'

/** Children of a node, and pieces of a leaf. */
export const fanOut = 4
/** Numbers in a piece's record: start, chord, bulge (x, y, z each) and 1 / chord². */
export const pieceSize = 10

/**
 * Edges ready for search: curved pieces in earth-centred metres, packed four by four in a tree of boxes.
 * Coordinates are relative to `origin`, near the middle of the edges, so that Float32 boxes stay tight.
 * A piece is the curve start + u·chord + u(1 - u)·bulge, u from 0 to 1; bulge is four times the middle's offset from the chord.
 * Typed arrays and numbers only, never changed after the build.
 */
export interface SegmentTree {
  readonly edges: Edges
  readonly edgeCount: number
  readonly pieceCount: number
  /** x, y, z of the origin. */
  readonly origin: Float64Array
  /** pieceSize numbers for each piece. */
  readonly pieces: Float64Array
  /** Edge of each piece, and the fractions of it at u = 0 and u = 1. */
  readonly pieceEdge: Int32Array
  readonly pieceStart: Float64Array
  readonly pieceEnd: Float64Array
  /** Nodes from the root (0) down; the leaves come last. Centre x, y, z and half sizes x, y, z of each, rounded outward. */
  readonly boxes: Float32Array
  /** First child of each node above the leaves; children are consecutive. */
  readonly firstChild: Int32Array
  /** Child count of each node above the leaves. */
  readonly childCount: Uint8Array
  /** The first leaf node. Leaf k holds the pieces 4k to 4k + 3, as far as there are. */
  readonly firstLeaf: number
  /** No piece leaves its chord by more. */
  readonly largestBulgeMetres: number
}

/**
 * Builds the tree: linear in total edge length (km) plus edge count.
 * Throws RangeError where the four arrays differ in length or a coordinate is not finite or a latitude is beyond ±90.
 */
export function buildSegmentTree(edges: Edges): SegmentTree {
  checkEdges(edges)
  const stretches = splitEdges(edges)
  const pieceCount = stretches.edge.length
  const middleLon = new Float64Array(pieceCount)
  const middleLat = new Float64Array(pieceCount)
  for (let i = 0; i < pieceCount; i++) {
    const edge = stretches.edge[i]
    const middle = (stretches.start[i] + stretches.end[i]) / 2
    middleLon[i] = along(edges.lon0[edge], edges.lon1[edge], middle)
    middleLat[i] = along(edges.lat0[edge], edges.lat1[edge], middle)
  }
  const order = hilbertOrder(middleLon, middleLat)
  const pieceEdge = new Int32Array(pieceCount)
  const pieceStart = new Float64Array(pieceCount)
  const pieceEnd = new Float64Array(pieceCount)
  for (let i = 0; i < pieceCount; i++) {
    pieceEdge[i] = stretches.edge[order[i]]
    pieceStart[i] = stretches.start[order[i]]
    pieceEnd[i] = stretches.end[order[i]]
  }
  const pieces = new Float64Array(pieceCount * pieceSize)
  const { origin, largestBulgeMetres } = fillPieces(edges, pieceEdge, pieceStart, pieceEnd, pieces)
  return {
    edges,
    edgeCount: edges.lon0.length,
    pieceCount,
    origin,
    pieces,
    pieceEdge,
    pieceStart,
    pieceEnd,
    ...packBoxes(pieces, pieceCount),
    largestBulgeMetres,
  }
}

function checkEdges({ lon0, lat0, lon1, lat1 }: Edges): void {
  const count = lon0.length
  if (lat0.length !== count || lon1.length !== count || lat1.length !== count)
    throw new RangeError(`edge arrays differ in length: ${count}, ${lat0.length}, ${lon1.length}, ${lat1.length}`)
  for (let i = 0; i < count; i++) {
    if (!(Math.abs(lat0[i]) <= 90 && Math.abs(lat1[i]) <= 90 && Number.isFinite(lon0[i]) && Number.isFinite(lon1[i])))
      throw new RangeError(`edge ${i} is not on the earth: (${lon0[i]}, ${lat0[i]}) to (${lon1[i]}, ${lat1[i]})`)
  }
}

/** Writes the records of all pieces; the origin is the middle of their bounding box. */
function fillPieces(
  edges: Edges,
  pieceEdge: Int32Array,
  pieceStart: Float64Array,
  pieceEnd: Float64Array,
  pieces: Float64Array,
): { origin: Float64Array; largestBulgeMetres: number } {
  const points = new Float64Array(9)
  const low = [Infinity, Infinity, Infinity]
  const high = [-Infinity, -Infinity, -Infinity]
  let largestSquare = 0
  for (let i = 0; i < pieceEdge.length; i++) {
    const edge = pieceEdge[i]
    edgePoint(edges, edge, pieceStart[i], points, 0)
    edgePoint(edges, edge, (pieceStart[i] + pieceEnd[i]) / 2, points, 3)
    edgePoint(edges, edge, pieceEnd[i], points, 6)
    const at = i * pieceSize
    let chordSquare = 0
    let bulgeSquare = 0
    for (let axis = 0; axis < 3; axis++) {
      const start = points[axis]
      const chord = points[6 + axis] - start
      const bulge = 4 * (points[3 + axis] - start - chord / 2)
      pieces[at + axis] = start
      pieces[at + 3 + axis] = chord
      pieces[at + 6 + axis] = bulge
      chordSquare += chord * chord
      bulgeSquare += bulge * bulge
      if (start < low[axis]) low[axis] = start
      if (start > high[axis]) high[axis] = start
    }
    pieces[at + 9] = chordSquare > 0 ? 1 / chordSquare : 0
    if (bulgeSquare > largestSquare) largestSquare = bulgeSquare
  }
  const origin = new Float64Array(3)
  if (pieceEdge.length > 0)
    for (let axis = 0; axis < 3; axis++) origin[axis] = Math.fround((low[axis] + high[axis]) / 2)
  for (let at = 0; at < pieces.length; at += pieceSize)
    for (let axis = 0; axis < 3; axis++) pieces[at + axis] -= origin[axis]
  return { origin, largestBulgeMetres: Math.sqrt(largestSquare) / 4 }
}

/** Boxes of leaves, then of the levels above them, laid out from the root down. */
function packBoxes(pieces: Float64Array, pieceCount: number) {
  const sizes = [Math.ceil(pieceCount / fanOut)]
  while (sizes[0] > 1) sizes.unshift(Math.ceil(sizes[0] / fanOut))
  let nodeCount = 0
  for (const size of sizes) nodeCount += size
  const firstLeaf = nodeCount - sizes[sizes.length - 1]
  // low x, y, z, high x, y, z of every node, in full precision
  const bounds = new Float64Array(6 * nodeCount)
  for (let node = 0; node < nodeCount; node++) {
    bounds.fill(Infinity, 6 * node, 6 * node + 3)
    bounds.fill(-Infinity, 6 * node + 3, 6 * node + 6)
  }
  for (let piece = 0; piece < pieceCount; piece++) {
    const at = 6 * (firstLeaf + Math.floor(piece / fanOut))
    for (let axis = 0; axis < 3; axis++) {
      // the three control points of the piece as a Bézier parabola: their hull holds the curve
      const start = pieces[piece * pieceSize + axis]
      const chord = pieces[piece * pieceSize + 3 + axis]
      const control = start + (chord + pieces[piece * pieceSize + 6 + axis]) / 2
      bounds[at + axis] = Math.min(bounds[at + axis], start, start + chord, control)
      bounds[at + 3 + axis] = Math.max(bounds[at + 3 + axis], start, start + chord, control)
    }
  }
  const firstChild = new Int32Array(firstLeaf)
  const childCount = new Uint8Array(firstLeaf)
  let levelEnd = firstLeaf
  for (let level = sizes.length - 2; level >= 0; level--) {
    const base = levelEnd - sizes[level]
    for (let child = 0; child < sizes[level + 1]; child++) {
      const node = base + Math.floor(child / fanOut)
      if (child % fanOut === 0) firstChild[node] = levelEnd + child
      childCount[node]++
      for (let axis = 0; axis < 3; axis++) {
        const from = 6 * (levelEnd + child) + axis
        const to = 6 * node + axis
        bounds[to] = Math.min(bounds[to], bounds[from])
        bounds[to + 3] = Math.max(bounds[to + 3], bounds[from + 3])
      }
    }
    levelEnd = base
  }
  return { boxes: roundedOutward(bounds, nodeCount), firstChild, childCount, firstLeaf }
}

/** Centre and half size in Float32 such that centre ± half size covers [low, high]. */
function roundedOutward(bounds: Float64Array, nodeCount: number): Float32Array {
  const boxes = new Float32Array(6 * nodeCount)
  for (let node = 0; node < nodeCount; node++) {
    for (let axis = 0; axis < 3; axis++) {
      const low = bounds[6 * node + axis]
      const high = bounds[6 * node + 3 + axis]
      const centre = Math.fround((low + high) / 2)
      boxes[6 * node + axis] = centre
      // half a Float32 step is 2^-24 of the number: 2^-22 covers the rounding of the half size too
      boxes[6 * node + 3 + axis] = Math.max(high - centre, centre - low) * (1 + 2 ** -22) + 1e-8
    }
  }
  return boxes
}
