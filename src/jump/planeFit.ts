/**
 * Weighted local polynomial fit at a point, in two coordinates, one side of the border.
 * Source: Fan & Gijbels 1996, chapter 7 (several variables); METHODS sections 2 and 10.
 * The terms are 1, u, v, u², uv, v² …, by total degree, in u = east/h and v = north/h; the kernel weight is
 * k_i = w_i K(r_i/h)/h² with r the distance from the point, and the constants cancel. Solved by Cholesky of the moments
 * with a condition check. Every coefficient is linear in y: Σ a_i y_i with a_i = k_i A(u_i, v_i), A a polynomial in the
 * same terms.
 */
import { choleskyInPlace, choleskySolveInPlace } from '../math/index.js'
import { countWithin, type Kernel } from './kernel.js'
import { kernelCurve } from './localPolynomial.js'
import type { PlaneSide } from './planeSample.js'

export interface PlaneFit {
  readonly order: number
  readonly kernel: Kernel
  readonly h: number
  /** Units of positive weight: the first `count` of the side. */
  readonly count: number
  /** Terms of each unit of the fit, count × termCount(order), row-major. */
  readonly rows: Float64Array
  /** Kernel weight of each unit of the fit, without the constants that cancel. */
  readonly k: Float64Array
  /** Cholesky factor of the moments of the terms, row-major. */
  readonly factor: Float64Array
  /** Of the terms, in outcome units. */
  readonly coefficients: Float64Array
}

export type PlaneFitted =
  | { readonly ok: true; readonly fit: PlaneFit }
  | { readonly ok: false; readonly reason: string }

/** Below this reciprocal condition of the scaled moments the units lie too nearly on a line or a curve. */
const smallestCondition = 1e-10

/** Number of terms of a total degree up to `order`. */
export function termCount(order: number): number {
  return ((order + 1) * (order + 2)) / 2
}

/** Writes the terms at (u, v) to row[at …]: 1, then for each degree d the products u^d, u^(d−1)v, …, v^d. */
export function fillTerms(order: number, u: number, v: number, row: Float64Array, at = 0): void {
  row[at] = 1
  let previous = at
  let next = at + 1
  for (let degree = 1; degree <= order; degree++) {
    for (let j = 0; j < degree; j++) row[next + j] = row[previous + j] * u
    row[next + degree] = row[next - 1] * v
    previous = next
    next += degree + 1
  }
}

/** Fits to the units within h metres of the point. */
export function fitPlane(side: PlaneSide, order: number, h: number, kernel: Kernel): PlaneFitted {
  if (!(h > 0 && h < Number.POSITIVE_INFINITY)) throw new RangeError(`bandwidth must be above 0 metres, got ${h}`)
  const size = termCount(order)
  const count = countWithin(side.t, h, kernel)
  if (count <= size) return { ok: false, reason: `only ${count} units, a fit of ${size} terms needs ${size + 1}` }
  const { rows, k } = weightedRows(side, order, h, kernel, count)
  const moments = new Float64Array(size * size)
  const coefficients = new Float64Array(size)
  for (let i = 0, at = 0; i < count; i++, at += size) {
    for (let a = 0; a < size; a++) {
      const weighted = k[i] * rows[at + a]
      coefficients[a] += weighted * side.y[i]
      for (let b = 0; b <= a; b++) moments[a * size + b] += weighted * rows[at + b]
    }
  }
  if (!(choleskyInPlace(moments, size) > smallestCondition)) {
    return { ok: false, reason: `units too nearly on a line for a fit of order ${order} in two coordinates` }
  }
  choleskySolveInPlace(moments, size, coefficients)
  return { ok: true, fit: { order, kernel, h, count, rows, k, factor: moments, coefficients } }
}

function weightedRows(
  { t, w, eastMetres, northMetres }: PlaneSide,
  order: number,
  h: number,
  kernel: Kernel,
  count: number,
) {
  const { linear, square } = kernelCurve(h, kernel)
  const size = termCount(order)
  const rows = new Float64Array(count * size)
  const k = new Float64Array(count)
  for (let i = 0; i < count; i++) {
    fillTerms(order, eastMetres[i] / h, northMetres[i] / h, rows, i * size)
    k[i] = (1 + t[i] * (linear + t[i] * square)) * (w === null ? 1 : w[i])
  }
  return { rows, k }
}

/** The polynomial A of the level at the point: Σ k_i A(u_i, v_i) y_i is the fitted value there. */
export function levelFunctional(fit: PlaneFit): Float64Array {
  const combination = new Float64Array(termCount(fit.order))
  combination[0] = 1
  choleskySolveInPlace(fit.factor, combination.length, combination)
  return combination
}

/** Adds factor · k_i A(u_i, v_i) to `weights` for the units of the fit. */
export function addPlaneWeights(weights: Float64Array, fit: PlaneFit, combination: Float64Array, factor: number): void {
  const { rows, k, count } = fit
  const size = combination.length
  for (let i = 0, at = 0; i < count; i++, at += size) {
    let value = 0
    for (let a = 0; a < size; a++) value += combination[a] * rows[at + a]
    weights[i] += factor * k[i] * value
  }
}

/**
 * Σ l_i times each term of total degree order+1 of (east/h, north/h): what a fit of this order makes of the next terms,
 * by the weights l of its level.
 */
export function planeResponse(side: PlaneSide, fit: PlaneFit, weights: Float64Array): Float64Array {
  const { order, h, count } = fit
  const first = termCount(order)
  const row = new Float64Array(termCount(order + 1))
  const response = new Float64Array(order + 2)
  for (let i = 0; i < count; i++) {
    fillTerms(order + 1, side.eastMetres[i] / h, side.northMetres[i] / h, row)
    for (let j = 0; j < response.length; j++) response[j] += weights[i] * row[first + j]
  }
  return response
}

/** Residuals of the first `count` units; those outside the fit's window have the residual from the fit carried on to them. */
export function planeResiduals(side: PlaneSide, fit: PlaneFit, count: number): Float64Array {
  const { order, h, rows, coefficients } = fit
  const size = coefficients.length
  const residual = new Float64Array(count)
  const row = new Float64Array(size)
  for (let i = 0; i < count; i++) {
    const isInside = i < fit.count
    if (!isInside) fillTerms(order, side.eastMetres[i] / h, side.northMetres[i] / h, row)
    const from = isInside ? rows : row
    const at = isInside ? i * size : 0
    let fitted = 0
    for (let a = 0; a < size; a++) fitted += coefficients[a] * from[at + a]
    residual[i] = side.y[i] - fitted
  }
  return residual
}

/** Leverage of each unit of the fit. */
export function planeLeverages({ rows, k, factor, count, coefficients }: PlaneFit): Float64Array {
  const size = coefficients.length
  const leverage = new Float64Array(count)
  const solved = new Float64Array(size)
  for (let i = 0, at = 0; i < count; i++, at += size) {
    let length = 0
    for (let a = 0; a < size; a++) {
      let value = rows[at + a]
      for (let b = 0; b < a; b++) value -= factor[a * size + b] * solved[b]
      solved[a] = value / factor[a * size + a]
      length += solved[a] * solved[a]
    }
    leverage[i] = k[i] * length
  }
  return leverage
}
