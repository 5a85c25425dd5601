/**
 * Do units pile up on one side of a line? The density on either side of 0 from local polynomials fitted to the empirical
 * distribution function.
 * Source: Cattaneo, Jansson & Ma 2020, JASA 115; METHODS section 11.
 * f̂ is the slope at 0 of a kernel-weighted fit of F̂(x_i) on x_i, F̂ that of both sides together: of order 2 for the estimate
 * shown, of order 3 at the same bandwidth for the test, which takes out the bias of the former. f̂ = (1/n) Σ_j g(x_j) with
 * g(t) = Σ_{x_i ≥ t} a_i, a_i the weight of F̂(x_i), so that unit j has the influence (g(x_j) − f̂)/n + a_j (F̂(x_j) − fit(x_j)).
 */
import { type Kernel, kernelValue } from '../jump/index.js'
import { argsort, choleskyInPlace, choleskySolveInPlace, normalUpper } from '../math/index.js'

export interface DensityOptions {
  readonly kernel: Kernel
  /** Of both sides, in units of x; absent: a plug-in. */
  readonly bandwidth?: number
}

export interface DensityTest {
  readonly ok: true
  /** Units per unit of x over all units, order 2. */
  readonly untreated: number
  readonly treated: number
  /** Treated less untreated, order 3, with its standard error. */
  readonly difference: number
  readonly standardError: number
  readonly z: number
  readonly p: number
  /** Order 3 by side with standard errors, for ratios. */
  readonly corrected: { readonly untreated: Slope; readonly treated: Slope }
  readonly bandwidth: number
  readonly units: { readonly untreated: number; readonly treated: number }
}

export interface Slope {
  readonly density: number
  readonly standardError: number
}

export type DensityOutcome = DensityTest | { readonly ok: false; readonly reason: string }

const fewestUnits = 20
/** With fewer distinct values within the bandwidth on a side a score is taken for discrete. */
const fewestDistinct = 30

/** x: signed distances, finite, in any order; treated: 1 on the treated side, which settles units at 0. */
export function densityTest(x: Float64Array, treated: Uint8Array, options: DensityOptions): DensityOutcome {
  const n = x.length
  const sides = [0, 1].map((side) => sideOf(x, treated, side))
  const names = ['untreated', 'treated'] as const
  for (const [s, { t }] of sides.entries()) {
    if (t.length < 2 * fewestUnits) return { ok: false, reason: `only ${t.length} units on the ${names[s]} side` }
  }
  const reach = Math.min(...sides.map(({ t }) => t[t.length - 1]))
  const bandwidth = options.bandwidth ?? plugIn(sides, n, options.kernel, reach)
  const counts = sides.map(({ t }) => t.filter((value) => value < bandwidth).length)
  for (const s of [0, 1]) {
    if (counts[s] < fewestUnits)
      return { ok: false, reason: `only ${counts[s]} units near the line on the ${names[s]} side` }
    const near = sides[s].t.subarray(0, counts[s])
    if (new Set(near).size < fewestDistinct)
      return { ok: false, reason: 'the score has too few distinct values near the line' }
  }
  const second = sides.map((side) => slopeAt(side, n, 2, bandwidth, options.kernel))
  const third = sides.map((side) => slopeAt(side, n, 3, bandwidth, options.kernel))
  if ([...second, ...third].some((fit) => fit === undefined))
    return { ok: false, reason: 'the fits near the line are singular' }
  const [left, right] = third as Slope[]
  // the two sides share the −f̂/n of every unit
  const shared = (2 * left.density * right.density) / n
  const standardError = Math.sqrt(left.standardError ** 2 + right.standardError ** 2 + shared)
  const difference = right.density - left.density
  const z = difference / standardError
  return {
    ok: true,
    untreated: (second[0] as Slope).density,
    treated: (second[1] as Slope).density,
    difference,
    standardError,
    z,
    p: 2 * normalUpper(Math.abs(z)),
    corrected: { untreated: left, treated: right },
    bandwidth,
    units: { untreated: counts[0], treated: counts[1] },
  }
}

/** One side: distances ascending, and how many units of the other side lie below the line of the distribution function. */
interface DensitySide {
  readonly t: Float64Array
  /** +1 for the treated side. */
  readonly sign: 1 | -1
}

function sideOf(x: Float64Array, treated: Uint8Array, side: number): DensitySide {
  const distances = x.filter((_, i) => treated[i] === side).map(Math.abs)
  return { t: Float64Array.from(argsort(distances), (i) => distances[i]), sign: side === 1 ? 1 : -1 }
}

/**
 * Slope at 0 of the distribution function in t = |x|: the count of units of the side no farther than t, over all n; on the
 * untreated side that is 1 − F counted from the line, whose slope is the same density.
 */
function slopeAt({ t }: DensitySide, n: number, order: number, h: number, kernel: Kernel): Slope | undefined {
  let count = 0
  while (count < t.length && kernelValue(kernel, t[count] / h) > 0) count++
  const size = order + 1
  const share = sharesUpTo(t, count, n)
  const gram = new Float64Array(size * size)
  const moment = new Float64Array(size)
  const power = new Float64Array(size)
  for (let i = 0; i < count; i++) {
    const k = kernelValue(kernel, t[i] / h)
    powers(t[i] / h, power)
    for (let a = 0; a < size; a++) {
      moment[a] += k * power[a] * share[i]
      for (let b = 0; b <= a; b++) gram[a * size + b] += k * power[a] * power[b]
    }
  }
  if (!(choleskyInPlace(gram, size) > 1e-12)) return undefined
  choleskySolveInPlace(gram, size, moment)
  const functional = new Float64Array(size)
  functional[1] = 1 / h
  choleskySolveInPlace(gram, size, functional)
  const density = moment[1] / h
  return { density, standardError: Math.sqrt(varianceAt(t, count, n, h, kernel, share, moment, functional, density)) }
}

/** Share of all n units that lie on the side no farther than each of the first `count`; ties share the last one's. */
function sharesUpTo(t: Float64Array, count: number, n: number): Float64Array {
  const share = new Float64Array(count)
  for (let i = count - 1; i >= 0; i--) {
    const isTied = i + 1 < count && t[i + 1] === t[i]
    share[i] = isTied ? share[i + 1] : (i + 1) / n
  }
  return share
}

/** Σ ψ² over all n units: those of the window one by one, the others −f̂/n each. */
function varianceAt(
  t: Float64Array,
  count: number,
  n: number,
  h: number,
  kernel: Kernel,
  share: Float64Array,
  coefficients: Float64Array,
  functional: Float64Array,
  density: number,
): number {
  const power = new Float64Array(coefficients.length)
  const weight = new Float64Array(count)
  const left = new Float64Array(count)
  for (let i = 0; i < count; i++) {
    powers(t[i] / h, power)
    left[i] = share[i]
    for (let a = 0; a < power.length; a++) {
      weight[i] += functional[a] * power[a]
      left[i] -= coefficients[a] * power[a]
    }
    weight[i] *= kernelValue(kernel, t[i] / h)
  }
  let variance = ((n - count) * density * density) / (n * n)
  let beyond = 0
  for (let to = count; to > 0; ) {
    let from = to - 1
    while (from > 0 && t[from - 1] === t[to - 1]) from--
    for (let i = from; i < to; i++) beyond += weight[i]
    for (let i = from; i < to; i++) variance += ((beyond - density) / n + weight[i] * left[i]) ** 2
    to = from
  }
  return variance
}

function powers(u: number, out: Float64Array): void {
  out[0] = 1
  for (let a = 1; a < out.length; a++) out[a] = out[a - 1] * u
}

/**
 * The bandwidth of least mean squared error for the two densities of order 2, by a quartic fitted to each side's whole
 * distribution function: h⁵ = (V Σ f/n)/(4 Σ (c β₃)²), with V = 40/7 and c the response of the slope to t³, for the triangular
 * kernel at its end; other kernels take the same. Kept between the distance of the 40th unit of a side and its reach.
 */
function plugIn(sides: readonly DensitySide[], n: number, kernel: Kernel, reach: number): number {
  const widest = sides.map((side) => quarticAt(side, n))
  const low = Math.max(...sides.map(({ t }) => t[Math.min(t.length, 2 * fewestUnits) - 1])) * (1 + 1e-9)
  if (widest.some((one) => one === undefined)) return Math.max(low, reach / 2)
  let [variance, bias] = [0, 0]
  for (const one of widest as { density: number; third: number }[]) {
    variance += (40 / 7) * Math.max(one.density, 1e-12)
    bias += (edgeResponse * one.third) ** 2
  }
  const h = (variance / n / (4 * bias)) ** 0.2
  return Math.max(low, Math.min(h * (kernel === 'uniform' ? 0.8 : 1), reach))
}

/** Response of the slope of a quadratic fit to t³ at the end of a triangular kernel: Σ a t³ = c h². */
const edgeResponse = -3 / 7

function quarticAt({ t }: DensitySide, n: number): { density: number; third: number } | undefined {
  const size = 5
  const scale = t[t.length - 1]
  if (!(scale > 0)) return undefined
  const gram = new Float64Array(size * size)
  const moment = new Float64Array(size)
  const power = new Float64Array(size)
  for (let i = 0; i < t.length; i++) {
    powers(t[i] / scale, power)
    for (let a = 0; a < size; a++) {
      moment[a] += (power[a] * (i + 1)) / n
      for (let b = 0; b <= a; b++) gram[a * size + b] += power[a] * power[b]
    }
  }
  if (!(choleskyInPlace(gram, size) > 1e-13)) return undefined
  choleskySolveInPlace(gram, size, moment)
  return { density: moment[1] / scale, third: moment[3] / scale ** 3 }
}
