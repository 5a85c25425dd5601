/**
 * The nearest units of each unit, by a k-d tree in earth-centred metres (Bentley 1975, CACM 18).
 * Nearness is by the straight line through the earth, which orders places as the way on the ground does but for one part
 * in 10⁵ at 100 km. n log n, also where many units stand at one place.
 */
import { earthCentred } from '../math/index.js'

/** The neighbours of unit i stand from start[i] to start[i + 1], ascending. */
export interface NearestUnits {
  readonly start: Int32Array
  readonly other: Int32Array
}

interface Tree {
  /** Units so ordered that the middle of every range splits it along its widest side. */
  readonly order: Int32Array
  /** Earth-centred metres by unit, three each. */
  readonly centred: Float64Array
  /** Side (0 to 2) by the middle of the range; -1 in leaves. */
  readonly side: Int8Array
}

const leafSize = 8
/** Places closer together in distance than this are equally far. */
const tieMetres = 1e-8

/** The `nearest` nearest of each unit, all ties at the last distance taken. lon, lat: degrees, none missing. */
export function nearestUnits(lonDegrees: Float64Array, latDegrees: Float64Array, nearest: number): NearestUnits {
  const count = lonDegrees.length
  if (latDegrees.length !== count) throw new RangeError(`lon has ${count} units, lat has ${latDegrees.length}`)
  if (!(Number.isInteger(nearest) && nearest >= 1 && nearest < count))
    throw new RangeError(`nearest must be a whole number from 1 to ${count - 1}: got ${nearest}`)
  const tree = buildTree(lonDegrees, latDegrees)
  const start = new Int32Array(count + 1)
  const other: number[] = []
  const squares = new Float64Array(nearest)
  for (let unit = 0; unit < count; unit++) {
    squares.fill(Number.POSITIVE_INFINITY)
    const farthest = nearestSquares(tree, unit, squares)
    const own = unitsWithin(tree, unit, Math.sqrt(farthest) + tieMetres)
    for (const found of own.sort((a, b) => a - b)) other.push(found)
    start[unit + 1] = other.length
  }
  return { start, other: Int32Array.from(other) }
}

function buildTree(lonDegrees: Float64Array, latDegrees: Float64Array): Tree {
  const count = lonDegrees.length
  const centred = new Float64Array(3 * count)
  for (let i = 0; i < count; i++) {
    if (!(Math.abs(latDegrees[i]) <= 90 && Math.abs(lonDegrees[i]) < Number.POSITIVE_INFINITY))
      throw new RangeError(`unit ${i} has no position`)
    earthCentred(lonDegrees[i], latDegrees[i], centred, 3 * i)
  }
  const tree = { order: Int32Array.from({ length: count }, (_, i) => i), centred, side: new Int8Array(count).fill(-1) }
  split(tree, 0, count)
  return tree
}

function split(tree: Tree, from: number, to: number): void {
  if (to - from <= leafSize) return
  const side = widestSide(tree, from, to)
  const middle = (from + to) >> 1
  selectMiddle(tree, side, from, to - 1, middle)
  tree.side[middle] = side
  split(tree, from, middle)
  split(tree, middle + 1, to)
}

function widestSide({ order, centred }: Tree, from: number, to: number): number {
  let widest = 0
  let most = -1
  for (let side = 0; side < 3; side++) {
    let [low, high] = [Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY]
    for (let i = from; i < to; i++) {
      const value = centred[3 * order[i] + side]
      if (value < low) low = value
      if (value > high) high = value
    }
    if (high - low > most) {
      most = high - low
      widest = side
    }
  }
  return widest
}

/** Rearranges order[from … to] so that the wanted place holds what sorting would put there (Hoare's selection). */
function selectMiddle({ order, centred }: Tree, side: number, from: number, to: number, wanted: number): void {
  while (from < to) {
    const pivot = centred[3 * order[(from + to) >> 1] + side]
    let [low, high] = [from, to]
    while (low <= high) {
      while (centred[3 * order[low] + side] < pivot) low++
      while (centred[3 * order[high] + side] > pivot) high--
      if (low > high) break
      const swapped = order[low]
      order[low++] = order[high]
      order[high--] = swapped
    }
    if (wanted <= high) to = high
    else if (wanted >= low) from = low
    else return
  }
}

/** Fills `squares` (ascending) with the squared distances of the nearest other units; the last is returned. */
function nearestSquares(tree: Tree, unit: number, squares: Float64Array): number {
  const last = squares.length - 1
  search(
    tree,
    unit,
    0,
    tree.order.length,
    () => squares[last],
    (_, square) => {
      let at = last
      for (; at > 0 && squares[at - 1] > square; at--) squares[at] = squares[at - 1]
      squares[at] = square
    },
  )
  return squares[last]
}

function unitsWithin(tree: Tree, unit: number, metres: number): number[] {
  const found: number[] = []
  search(
    tree,
    unit,
    0,
    tree.order.length,
    () => metres * metres,
    (other) => found.push(other),
  )
  return found
}

/** Visits every other unit whose squared distance is below the limit at the time. */
function search(
  tree: Tree,
  unit: number,
  from: number,
  to: number,
  limit: () => number,
  visit: (other: number, square: number) => void,
): void {
  const { order, centred, side } = tree
  const visitOne = (i: number) => {
    const [at, own] = [3 * order[i], 3 * unit]
    const [dx, dy, dz] = [
      centred[at] - centred[own],
      centred[at + 1] - centred[own + 1],
      centred[at + 2] - centred[own + 2],
    ]
    const square = dx * dx + dy * dy + dz * dz
    if (order[i] !== unit && square < limit()) visit(order[i], square)
  }
  if (to - from <= leafSize) {
    for (let i = from; i < to; i++) visitOne(i)
    return
  }
  const middle = (from + to) >> 1
  const beyond = centred[3 * unit + side[middle]] - centred[3 * order[middle] + side[middle]]
  const isBefore = beyond < 0
  search(tree, unit, isBefore ? from : middle + 1, isBefore ? middle : to, limit, visit)
  visitOne(middle)
  if (beyond * beyond < limit()) search(tree, unit, isBefore ? middle + 1 : from, isBefore ? to : middle, limit, visit)
}
