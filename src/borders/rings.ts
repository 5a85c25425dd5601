/** Rings: unwrapping across the antimeridian, and one canonical way to write each ring. */
import type { Position, RingCoords } from './geojson.js'

/** Degrees to add, a multiple of 360, that bring `lon` within 180 of `near`. */
export function turnsTo(lon: number, near: number): number {
  return Math.round((near - lon) / 360) * 360
}

/** Twice the signed area in square degrees, counter-clockwise positive; relative to the first position, for digits. */
export function doubleArea(ring: RingCoords): number {
  const [lon0, lat0] = ring[0]
  let sum = 0
  for (let i = 1; i + 1 < ring.length; i++) {
    sum += (ring[i][0] - lon0) * (ring[i + 1][1] - lat0) - (ring[i + 1][0] - lon0) * (ring[i][1] - lat0)
  }
  return sum
}

/**
 * A ring or line whose longitudes jump by more than 180 degrees, with the later ones moved by 360 so that it runs on.
 * A ring stays as written where that would not close it or would leave it without area: rings around a pole and
 * whole-world rectangles are written with edges along both sides of the antimeridian (RFC 7946, 3.1.9).
 */
export function unwrapped(positions: RingCoords, isRing: boolean): RingCoords {
  if (!positions.some((p, i) => i > 0 && Math.abs(p[0] - positions[i - 1][0]) > 180)) return positions
  let shift = 0
  const moved: Position[] = positions.map((p, i) => {
    if (i > 0) shift += turnsTo(p[0] + shift, positions[i - 1][0] + shift)
    return [p[0] + shift, p[1]]
  })
  if (isRing && (shift !== 0 || doubleArea(moved) === 0)) return positions
  return moved
}

function comparePositions(a: Position, b: Position): number {
  return a[0] - b[0] || a[1] - b[1]
}

/** Orders lists of positions: by their first difference, then the shorter first. */
export function comparePaths(a: RingCoords, b: RingCoords): number {
  const common = Math.min(a.length, b.length)
  for (let i = 0; i < common; i++) {
    const order = comparePositions(a[i], b[i])
    if (order !== 0) return order
  }
  return a.length - b.length
}

export interface CanonicalRing {
  /** Closed, without repeated positions, its west end in [-180, 180). */
  readonly positions: RingCoords
  /** +1 where the zone lies left of the ring as written here, -1 where right. */
  readonly inside: 1 | -1
}

/**
 * The same positions whatever vertex the ring began with and whichever way it ran: it starts at the smallest vertex
 * (by longitude, then latitude) and goes on in the direction that gives the smaller list.
 * `isHole` is by its place in the polygon; winding is never trusted.
 */
export function canonicalRing(ring: RingCoords, isHole: boolean): CanonicalRing {
  const open = withoutRepeats(ring)
  const west = open.reduce((least, p) => Math.min(least, p[0]), Infinity)
  const shift = -Math.floor((west + 180) / 360) * 360
  const moved = shift === 0 ? open : open.map((p) => [p[0] + shift, p[1]])
  const smallest = moved.reduce((least, p) => (comparePositions(p, least) < 0 ? p : least))
  const n = moved.length
  const written = (start: number, step: number) =>
    Array.from({ length: n + 1 }, (_, i) => moved[(((start + i * step) % n) + n) % n])
  let best: RingCoords | undefined
  for (let i = 0; i < n; i++) {
    if (comparePositions(moved[i], smallest) !== 0) continue
    for (const step of [1, -1]) {
      const candidate = written(i, step)
      if (!best || comparePaths(candidate, best) < 0) best = candidate
    }
  }
  const positions = best as RingCoords
  const isCounterClockwise = doubleArea(positions) > 0
  return { positions, inside: isCounterClockwise === isHole ? -1 : 1 }
}

/** Distinct neighbours only, and open: the closing position is left out. */
function withoutRepeats(ring: RingCoords): Position[] {
  const kept: Position[] = []
  for (const p of ring) {
    const last = kept[kept.length - 1]
    if (!last || last[0] !== p[0] || last[1] !== p[1]) kept.push([p[0], p[1]])
  }
  while (kept.length > 1 && comparePositions(kept[0], kept[kept.length - 1]) === 0) kept.pop()
  return kept
}
