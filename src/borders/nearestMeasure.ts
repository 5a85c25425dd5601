import { surfaceMetres } from '../math/index.js'
import { pieceSize, type SegmentTree } from './segmentTreeBuild.js'

/** What a search by chords must know of `surfaceMetres`: its errors, and chords for distances. */

/** Up to this distance the circle's arc is taken as it is (error below 1e-5 m). */
export const closeMetres = 200_000

/** Bound on the error of `surfaceMetres` at the distance s: about twice the largest error measured. */
export function measureErrorMetres(s: number): number {
  if (s < 2.4e6) return 1e-8 + 0.05 * (s / 1e6) ** 5
  if (s < 1e7) return 3e-6 * s
  return 30 + 1.2e9 / Math.max(2.004e7 - s, 3e4)
}

/**
 * Longest chord that two points at geodesic distance s can have.
 * A geodesic bends everywhere at least as much as a circle of 6,400 km, so its chord is at most that circle's;
 * 6,420 km leaves room for its small torsion. The sine is replaced by a polynomial from above.
 */
export function longestChordMetres(s: number): number {
  const x = s / 12.84e6
  if (x > 1.57) return Infinity
  const x2 = x * x
  return s * (1 - (x2 / 6) * (1 - x2 / 20))
}

/**
 * Distance from the point q (relative to the tree's origin) to the curve of one piece; the foot's u goes to foot[0].
 * The foot is the nearest in the chord's length, by Newton's method on |q - curve(u)|².
 */
export function pieceMetres(
  tree: SegmentTree,
  piece: number,
  qx: number,
  qy: number,
  qz: number,
  foot: Float64Array,
): number {
  const { pieces, origin } = tree
  const at = piece * pieceSize
  const wx = qx - pieces[at]
  const wy = qy - pieces[at + 1]
  const wz = qz - pieces[at + 2]
  const dx = pieces[at + 3]
  const dy = pieces[at + 4]
  const dz = pieces[at + 5]
  const mx = pieces[at + 6]
  const my = pieces[at + 7]
  const mz = pieces[at + 8]
  let u = Math.max(0, Math.min(1, (wx * dx + wy * dy + wz * dz) * pieces[at + 9]))
  let rx = 0
  let ry = 0
  let rz = 0
  for (let step = 0; step < 30; step++) {
    const v = u * (1 - u)
    rx = wx - u * dx - v * mx
    ry = wy - u * dy - v * my
    rz = wz - u * dz - v * mz
    const tx = dx + (1 - 2 * u) * mx
    const ty = dy + (1 - 2 * u) * my
    const tz = dz + (1 - 2 * u) * mz
    const curvature = tx * tx + ty * ty + tz * tz + 2 * (rx * mx + ry * my + rz * mz)
    let next = u + (rx * tx + ry * ty + rz * tz) / curvature
    // concave, or of no length: the nearer end
    if (!(curvature > 0)) next = nearerEnd(wx, wy, wz, dx, dy, dz)
    next = Math.max(0, Math.min(1, next))
    const move = Math.abs(next - u)
    u = next
    if (move < 1e-9 || !(curvature > 0)) break
  }
  const v = u * (1 - u)
  rx = wx - u * dx - v * mx
  ry = wy - u * dy - v * my
  rz = wz - u * dz - v * mz
  foot[0] = u
  return surfaceMetres(
    rx * rx + ry * ry + rz * rz,
    rx,
    ry,
    rz,
    qx - rx + origin[0],
    qy - ry + origin[1],
    qz - rz + origin[2],
  )
}

function nearerEnd(wx: number, wy: number, wz: number, dx: number, dy: number, dz: number): number {
  const startSquare = wx * wx + wy * wy + wz * wz
  const endSquare = (wx - dx) ** 2 + (wy - dy) ** 2 + (wz - dz) ** 2
  return endSquare < startSquare ? 1 : 0
}
