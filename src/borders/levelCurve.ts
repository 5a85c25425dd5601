/**
 * The curve at one distance from a border, as closed rings with the land within the distance on their left. Squares of
 * a grid in degrees are halved where the curve may pass, and left alone elsewhere: distance changes by no more than one
 * metre a metre, so none is missed. In the last squares the curve is drawn from edge to edge (marching squares: Lorensen &
 * Cline 1987), each point moved onto it, and long chords are bent until they are on it, too. It keeps within a
 * thousandth of the distance, but where two of its arms all but touch the last squares decide: there it may be 3 % off.
 */
import { bentRings } from './levelCurveBends.js'
import { localPlane } from './localPlane.js'
import { nearestEdges, type SegmentTree } from './segmentTree.js'

export type Ring = readonly (readonly [number, number])[]

/** Sides of the last squares as a share of the distance. */
const squareShare = 1 / 16
/** Points of the curve are this near to it, as a share of the distance. */
const closeShare = 1e-5
/** More of the last squares than this are too many. */
export const mostSquares = 1_000_000

export interface Extent {
  readonly west: number
  readonly east: number
  readonly south: number
  readonly north: number
}

interface Grid {
  readonly west: number
  readonly south: number
  readonly lonStep: number
  readonly latStep: number
}

/**
 * `extent`: of the border, in degrees, within 180 degrees of longitude and 85 of latitude. Undefined where it takes too
 * many squares. Rings are closed; longitudes are near those of the extent.
 */
export function levelCurve(tree: SegmentTree, extent: Extent, metres: number): Ring[] | undefined {
  const { metresPerLon, metresPerLat } = localPlane(0, (extent.south + extent.north) / 2)
  const grid = {
    lonStep: (metres * squareShare) / metresPerLon,
    latStep: (metres * squareShare) / metresPerLat,
    // no lattice line on the border's own round coordinates
    west: extent.west - (metres * 2.0123) / localPlane(0, Math.max(-extent.south, extent.north)).metresPerLon,
    south: extent.south - (metres * 1.5123) / metresPerLat,
  }
  const beyond: Beyond = (lon: Float64Array, lat: Float64Array) =>
    nearestEdges(tree, lon, lat).distanceMetres.map((distance) => distance - metres)
  const squares = squaresOnCurve(grid, extent, beyond)
  if (!squares) return undefined
  return bentRings(ringsOf(grid, squares, metres, beyond), metres, beyond)
}

/** Metres beyond the distance, negative within it. */
export type Beyond = (lon: Float64Array, lat: Float64Array) => Float64Array

interface Squares {
  readonly column: Float64Array
  readonly row: Float64Array
}

function squaresOnCurve(grid: Grid, { east, north }: Extent, beyond: Beyond): Squares | undefined {
  const wide = (east - grid.west) / grid.lonStep + 3 / squareShare
  const high = (north - grid.south) / grid.latStep + 2 / squareShare
  let size = 2 ** Math.ceil(Math.log2(Math.max(wide, high)))
  let column = [0]
  let row = [0]
  for (;;) {
    const kept = passedBy(grid, column, row, size, beyond)
    if (size === 1)
      return { column: Float64Array.from(kept, (k) => column[k]), row: Float64Array.from(kept, (k) => row[k]) }
    if (4 * kept.length > mostSquares) return undefined
    size /= 2
    const half = size
    const quarters = (of: readonly number[], offsets: readonly number[]) =>
      kept.flatMap((k) => offsets.map((offset) => of[k] + offset * half))
    ;[column, row] = [quarters(column, [0, 1, 0, 1]), quarters(row, [0, 0, 1, 1])]
  }
}

/** The squares that the curve may pass: their middle is no farther from it than their corners are from the middle. */
function passedBy(grid: Grid, column: readonly number[], row: readonly number[], size: number, beyond: Beyond) {
  const lon = Float64Array.from(column, (c) => grid.west + (c + size / 2) * grid.lonStep)
  const lat = Float64Array.from(row, (r) => grid.south + (r + size / 2) * grid.latStep)
  const half = (size / 2) * grid.latStep
  const kept: number[] = []
  const far = beyond(
    lon,
    lat.map((y) => Math.min(90, Math.max(-90, y))),
  )
  for (let k = 0; k < lon.length; k++) {
    const widest = localPlane(0, Math.max(0, Math.abs(lat[k]) - half)).metresPerLon
    const reach = Math.hypot((size / 2) * grid.lonStep * widest, half * 111_700)
    if (Math.abs(far[k]) <= 1.001 * reach) kept.push(k)
  }
  return kept
}

/** Where the curve crosses a side of a square: lattice sides are numbered 2·node, plus 1 for the one that runs north. */
function ringsOf(grid: Grid, { column, row }: Squares, metres: number, beyond: Beyond): [number, number][][] {
  const width = 2 ** 26
  const nodeKey = (c: number, r: number) => r * width + c
  const nodes = new Map<number, number>()
  const [lon, lat]: [number[], number[]] = [[], []]
  for (let k = 0; k < column.length; k++) {
    for (const [dc, dr] of [
      [0, 0],
      [1, 0],
      [0, 1],
      [1, 1],
    ]) {
      const key = nodeKey(column[k] + dc, row[k] + dr)
      if (nodes.has(key)) continue
      nodes.set(key, lon.length)
      lon.push(grid.west + (column[k] + dc) * grid.lonStep)
      lat.push(grid.south + (row[k] + dr) * grid.latStep)
    }
  }
  const value = beyond(Float64Array.from(lon), Float64Array.from(lat))
  const middle = beyond(
    column.map((c) => grid.west + (c + 0.5) * grid.lonStep),
    row.map((r) => grid.south + (r + 0.5) * grid.latStep),
  )
  const sides = new Map<number, { from: number; to: number; index: number }>()
  const next: number[] = []
  for (let k = 0; k < column.length; k++) {
    const corners = [
      [0, 0],
      [1, 0],
      [1, 1],
      [0, 1],
    ].map(([dc, dr]) => nodes.get(nodeKey(column[k] + dc, row[k] + dr)) as number)
    // sides south, east, north, west; anticlockwise round the square
    const sideKeys = [
      2 * nodeKey(column[k], row[k]),
      2 * nodeKey(column[k] + 1, row[k]) + 1,
      2 * nodeKey(column[k], row[k] + 1),
      2 * nodeKey(column[k], row[k]) + 1,
    ]
    const sideAt = (s: number): number => {
      const known = sides.get(sideKeys[s])
      if (known) return known.index
      const index = sides.size
      const [a, b] = [corners[s], corners[(s + 1) % 4]]
      sides.set(sideKeys[s], { from: Math.min(a, b), to: Math.max(a, b), index })
      return index
    }
    for (const [start, end] of crossings(
      corners.map((n) => value[n] < 0),
      middle[k] < 0,
    ))
      next[sideAt(start)] = sideAt(end)
  }
  const points = pointsOnCurve([...sides.values()], lon, lat, value, metres, beyond)
  return linked(next, points)
}

/**
 * Sides of a square that the curve runs between, from and to, the land within on its left: walking round the square
 * anticlockwise, the curve comes in where land within ends and goes out where it begins.
 */
function crossings(isWithin: readonly boolean[], isMiddleWithin: boolean): [number, number][] {
  const ends = [0, 1, 2, 3].filter((s) => isWithin[s] && !isWithin[(s + 1) % 4])
  const begins = [0, 1, 2, 3].filter((s) => !isWithin[s] && isWithin[(s + 1) % 4])
  if (ends.length === 0) return []
  if (ends.length === 1) return [[ends[0], begins[0]]]
  // two corners across are within: joined in the middle or not
  return ends.map((end) => [end, (end + (isMiddleWithin ? 1 : 3)) % 4])
}

/** The point of each side on the curve: false position, the kept end's value halved (Illinois). */
function pointsOnCurve(
  sides: readonly { readonly from: number; readonly to: number }[],
  lon: readonly number[],
  lat: readonly number[],
  value: Float64Array,
  metres: number,
  beyond: Beyond,
): [number, number][] {
  const low = sides.map(({ from }) => ({ t: 0, f: value[from] }))
  const high = sides.map(({ to }) => ({ t: 1, f: value[to] }))
  const t = new Float64Array(sides.length)
  const at = (values: readonly number[], s: number) =>
    values[sides[s].from] + t[s] * (values[sides[s].to] - values[sides[s].from])
  let open = sides.map((_, s) => s)
  for (let step = 0; step < 60 && open.length > 0; step++) {
    for (const s of open) t[s] = low[s].t + ((high[s].t - low[s].t) * low[s].f) / (low[s].f - high[s].f)
    const f = beyond(
      Float64Array.from(open, (s) => at(lon, s)),
      Float64Array.from(open, (s) => at(lat, s)),
    )
    open = open.filter((s, i) => {
      if (Math.abs(f[i]) <= closeShare * metres) return false
      const [own, other] = f[i] < 0 === low[s].f < 0 ? [low[s], high[s]] : [high[s], low[s]]
      own.t = t[s]
      own.f = f[i]
      other.f /= 2
      return true
    })
  }
  return sides.map((_, s) => [at(lon, s), at(lat, s)])
}

/** Closed rings by following each point to the next. */
function linked(next: readonly number[], points: readonly [number, number][]): [number, number][][] {
  const isDone = new Uint8Array(points.length)
  const rings: [number, number][][] = []
  for (let start = 0; start < points.length; start++) {
    if (isDone[start] || next[start] === undefined) continue
    const ring: [number, number][] = []
    for (let s = start; !isDone[s]; s = next[s]) {
      isDone[s] = 1
      ring.push(points[s])
    }
    ring.push(ring[0])
    rings.push(ring)
  }
  return rings
}
