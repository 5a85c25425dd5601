import { earthCentred, equatorialMetres } from '../math/index.js'

/** Straight lon/lat edges (RFC 7946), WGS 84 degrees, as written: from 179 to -179 runs through 0, from 179 to 181 crosses 180°. */
export interface Edges {
  readonly lon0: Float64Array
  readonly lat0: Float64Array
  readonly lon1: Float64Array
  readonly lat1: Float64Array
}

/** Stretches of edges, in the order of the edges: from fraction `start` to fraction `end` of edge `edge`. */
export interface Stretches {
  readonly edge: Int32Array
  readonly start: Float64Array
  readonly end: Float64Array
}

/** Longest stretch. At this length a parabola leaves the curve by less than 1e-6 m below 60° of latitude. */
const longestMetres = 1000
const parabolaErrorMetres = 1e-6
const metresPerDegree = (equatorialMetres * 1.004 * Math.PI) / 180

/**
 * Cuts edges into stretches short enough for a parabola through start, middle and end to be the curve on the ground
 * within 1e-6 m: equal parts of at most 1 km, halved again where the ground curve bends faster (near a pole).
 */
export function splitEdges(edges: Edges): Stretches {
  const list = { count: 0, edge: new Int32Array(1024), start: new Float64Array(1024), end: new Float64Array(1024) }
  const points = new Float64Array(15)
  for (let edge = 0; edge < edges.lon0.length; edge++) {
    const parts = equalParts(edges, edge)
    const bends = Math.max(Math.abs(edges.lat0[edge]), Math.abs(edges.lat1[edge])) > 60
    for (let part = 0; part < parts; part++) {
      const start = part / parts
      const end = (part + 1) / parts
      if (bends) halveWhileBent(edges, edge, start, end, 40, points, list)
      else append(list, edge, start, end)
    }
  }
  return {
    edge: list.edge.slice(0, list.count),
    start: list.start.slice(0, list.count),
    end: list.end.slice(0, list.count),
  }
}

interface GrowingStretches {
  count: number
  edge: Int32Array
  start: Float64Array
  end: Float64Array
}

function append(list: GrowingStretches, edge: number, start: number, end: number): void {
  if (list.count === list.edge.length) {
    list.edge = grown(list.edge, new Int32Array(2 * list.count))
    list.start = grown(list.start, new Float64Array(2 * list.count))
    list.end = grown(list.end, new Float64Array(2 * list.count))
  }
  list.edge[list.count] = edge
  list.start[list.count] = start
  list.end[list.count++] = end
}

function grown<T extends Int32Array | Float64Array>(old: T, larger: T): T {
  larger.set(old)
  return larger
}

/** Number of equal parts that are surely no longer than the longest stretch. */
function equalParts(edges: Edges, edge: number): number {
  const lat0 = edges.lat0[edge]
  const lat1 = edges.lat1[edge]
  const lowestLat = lat0 * lat1 <= 0 ? 0 : Math.min(Math.abs(lat0), Math.abs(lat1))
  const north = (lat1 - lat0) * metresPerDegree
  const east = (edges.lon1[edge] - edges.lon0[edge]) * metresPerDegree * Math.cos((lowestLat * Math.PI) / 180)
  return Math.max(1, Math.ceil(Math.sqrt(north * north + east * east) / longestMetres))
}

/** The parabola is compared with the curve at a quarter and three quarters, where their difference is largest. */
function halveWhileBent(
  edges: Edges,
  edge: number,
  start: number,
  end: number,
  depth: number,
  points: Float64Array,
  list: GrowingStretches,
): void {
  for (let k = 0; k < 5; k++) edgePoint(edges, edge, start + (k / 4) * (end - start), points, 3 * k)
  let bent = false
  for (let axis = 0; axis < 3; axis++) {
    const first = points[axis]
    const middle = points[6 + axis]
    const last = points[12 + axis]
    if (Math.abs(points[3 + axis] - (3 * first + 6 * middle - last) / 8) > parabolaErrorMetres) bent = true
    if (Math.abs(points[9 + axis] - (3 * last + 6 * middle - first) / 8) > parabolaErrorMetres) bent = true
  }
  if (!bent || depth === 0) {
    append(list, edge, start, end)
    return
  }
  const middle = (start + end) / 2
  halveWhileBent(edges, edge, start, middle, depth - 1, points, list)
  halveWhileBent(edges, edge, middle, end, depth - 1, points, list)
}

/** Earth-centred point at a fraction of an edge; fractions 0 and 1 give exactly the ends as written. */
export function edgePoint(edges: Edges, edge: number, fraction: number, out: Float64Array, at: number): void {
  earthCentred(
    along(edges.lon0[edge], edges.lon1[edge], fraction),
    along(edges.lat0[edge], edges.lat1[edge], fraction),
    out,
    at,
  )
}

/** Straight interpolation, exact at both ends. */
export function along(from: number, to: number, fraction: number): number {
  return fraction < 0.5 ? from + fraction * (to - from) : to - (1 - fraction) * (to - from)
}
