import { orient2d } from 'robust-predicates'

/**
 * Whether edges pass beside a point, decided as if the point were moved by (ε, ε²): east by something infinitely small,
 * then north by something infinitely smaller. So no point is ever on an edge or level with a vertex, zones that share
 * edges share no point, and no point between them is lost. Signs are exact (Shewchuk 1997, adaptive predicates).
 * Source of the idea: Edelsbrunner & Mücke (1990), Simulation of simplicity.
 */

/** Lower end first, so that an edge has the same sign whichever zone it comes from. */
export interface UpwardEdges {
  readonly x0: Float64Array
  readonly y0: Float64Array
  readonly x1: Float64Array
  readonly y1: Float64Array
}

/** Does the edge cross the ray that runs east from (x, y)? */
export function crossesEast({ x0, y0, x1, y1 }: UpwardEdges, edge: number, x: number, y: number): boolean {
  if (y < y0[edge] || y >= y1[edge]) return false
  const startX = x0[edge]
  const endX = x1[edge]
  if (x < startX && x < endX) return true
  if (x >= startX && x >= endX) return false
  return orient2d(startX, y0[edge], endX, y1[edge], x, y) < 0
}

/** Does the edge cross the ray that runs north from (x, y)? */
export function crossesNorth({ x0, y0, x1, y1 }: UpwardEdges, edge: number, x: number, y: number): boolean {
  const startX = x0[edge]
  const endX = x1[edge]
  if (startX > x === endX > x) return false
  if (y < y0[edge]) return true
  if (y >= y1[edge]) return false
  const clockwise = orient2d(startX, y0[edge], endX, y1[edge], x, y)
  // on the edge: the step east puts the point below a rising edge, above a falling one
  return endX > startX ? clockwise >= 0 : clockwise < 0
}
