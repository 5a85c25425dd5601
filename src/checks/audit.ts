/**
 * Does something jump where the line is said to be, or elsewhere? The place is looked for in one half of the units and
 * tested in the other, so that the search costs the test nothing. A local line on each side of every candidate place,
 * all units alike within the width, as a break at an unknown place is looked for (Porter & Yu 2015, J. Econometrics 189).
 */
import { studentTwoSidedP } from '../math/index.js'

export interface AuditHalf {
  /** Signed distances, ascending. */
  readonly x: Float64Array
  readonly y: Float64Array
}

export interface Audit {
  readonly ok: true
  /** Where the first half has its clearest break, in units of x; 0 is where the line is said to be. */
  readonly at: number
  /** In the other half: the jump there, and its p. */
  readonly jump: number
  readonly p: number
  /** In the other half: whether the break there is clearer than that at 0, where both p may be too small to tell. */
  readonly isClearer: boolean
  /** In the other half: the jump at 0, and its p. */
  readonly jumpAtLine: number
  readonly pAtLine: number
  /** Distance between candidates: a break nearer to 0 than this is at the line. */
  readonly step: number
}

export type AuditOutcome = Audit | { readonly ok: false; readonly reason: string }

const fewestUnits = 20
const candidates = 101
/** Width of the fit on each side of a place, as a share of the units of the half. */
const widthShare = 0.3
/** No place is looked at with less than this share of the units on a side. */
const edgeShare = 0.08

/** `search` and `test`: two halves of the units of one line, without missing values. */
export function auditLine(search: AuditHalf, test: AuditHalf): AuditOutcome {
  const n = search.x.length
  if (n < 4 * fewestUnits || test.x.length < 4 * fewestUnits)
    return { ok: false, reason: `only ${n + test.x.length} units, ${8 * fewestUnits} are needed` }
  const sums = prefixSums(search)
  const width = Math.max(fewestUnits, Math.floor(widthShare * n))
  const edge = Math.max(fewestUnits, Math.floor(edgeShare * n))
  const [low, high] = [search.x[edge], search.x[n - 1 - edge]]
  if (!(low < 0 && high > 0)) return { ok: false, reason: 'too few units on one side to look for a break' }
  const step = (high - low) / (candidates - 1)
  let best = { at: Number.NaN, t: -1 }
  for (const at of placesOf(low, high, step)) {
    const found = breakAt(search, sums, at, width)
    if (!found) continue
    const t = Math.abs(found.t)
    // of places that break as clearly, as within a gap of the score, that nearest to the line
    if (t > best.t || (t === best.t && Math.abs(at) < Math.abs(best.at))) best = { at, t }
  }
  const inTest = prefixSums(test)
  const testWidth = Math.max(fewestUnits, Math.floor(widthShare * test.x.length))
  const there = Number.isNaN(best.at) ? undefined : breakAt(test, inTest, best.at, testWidth)
  const here = breakAt(test, inTest, 0, testWidth)
  if (!there || !here) return { ok: false, reason: 'the values near the line do not vary' }
  return {
    ok: true,
    at: best.at,
    jump: there.jump,
    p: studentTwoSidedP(there.t, there.freedom),
    isClearer: Math.abs(there.t) > Math.abs(here.t),
    jumpAtLine: here.jump,
    pAtLine: studentTwoSidedP(here.t, here.freedom),
    step,
  }
}

/** Candidates in equal steps, with 0 among them. */
function placesOf(low: number, high: number, step: number): number[] {
  const places: number[] = []
  for (let k = Math.ceil(low / step); k * step <= high; k++) places.push(k * step || 0)
  return places
}

interface Sums {
  readonly x: Float64Array
  readonly xx: Float64Array
  readonly y: Float64Array
  readonly xy: Float64Array
  readonly yy: Float64Array
}

function prefixSums({ x, y }: AuditHalf): Sums {
  const n = x.length
  const [sx, sxx, sy, sxy, syy] = Array.from({ length: 5 }, () => new Float64Array(n + 1))
  for (let i = 0; i < n; i++) {
    sx[i + 1] = sx[i] + x[i]
    sxx[i + 1] = sxx[i] + x[i] * x[i]
    sy[i + 1] = sy[i] + y[i]
    sxy[i + 1] = sxy[i] + x[i] * y[i]
    syy[i + 1] = syy[i] + y[i] * y[i]
  }
  return { x: sx, xx: sxx, y: sy, xy: sxy, yy: syy }
}

/**
 * The jump between the lines through `width` units on either side of a place; undefined where all values are alike. Where
 * everyone takes up on one side and no one on the other, nothing is left over and t is infinite.
 */
function breakAt({ x }: AuditHalf, sums: Sums, at: number, width: number) {
  const middle = firstAtOrAbove(x, at)
  if (middle < fewestUnits || x.length - middle < fewestUnits) return undefined
  const left = lineThrough(sums, Math.max(0, middle - width), middle, at)
  const right = lineThrough(sums, middle, Math.min(x.length, middle + width), at)
  if (!left || !right) return undefined
  const variance = left.variance + right.variance
  const jump = right.level - left.level
  if (!(variance > 0) && !(Math.abs(jump) > 1e-9 * (Math.abs(left.level) + Math.abs(right.level)))) return undefined
  return { jump, t: jump / Math.sqrt(variance), freedom: left.units + right.units - 4 }
}

/** Least squares on the units from one place to before another: the value at `at` and its variance. */
function lineThrough(sums: Sums, from: number, to: number, at: number) {
  const units = to - from
  const of = (values: Float64Array) => values[to] - values[from]
  const [meanX, meanY] = [of(sums.x) / units, of(sums.y) / units]
  const xx = of(sums.xx) - units * meanX * meanX
  const xy = of(sums.xy) - units * meanX * meanY
  const yy = of(sums.yy) - units * meanY * meanY
  if (!(xx > 1e-12 * Math.abs(of(sums.xx)))) return undefined
  const slope = xy / xx
  const residual = Math.max(0, yy - slope * xy) / (units - 2)
  return {
    units,
    level: meanY + slope * (at - meanX),
    variance: residual * (1 / units + (at - meanX) ** 2 / xx),
  }
}

function firstAtOrAbove(x: Float64Array, value: number): number {
  let [low, high] = [0, x.length]
  while (low < high) {
    const middle = (low + high) >> 1
    if (x[middle] < value) low = middle + 1
    else high = middle
  }
  return low
}
