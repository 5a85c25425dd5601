/** Lines on one side, everywhere as far from the border: nothing changes there (METHODS section 11). */
import type { Checked, Problem } from '../problem.js'
import { type Border, borderOfPaths, type PairPath } from './border.js'
import { edgeLengthMetres } from './geodesy.js'
import { type Extent, levelCurve } from './levelCurve.js'
import { coincidentMetres } from './nearness.js'
import { turnsTo } from './rings.js'
import { nearestEdges } from './segmentTree.js'
import { locateInZones, noZone } from './zoneGrid.js'

export type BorderSide = 'untreated' | 'treated'

export interface ShiftedBorder {
  /**
   * Its zones are `near`, the land within the distance, and `far`, all other land. Whichever is nearer to the treated
   * land counts as treated, so that x still grows towards it. Units of the side alone belong here.
   */
  readonly border: Border
  /** How far the curve, as drawn, strays from the distance: the most at its vertices and their middles, in metres. */
  readonly errorMetres: number
}

/** The land along the curve is looked at every this share of the distance: slivers narrower may be missed. */
const lookShare = 1 / 20

/**
 * The curve `metres` from the border (all its pieces), where it runs through land of one side. Which polygon holds a unit
 * tells whether it is near or far, and distances are to the curve, which don't follow from the unit's distance to the
 * border where this turns or comes back. Problems: no land of the side lies so far away, borders between doses or of equal
 * status (no land is on one side of all of them), a border too long for the distance, half round the earth or near a pole.
 * Throws RangeError where metres or the piece length is not above 0.
 */
export function shiftedBorder(
  border: Border,
  side: BorderSide,
  metres: number,
  pieceMetres: number,
): Checked<ShiftedBorder> {
  if (!(metres > 0 && metres < Infinity)) throw new RangeError(`metres must be above 0: got ${metres}`)
  if (!(pieceMetres > 0)) throw new RangeError(`pieceMetres must be above 0: got ${pieceMetres}`)
  const { file } = border.zones
  const refuse = (found: string, todo: string): Checked<ShiftedBorder> => {
    const problem: Problem = { file, what: `a line ${shown(metres)} m into ${side} land`, found, todo }
    return { ok: false, problems: [problem] }
  }
  if (border.doses || border.isEqualStatus)
    return refuse('a zone may lie on either side of different borders', 'shift lines of treated and untreated zones')
  const extent = extentOf(border)
  if (!(extent.east - extent.west < 180 && extent.south >= -80 && extent.north <= 80))
    return refuse('the border spans half the earth or comes near a pole', 'study a part of it')
  const rings = levelCurve(border.tree, extent, metres)
  if (!rings) return refuse('the border is too long for a line so near', 'take a longer distance')
  const isLand = landTest(border, side)
  const stretches = rings.flatMap((ring) => stretchesOnLand(ring, isLand, metres))
  if (stretches.length === 0) return refuse('there is no such land', 'take a shorter distance')
  const [untreated, treated] = side === 'untreated' ? [1, 0] : [0, 1]
  const paths = stretches.map((points): PairPath => ({ untreated, treated, points }))
  const made = borderOfPaths(
    // a place within an odd number of rings is near, so that every ring may stand by itself
    { file, names: ['near'], polygons: [rings.map((ring) => [ring])], properties: [{}] },
    {
      roles: { treatedZone: Uint8Array.of(untreated, treated), outsideZone: 1 },
      names: ['near', 'far'],
      order: [0],
      metres: coincidentMetres,
    },
    pieceMetres,
    paths,
  )
  return { ok: true, value: { border: made, errorMetres: errorOf(made, border, metres) } }
}

function shown(metres: number): number {
  return Number(metres.toPrecision(4))
}

/** Is each place in zones of the side's status, and of no other? */
function landTest({ grid, treatedZone, outsideZone }: Border, side: BorderSide) {
  const wanted = side === 'treated' ? 1 : 0
  return (points: readonly Point[]): boolean[] => {
    const zones = locateInZones(
      grid,
      Float64Array.from(points, ([lon]) => lon),
      Float64Array.from(points, ([, lat]) => lat),
    )
    return Array.from(zones, (zone) => {
      const own = zone === noZone ? outsideZone : zone
      return own >= 0 && treatedZone[own] === wanted
    })
  }
}

type Point = readonly [number, number]
type LandTest = (points: readonly Point[]) => boolean[]

/** The stretches of a closed ring on land, cut where land begins and ends to about a millimetre. */
function stretchesOnLand(ring: readonly (readonly number[])[], isLand: LandTest, metres: number): Point[][] {
  const { points, isVertex } = lookedAt(ring, metres * lookShare)
  const on = isLand(points)
  const count = points.length
  const start = on.indexOf(false)
  if (start < 0) return [[...points.filter((_, i) => isVertex[i]), points[0]]]
  const at = (k: number) => (start + k) % count
  const changes: number[] = []
  for (let k = 0; k < count; k++) if (on[at(k)] !== on[at(k + 1)]) changes.push(k)
  const cuts = shores(
    changes.map((k) => [points[at(k)], points[at(k + 1)]] as const),
    changes.map((k) => on[at(k)]),
    isLand,
  )
  const stretches: Point[][] = []
  for (let c = 0; c + 1 < changes.length; c += 2) {
    const stretch: Point[] = [cuts[c]]
    for (let k = changes[c] + 1; k <= changes[c + 1]; k++) if (isVertex[at(k)]) stretch.push(points[at(k)])
    stretches.push([...stretch, cuts[c + 1]])
  }
  return stretches
}

/** Vertices of a ring, not closed, and points between them no farther apart than `step`. */
function lookedAt(ring: readonly (readonly number[])[], step: number): { points: Point[]; isVertex: boolean[] } {
  const points: Point[] = []
  const isVertex: boolean[] = []
  for (let i = 0; i + 1 < ring.length; i++) {
    const [[lon0, lat0], [lon1, lat1]] = [ring[i], ring[i + 1]]
    const steps = Math.max(1, Math.ceil(edgeLengthMetres(lon0, lat0, lon1, lat1) / step))
    for (let s = 0; s < steps; s++) {
      points.push([lon0 + ((lon1 - lon0) * s) / steps, lat0 + ((lat1 - lat0) * s) / steps])
      isVertex.push(s === 0)
    }
  }
  return { points, isVertex }
}

/** Where land begins or ends between each two points, by halving; the place on land. */
function shores(ends: readonly (readonly [Point, Point])[], isFirstOn: readonly boolean[], isLand: LandTest): Point[] {
  const spans = ends.map(([from, to], i) => (isFirstOn[i] ? { on: from, off: to } : { on: to, off: from }))
  for (let step = 0; step < 40; step++) {
    const middles = spans.map(({ on, off }): Point => [(on[0] + off[0]) / 2, (on[1] + off[1]) / 2])
    isLand(middles).forEach((isOn, i) => {
      if (isOn) spans[i].on = middles[i]
      else spans[i].off = middles[i]
    })
  }
  return spans.map(({ on }) => on)
}

function errorOf({ edges }: Border, border: Border, metres: number): number {
  const { lon0, lat0, lon1, lat1 } = edges
  const halfway = (from: Float64Array, to: Float64Array) => from.map((value, e) => (value + to[e]) / 2)
  return [
    nearestEdges(border.tree, lon0, lat0),
    nearestEdges(border.tree, halfway(lon0, lon1), halfway(lat0, lat1)),
  ].reduce(
    (most, { distanceMetres }) =>
      distanceMetres.reduce((worst, distance) => Math.max(worst, Math.abs(distance - metres)), most),
    0,
  )
}

/** Longitudes turned to those of the first edge. */
function extentOf({ edges: { lon0, lat0, lon1, lat1 } }: Border): Extent {
  let [west, east, south, north] = [Infinity, -Infinity, Infinity, -Infinity]
  for (let e = 0; e < lon0.length; e++) {
    const turns = turnsTo(lon0[e], lon0[0])
    west = Math.min(west, lon0[e] + turns, lon1[e] + turns)
    east = Math.max(east, lon0[e] + turns, lon1[e] + turns)
    south = Math.min(south, lat0[e], lat1[e])
    north = Math.max(north, lat0[e], lat1[e])
  }
  return { west, east, south, north }
}
