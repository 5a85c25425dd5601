/**
 * Weighted local polynomial fit at the line, one side.
 * Source: Fan & Gijbels 1996, chapter 3; METHODS section 2.
 * The distance t = |x| is mapped to z = 2t/scale − 1 in [−1, 1]; one outward pass sums the moments Σ k z^j and Σ k z^j y.
 * The fit is made in Legendre polynomials of z, whose Gram matrix is well conditioned, by Cholesky with a condition
 * check. Every coefficient is linear in y: that of t^ν is Σ a_{ν,i} y_i with a_{ν,i} = k_i A(z_i), A a polynomial from
 * `functional`. Polynomials in z are arrays of coefficients of 1, z, z², …
 * In t rather than x, odd coefficients of the untreated side have the opposite sign; every use here is even in that sign.
 */
import { choleskyInPlace, choleskySolveInPlace } from '../math/index.js'
import { countWithin, type Kernel } from './kernel.js'
import { distinctWithin, type Side } from './sample.js'
import { evaluate, inLegendre, legendreInZ, powerOfT } from './zPolynomial.js'

export interface LocalFit {
  readonly order: number
  readonly kernel: Kernel
  /** Infinity: the whole side, unweighted by distance. */
  readonly h: number
  /** Units of positive weight: the first `count` of the side. */
  readonly count: number
  /** Largest t of the fit: z = 2t/scale − 1. */
  readonly scale: number
  /** Cholesky factor of the Gram matrix of Legendre polynomials, order+1 square, row-major. */
  readonly factor: Float64Array
  /** The fitted polynomial in z. */
  readonly polynomial: Float64Array
  /** Σ k z^j, j = 0 … 2·order+1. */
  readonly moments: Float64Array
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
  const { moments, cross } = momentsOf(side, order, h, kernel, count, scale)
  const gram = gramMatrix(moments, order)
  if (!(choleskyInPlace(gram, order + 1) > smallestCondition)) {
    return { ok: false, reason: `distances too nearly equal for a fit of order ${order}` }
  }
  const coefficients = inLegendre(cross, order)
  choleskySolveInPlace(gram, order + 1, coefficients)
  const polynomial = legendreInZ(coefficients)
  return { ok: true, fit: { order, kernel, h, count, scale, factor: gram, polynomial, moments } }
}

/** k(t) = 1 + linear·t + square·t², without the constant factors of the kernel and 1/h, which cancel in every estimate. */
export interface KernelCurve {
  readonly linear: number
  readonly square: number
}

/** Kernel weight as a polynomial of t, for units known to lie within h. */
export function kernelCurve(h: number, kernel: Kernel): KernelCurve {
  if (kernel === 'uniform' || h === Number.POSITIVE_INFINITY) return { linear: 0, square: 0 }
  return kernel === 'triangular' ? { linear: -1 / h, square: 0 } : { linear: 0, square: -1 / (h * h) }
}

/** One outward pass: Σ k z^j (j up to 2·order+1) and Σ k z^j y (j up to order), in blocks of 4,096 units. */
function momentsOf(side: Side, order: number, h: number, kernel: Kernel, count: number, scale: number) {
  const top = 2 * order + 2
  const moments = new Float64Array(top)
  const cross = new Float64Array(order + 1)
  const blockMoments = new Float64Array(top)
  const blockCross = new Float64Array(order + 1)
  const { linear, square } = kernelCurve(h, kernel)
  const { t, y, w } = side
  for (let start = 0; start < count; start += 4096) {
    const end = Math.min(count, start + 4096)
    blockMoments.fill(0)
    blockCross.fill(0)
    for (let i = start; i < end; i++) {
      const ti = t[i]
      const yi = y[i]
      const z = (2 * ti) / scale - 1
      let power = 1 + ti * (linear + ti * square)
      if (w !== null) power *= w[i]
      for (let j = 0; j <= order; j++) {
        blockMoments[j] += power
        blockCross[j] += power * yi
        power *= z
      }
      for (let j = order + 1; j < top; j++) {
        blockMoments[j] += power
        power *= z
      }
    }
    for (let j = 0; j < top; j++) moments[j] += blockMoments[j]
    for (let j = 0; j <= order; j++) cross[j] += blockCross[j]
  }
  return { moments, cross }
}

/** Gram matrix of the Legendre polynomials from the moments. */
function gramMatrix(moments: Float64Array, order: number): Float64Array {
  const size = order + 1
  const gram = new Float64Array(size * size)
  const shifted = new Float64Array(size)
  const half = new Float64Array(size * size)
  for (let power = 0; power < size; power++) {
    for (let j = 0; j < size; j++) shifted[j] = moments[power + j]
    half.set(inLegendre(shifted, order), power * size)
  }
  for (let row = 0; row < size; row++) {
    for (let power = 0; power < size; power++) shifted[power] = half[power * size + row]
    gram.set(inLegendre(shifted, order), row * size)
  }
  return gram
}

/** The polynomial A in z with coefficient ν of the fit = Σ k_i A(z_i) y_i, in units of y / t^ν. */
export function functional(fit: LocalFit, power: number): Float64Array {
  const combination = powerOfT(power, fit.order, fit.scale)
  choleskySolveInPlace(fit.factor, fit.order + 1, combination)
  return legendreInZ(combination)
}

/** Coefficient of t^power. */
export function coefficientOf(fit: LocalFit, power: number): number {
  const { polynomial, scale } = fit
  let value = 0
  // z = 2t/scale − 1: the coefficient of t^ν in z^j is C(j, ν) (2/scale)^ν (−1)^(j−ν)
  let choose = 1
  for (let j = power; j < polynomial.length; j++) {
    value += polynomial[j] * choose * ((j - power) % 2 === 0 ? 1 : -1)
    choose = (choose * (j + 1)) / (j + 1 - power)
  }
  return value * (2 / scale) ** power
}

/** Σ a_i t_i^(order+1) for the polynomial A of a functional: its response to the next power. */
export function responseOf(fit: LocalFit, combination: Float64Array): number {
  const { moments, order, scale } = fit
  // t = scale (1 + z)/2, so t^m = (scale/2)^m Σ C(m, l) z^l
  const m = order + 1
  let value = 0
  for (let j = 0; j <= order; j++) {
    let choose = 1
    let inner = 0
    for (let l = 0; l <= m; l++) {
      inner += choose * moments[j + l]
      choose = (choose * (m - l)) / (l + 1)
    }
    value += combination[j] * inner
  }
  return value * (scale / 2) ** m
}

/** Adds factor · a_i to `weights` for the units of the fit, a_i = k_i A(z_i). */
export function addWeights(
  weights: Float64Array,
  side: Side,
  fit: LocalFit,
  combination: Float64Array,
  factor: number,
): void {
  const { linear, square } = kernelCurve(fit.h, fit.kernel)
  const { t, w } = side
  const { count, scale, order } = fit
  for (let i = 0; i < count; i++) {
    const ti = t[i]
    const z = (2 * ti) / scale - 1
    let value = combination[order]
    for (let j = order - 1; j >= 0; j--) value = value * z + combination[j]
    const k = 1 + ti * (linear + ti * square)
    weights[i] += w === null ? factor * k * value : factor * k * w[i] * value
  }
}

/** Fitted value at distance t (also beyond the fit's window). */
export function fittedAt(fit: LocalFit, t: number): number {
  return evaluate(fit.polynomial, (2 * t) / fit.scale - 1)
}
