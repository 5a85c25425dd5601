/**
 * A plane in metres around a place: longitude and latitude scaled by the ellipsoid's radii of curvature there.
 * It is affine in degrees, so edges that are straight in longitude and latitude stay straight, and edges that
 * coincide go on coinciding. Distances d at a latitude φ are right to about d·tan φ / 6,000 km of themselves.
 */
import { equatorialMetres, flattening } from '../math/index.js'

export interface LocalPlane {
  readonly lon: number
  readonly lat: number
  readonly metresPerLon: number
  readonly metresPerLat: number
}

/** Source: radii of curvature of the meridian and the prime vertical of WGS 84. */
export function localPlane(lon: number, lat: number): LocalPlane {
  const radians = Math.PI / 180
  const e2 = flattening * (2 - flattening)
  const sine = Math.sin(lat * radians)
  const w2 = 1 - e2 * sine * sine
  const normal = equatorialMetres / Math.sqrt(w2)
  return {
    lon,
    lat,
    metresPerLon: Math.max(0, Math.cos(lat * radians)) * normal * radians,
    metresPerLat: ((normal * (1 - e2)) / w2) * radians,
  }
}

/**
 * Which t in [0, 1] have the point t·(dx, dy) within `radius` of the segment from b to c? Distance to a convex set is
 * convex along a line, so the answer is one interval: written to out[0], out[1]; false where it is empty.
 */
export function withinOfSegment(
  dx: number,
  dy: number,
  bx: number,
  by: number,
  cx: number,
  cy: number,
  radius: number,
  out: Float64Array,
): boolean {
  out[0] = Infinity
  out[1] = -Infinity
  addDisc(dx, dy, bx, by, radius, out)
  addDisc(dx, dy, cx, cy, radius, out)
  addSlab(dx, dy, bx, by, cx - bx, cy - by, radius, out)
  if (out[0] < 0) out[0] = 0
  if (out[1] > 1) out[1] = 1
  return out[0] < out[1]
}

function widen(from: number, to: number, out: Float64Array): void {
  if (!(from <= to)) return
  if (from < out[0]) out[0] = from
  if (to > out[1]) out[1] = to
}

/** The part within `radius` of an end of the segment. */
function addDisc(dx: number, dy: number, bx: number, by: number, radius: number, out: Float64Array): void {
  const square = dx * dx + dy * dy
  if (!(square > 0)) {
    if (bx * bx + by * by <= radius * radius) widen(0, 1, out)
    return
  }
  const off = dx * by - dy * bx
  const room = radius * radius - (off * off) / square
  if (!(room >= 0)) return
  const middle = (dx * bx + dy * by) / square
  const half = Math.sqrt(room / square)
  widen(middle - half, middle + half, out)
}

/** The part whose foot lies on the segment b + s·u, 0 <= s <= 1, no farther than `radius`. */
function addSlab(
  dx: number,
  dy: number,
  bx: number,
  by: number,
  ux: number,
  uy: number,
  radius: number,
  out: Float64Array,
): void {
  const length = Math.hypot(ux, uy)
  if (!(length > 0)) return
  let [from, to] = [-Infinity, Infinity]
  const clip = (slope: number, constant: number, low: number, high: number) => {
    if (slope === 0) {
      if (!(constant >= low && constant <= high)) to = -Infinity
      return
    }
    const p = (low - constant) / slope
    const q = (high - constant) / slope
    from = Math.max(from, Math.min(p, q))
    to = Math.min(to, Math.max(p, q))
  }
  clip((dx * ux + dy * uy) / length, -(bx * ux + by * uy) / length, 0, length)
  clip((ux * dy - uy * dx) / length, -(ux * by - uy * bx) / length, -radius, radius)
  widen(from, to, out)
}

/**
 * The overlap in t of the edge t·(dx, dy) and the segment b to c where they coincide: both ends of the overlap no
 * farther than `tolerance` from the segment, and the overlap at least ten tolerances long.
 * Written to out[0], out[1]; returns +1 where both run the same way, -1 where against each other, 0 where they do not
 * coincide.
 */
export function coincidence(
  dx: number,
  dy: number,
  bx: number,
  by: number,
  cx: number,
  cy: number,
  tolerance: number,
  out: Float64Array,
): -1 | 0 | 1 {
  const square = dx * dx + dy * dy
  if (!(square > 0)) return 0
  const tb = (dx * bx + dy * by) / square
  const tc = (dx * cx + dy * cy) / square
  if (tb === tc) return 0
  const length = Math.sqrt(square)
  const slack = tolerance / length
  let from = Math.min(tb, tc)
  let to = Math.max(tb, tc)
  if (from < slack) from = 0
  if (to > 1 - slack) to = 1
  if (!(from < to)) return 0
  if ((to - from) * length < 10 * tolerance) return 0
  const offB = (dx * by - dy * bx) / length
  const offC = (dx * cy - dy * cx) / length
  const offAt = (t: number) => offB + ((offC - offB) * (t - tb)) / (tc - tb)
  if (Math.abs(offAt(from)) > tolerance || Math.abs(offAt(to)) > tolerance) return 0
  out[0] = from
  out[1] = to
  return tc > tb ? 1 : -1
}

/** Nearest point of the segment b to c to the origin: returns its fraction, and the distance in out[0]. */
export function footOnSegment(bx: number, by: number, cx: number, cy: number, out: Float64Array): number {
  const ux = cx - bx
  const uy = cy - by
  const square = ux * ux + uy * uy
  const s = square > 0 ? Math.min(1, Math.max(0, -(bx * ux + by * uy) / square)) : 0
  out[0] = Math.hypot(bx + s * ux, by + s * uy)
  return s
}
