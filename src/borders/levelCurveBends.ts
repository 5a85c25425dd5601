/** Bends the chords of a curve at one distance until their middles are on it, too: rounder arcs, sharper corners. */
import type { Beyond } from './levelCurve.js'
import { localPlane } from './localPlane.js'

type Point = [number, number]

/** A chord's middle may be off by this share of the distance. */
const offShare = 2e-4
const mostRounds = 7

/** Rings with the land within the distance on their left; `beyond` is negative there. */
export function bentRings(rings: readonly Point[][], metres: number, beyond: Beyond): Point[][] {
  let bent = rings.map((ring) => ring.slice())
  let fresh = bent.map((ring) => ring.map(() => true))
  for (let round = 0; round < mostRounds; round++) {
    const chords: { ring: number; i: number }[] = []
    bent.forEach((ring, r) => {
      for (let i = 0; i + 1 < ring.length; i++) if (fresh[r][i]) chords.push({ ring: r, i })
    })
    const middles = middlesOnCurve(
      chords.map(({ ring, i }) => [bent[ring][i], bent[ring][i + 1]] as const),
      metres,
      beyond,
    )
    if (!middles.some((middle) => middle !== undefined)) break
    const added = bent.map((ring) => ring.map((): Point | undefined => undefined))
    chords.forEach(({ ring, i }, c) => {
      added[ring][i] = middles[c]
    })
    const isFresh = added.map((list) => list.flatMap((middle) => (middle ? [true, true] : [false])))
    bent = bent.map((ring, r) => ring.flatMap((point, i) => (added[r][i] ? [point, added[r][i] as Point] : [point])))
    fresh = isFresh
  }
  return bent
}

/** The middle of each chord moved onto the curve, square to the chord; undefined where it is there, or can't be moved. */
function middlesOnCurve(
  chords: readonly (readonly [Point, Point])[],
  metres: number,
  beyond: Beyond,
): (Point | undefined)[] {
  const middles = chords.map(([a, b]): Point => [(a[0] + b[0]) / 2, (a[1] + b[1]) / 2])
  const beyondAt = (points: readonly Point[]) =>
    beyond(
      Float64Array.from(points, ([lon]) => lon),
      Float64Array.from(points, ([, lat]) => lat),
    )
  const first = beyondAt(middles)
  const found: (Point | undefined)[] = chords.map(() => undefined)
  let open = chords.map((_, c) => c).filter((c) => Math.abs(first[c]) > offShare * metres)
  const moved = new Float64Array(chords.length)
  const value = first.slice()
  for (let step = 0; step < 25 && open.length > 0; step++) {
    for (const c of open) moved[c] -= value[c]
    const points = open.map((c) => beside(chords[c], middles[c], moved[c]))
    const f = beyondAt(points)
    open = open.filter((c, i) => {
      value[c] = f[i]
      if (Math.abs(f[i]) > 0.05 * offShare * metres) return true
      found[c] = points[i]
      return false
    })
  }
  return found
}

/** The point `metres` to the right of the chord's middle. */
function beside([a, b]: readonly [Point, Point], middle: Point, metres: number): Point {
  const { metresPerLon, metresPerLat } = localPlane(middle[0], middle[1])
  const [east, north] = [(b[0] - a[0]) * metresPerLon, (b[1] - a[1]) * metresPerLat]
  const length = Math.hypot(east, north)
  return [middle[0] + ((north / length) * metres) / metresPerLon, middle[1] - ((east / length) * metres) / metresPerLat]
}
