/** Lines on one side, everywhere as far from the border: nothing changes there (METHODS section 11). */
import type { Checked, Problem } from '../problem.js'
import { type Border, borderOfPaths, type PairPath } from './border.js'
import { edgeLengthMetres } from './geodesy.js'
import type { MultiPolygonCoords } from './geojson.js'
import { coincidentMetres } from './nearness.js'
import { nearestEdges } from './segmentTree.js'
import { landWithin } from './shiftedBuffer.js'
import { locateInZones, noZone } from './zoneGrid.js'

export type BorderSide = 'untreated' | 'treated'

export interface ShiftedBorder {
  /**
   * Its zones are `near`, the land within the distance, and `far`, all other land. Whichever is nearer to the treated
   * land counts as treated, so that x still grows towards it. Units of the side alone belong here.
   */
  readonly border: Border
  /** The farthest that a vertex of the curve lies from where it should, in metres. */
  readonly errorMetres: number
}

/** More edges than this are too many to draw a distance around. */
export const mostShiftedEdges = 200_000
/** A curve that is farther off than this share of the distance is none. */
const mostErrorShare = 0.02
/** The land along the curve is looked at every this share of the distance: slivers narrower may be missed. */
const lookShare = 1 / 20

/**
 * The curve `metres` from the border (all its pieces), where it runs through land of one side. Which polygon holds a unit
 * tells whether it is near or far, and distances are to the curve: neither follows from the unit's distance to the border
 * where this turns or comes back. Problems: no land of the side lies so far away, borders between doses or of equal
 * status (no land is on one side of all of them), too many edges, a shape that can't be drawn.
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
  if (border.pieceOfEdge.length > mostShiftedEdges)
    return refuse(`the border has ${border.pieceOfEdge.length} edges`, 'simplify the zones')
  let near: MultiPolygonCoords
  try {
    near = landWithin(
      border.pieces.map(({ coordinates }) => coordinates),
      metres,
    )
  } catch (fault) {
    return refuse(`it can't be drawn (${fault instanceof Error ? fault.message : fault})`, 'try another distance')
  }
  const isLand = landTest(border, side)
  const stretches = near.flatMap((polygon) => polygon.flatMap((ring) => stretchesOnLand(ring, isLand, metres)))
  if (stretches.length === 0) return refuse('there is no such land', 'take a shorter distance')
  const [untreated, treated] = side === 'untreated' ? [1, 0] : [0, 1]
  const paths = stretches.map((points): PairPath => ({ untreated, treated, points }))
  const made = borderOfPaths(
    { file, names: ['near'], polygons: [near], properties: [{}] },
    {
      roles: { treatedZone: Uint8Array.of(untreated, treated), outsideZone: 1 },
      names: ['near', 'far'],
      order: [0],
      metres: coincidentMetres,
    },
    pieceMetres,
    paths,
  )
  const errorMetres = errorOf(made, border, metres)
  if (!(errorMetres <= mostErrorShare * metres))
    return refuse(`the curve drawn is ${shown(errorMetres)} m off`, 'try another distance')
  return { ok: true, value: { border: made, errorMetres } }
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
  const { distanceMetres } = nearestEdges(border.tree, edges.lon0, edges.lat0)
  return distanceMetres.reduce((most, distance) => Math.max(most, Math.abs(distance - metres)), 0)
}
