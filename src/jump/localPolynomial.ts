/**
 * Weighted local polynomial fit at the line, one side.
 * Source: Fan & Gijbels 1996, chapter 3; METHODS section 2.
 * The distance t = |x| is scaled to [0, 1] and the fit made in shifted Legendre polynomials of it, whose Gram matrix
 * is well conditioned; it is solved by Cholesky with a condition check. Every coefficient is linear in y:
 * coefficient ν of t^ν is Σ a_{ν,i} y_i with a_{ν,i} = k_i Σ_j c_j P_j(t_i), c from `functional`.
 * In t rather than x, odd coefficients of the untreated side have the opposite sign; every use here is even in that sign.
 */
import { choleskyInPlace, choleskySolveInPlace, legendreShifted, legendreToMonomial } from '../math/index.js'
import { countWithin, type Kernel } from './kernel.js'
import { distinctWithin, type Side } from './sample.js'

export interface LocalFit {
  readonly order: number
  readonly kernel: Kernel
  /** Infinity: the whole side, unweighted by distance. */
  readonly h: number
  /** Units of positive weight: the first `count` of the side. */
  readonly count: number
  /** t / scale lies in [0, 1]. */
  readonly scale: number
  /** Cholesky factor of the Gram matrix Σ k P P'. */
  readonly factor: Float64Array
  /** Coefficients of the Legendre polynomials. */
  readonly coefficients: Float64Array
  /** Σ k P_j (t/scale)^(order+1): what the fit makes of the next power. */
  readonly nextPower: Float64Array
}

export type Fitted = { readonly ok: true; readonly fit: LocalFit } | { readonly ok: false; readonly reason: string }

const smallestCondition = 1e-13

/** Fits a polynomial of the given order to the units within h; `h = Infinity` fits the whole side with equal kernel weight. */
export function fitLocal(side: Side, order: number, h: number, kernel: Kernel): Fitted {
  if (!(h > 0)) throw new RangeError(`bandwidth must be above 0, got ${h}`)
  const count = h === Number.POSITIVE_INFINITY ? side.t.length : countWithin(side.t, h, kernel)
  const distinct = distinctWithin(side.t, count, order + 2)
  if (distinct < order + 2) {
    return { ok: false, reason: `only ${distinct} distinct distances, a fit of order ${order} needs ${order + 2}` }
  }
  const scale = side.t[count - 1]
  const { gram, right, nextPower } = accumulate(side, order, h, kernel, count, scale)
  if (!(choleskyInPlace(gram, order + 1) > smallestCondition)) {
    return { ok: false, reason: `distances too nearly equal for a fit of order ${order}` }
  }
  choleskySolveInPlace(gram, order + 1, right)
  return { ok: true, fit: { order, kernel, h, count, scale, factor: gram, coefficients: right, nextPower } }
}

interface Sums {
  readonly gram: Float64Array
  readonly right: Float64Array
  readonly nextPower: Float64Array
}

/** One outward pass in blocks of 4,096 units: Gram matrix, cross products with y and with the next power. */
function accumulate(side: Side, order: number, h: number, kernel: Kernel, count: number, scale: number): Sums {
  const size = order + 1
  const gram = new Float64Array(size * size)
  const right = new Float64Array(size)
  const nextPower = new Float64Array(size)
  const blockGram = new Float64Array(size * size)
  const blockRight = new Float64Array(size)
  const blockNext = new Float64Array(size)
  const basis = new Float64Array(size)
  const weigh = weigher(h, kernel)
  const { t, y, w } = side
  for (let start = 0; start < count; start += 4096) {
    const end = Math.min(count, start + 4096)
    blockGram.fill(0)
    blockRight.fill(0)
    blockNext.fill(0)
    for (let i = start; i < end; i++) {
      const u = t[i] / scale
      const k = w === null ? weigh(t[i]) : weigh(t[i]) * w[i]
      legendreShifted(order, u, basis)
      let power = k
      for (let j = 0; j < size; j++) power *= u
      const ky = k * y[i]
      for (let row = 0; row < size; row++) {
        const b = basis[row]
        const kb = k * b
        for (let column = 0; column <= row; column++) blockGram[row * size + column] += kb * basis[column]
        blockRight[row] += b * ky
        blockNext[row] += b * power
      }
    }
    for (let j = 0; j < size * size; j++) gram[j] += blockGram[j]
    for (let j = 0; j < size; j++) {
      right[j] += blockRight[j]
      nextPower[j] += blockNext[j]
    }
  }
  return { gram, right, nextPower }
}

/** Kernel weight as a function of t, for units known to lie within h. The factor 1/h of METHODS cancels in every estimate. */
export function weigher(h: number, kernel: Kernel): (t: number) => number {
  if (kernel === 'uniform' || h === Number.POSITIVE_INFINITY) return () => 1
  if (kernel === 'triangular') return (t) => 1 - t / h
  return (t) => 1 - (t / h) * (t / h)
}

/** The combination c of the fit's polynomials with coefficient ν = Σ k_i (Σ_j c_j P_j(t_i)) y_i, in units of y / t^ν. */
export function functional(fit: LocalFit, power: number): Float64Array {
  const size = fit.order + 1
  const toPowers = legendreToMonomial(fit.order)
  const c = new Float64Array(size)
  const unscale = fit.scale ** -power
  for (let j = 0; j < size; j++) c[j] = toPowers[j * size + power] * unscale
  choleskySolveInPlace(fit.factor, size, c)
  return c
}

/** Coefficient of t^power. */
export function coefficientOf(fit: LocalFit, power: number): number {
  const size = fit.order + 1
  const toPowers = legendreToMonomial(fit.order)
  let value = 0
  for (let j = 0; j < size; j++) value += toPowers[j * size + power] * fit.coefficients[j]
  return value * fit.scale ** -power
}

/** Response of coefficient `power` to t^(order+1): Σ a_{power,i} t_i^(order+1). */
export function responseOf(fit: LocalFit, combination: Float64Array): number {
  let value = 0
  for (let j = 0; j <= fit.order; j++) value += combination[j] * fit.nextPower[j]
  return value * fit.scale ** (fit.order + 1)
}

/** Adds factor · a_i to `weights` for the units of the fit, a_i = k_i Σ_j c_j P_j(t_i). */
export function addWeights(
  weights: Float64Array,
  side: Side,
  fit: LocalFit,
  combination: Float64Array,
  factor: number,
): void {
  const basis = new Float64Array(fit.order + 1)
  const weigh = weigher(fit.h, fit.kernel)
  for (let i = 0; i < fit.count; i++) {
    legendreShifted(fit.order, side.t[i] / fit.scale, basis)
    let value = 0
    for (let j = 0; j <= fit.order; j++) value += combination[j] * basis[j]
    const k = side.w === null ? weigh(side.t[i]) : weigh(side.t[i]) * side.w[i]
    weights[i] += factor * k * value
  }
}

/** Fitted value at distance t (also beyond the fit's window). */
export function fittedAt(fit: LocalFit, t: number, basis: Float64Array): number {
  legendreShifted(fit.order, t / fit.scale, basis)
  let value = 0
  for (let j = 0; j <= fit.order; j++) value += fit.coefficients[j] * basis[j]
  return value
}
