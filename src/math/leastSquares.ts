/**
 * Weighted least squares by Householder QR on columns scaled by powers of two, then iterative refinement of the
 * augmented system with residuals in twice the working precision (Björck 1967, BIT 7; the doubled products are those of
 * Ogita, Rump & Oishi 2005, SIAM J. Sci. Comput. 26). The refined coefficients carry nearly every digit that the data
 * determine: see test/math/leastSquares.test.ts for the NIST data sets.
 */
import {
  applyForward,
  applyTransposed,
  type Reflections,
  reflectInPlace,
  solveUpper,
  solveUpperTransposed,
} from './householder.js'

export type LeastSquares =
  | {
      readonly ok: true
      /** One for each column. */
      readonly coefficients: Float64Array
      /** y − Xβ, not weighted, one for each row. */
      readonly residuals: Float64Array
      /** The number of columns. */
      readonly rank: number
      /** (X'WX)⁻¹, row-major. */
      readonly crossInverse: Float64Array
    }
  | { readonly ok: false; readonly reason: string }

/**
 * Minimises Σ w (y − Xβ)². Columns and y: equal length n, finite; weights ≥ 0, 1 where not given; an intercept is a
 * column of ones. { ok: false, reason } where fewer rows have positive weight than there are columns, or a column
 * is a combination of the columns before it: distance from their span under 8·ε·p·√n of its length.
 * Throws RangeError for unequal lengths, values not finite and negative weights.
 */
export function leastSquares(columns: readonly Float64Array[], y: Float64Array, weights?: Float64Array): LeastSquares {
  const p = columns.length
  checkShapes(columns, y, weights)
  const n = y.length
  const roots = new Float64Array(n).fill(1)
  if (weights) for (let i = 0; i < n; i++) roots[i] = Math.sqrt(weights[i])
  let used = 0
  for (let i = 0; i < n; i++) if (roots[i] > 0) used++
  if (p === 0) return { ok: false, reason: 'there is no column to fit' }
  if (used < p)
    return { ok: false, reason: `${used} ${used === 1 ? 'row' : 'rows'} of positive weight cannot fit ${p} columns` }

  const scale = columns.map((column) => powerOfTwoScale(column, roots))
  const q = reflectInPlace(columns.map((column, j) => scaledColumn(column, scale[j], roots)))
  const tolerance = 8 * Number.EPSILON * p * Math.sqrt(used)
  for (let j = 0; j < p; j++) {
    if (!(Math.abs(q.diagonal[j]) > tolerance * columnLength(q, j))) {
      return { ok: false, reason: dependentColumn(j, columns[j]) }
    }
  }
  const coefficients = refined(columns, y, roots, scale, q)
  const residuals = new Float64Array(n)
  const rest = new Float64Array(n)
  residualsInto(columns, y, coefficients, residuals, rest)
  for (let i = 0; i < n; i++) residuals[i] += rest[i]
  return { ok: true, coefficients, residuals, rank: p, crossInverse: crossInverse(q, scale) }
}

/**
 * Solves [I DX; X'D 0][s; β] = [Dy; 0], D = √W, from s = 0, β = 0: the first step is the plain QR solution, each later
 * one corrects both s and β by the same factors. A step of relative size ρ leaves an error near ρ², so the
 * steps end below the root of the rounding unit, or where they no longer shrink.
 */
function refined(
  columns: readonly Float64Array[],
  y: Float64Array,
  roots: Float64Array,
  scale: readonly number[],
  q: Reflections,
): Float64Array {
  const n = y.length
  const p = columns.length
  const beta = new Float64Array(p)
  const s = new Float64Array(n)
  const f = new Float64Array(n)
  const high = new Float64Array(n)
  const low = new Float64Array(n)
  let previous = Number.POSITIVE_INFINITY
  for (let step = 0; step < 8; step++) {
    residualsInto(columns, y, beta, high, low)
    for (let i = 0; i < n; i++) {
      const product = high[i] * roots[i]
      f[i] = product - s[i] + (productError(high[i], roots[i], product) + low[i] * roots[i])
    }
    const g = Float64Array.from(columns, (column, j) =>
      step === 0 ? 0 : -scale[j] * weightedProduct(column, roots, s),
    )
    applyTransposed(q, f)
    solveUpperTransposed(q, g)
    const change = f.slice(0, p)
    for (let j = 0; j < p; j++) change[j] -= g[j]
    solveUpper(q, change)
    const size = largestShare(change, beta, scale)
    if (step > 0 && !(size < previous / 2)) break
    for (let j = 0; j < p; j++) {
      beta[j] += change[j] * scale[j]
      f[j] = g[j]
    }
    if (size <= 1e-9) break
    applyForward(q, f)
    for (let i = 0; i < n; i++) s[i] += f[i]
    if (step > 0) previous = size
  }
  return beta
}

/** y − Xβ in twice the working precision, as high + low. */
function residualsInto(
  columns: readonly Float64Array[],
  y: Float64Array,
  beta: Float64Array,
  high: Float64Array,
  low: Float64Array,
): void {
  high.set(y)
  low.fill(0)
  for (let j = 0; j < columns.length; j++) {
    if (beta[j] === 0) continue
    const x = columns[j]
    for (let i = 0; i < x.length; i++) {
      const product = -beta[j] * x[i]
      const sum = high[i] + product
      const part = sum - high[i]
      low[i] += high[i] - (sum - part) + (product - part) + productError(-beta[j], x[i], product)
      high[i] = sum
    }
  }
}

/** Σ_i x_i d_i s_i in twice the working precision. */
function weightedProduct(x: Float64Array, d: Float64Array, s: Float64Array): number {
  let high = 0
  let low = 0
  for (let i = 0; i < x.length; i++) {
    const weighted = d[i] * s[i]
    const product = x[i] * weighted
    const sum = high + product
    const part = sum - high
    low += high - (sum - part) + (product - part)
    low += productError(x[i], weighted, product) + x[i] * productError(d[i], s[i], weighted)
    high = sum
  }
  return high + low
}

/** a·b − product exactly, product being a·b rounded (Dekker 1971; magnitudes under 1e300). */
function productError(a: number, b: number, product: number): number {
  const wideA = 134217729 * a
  const highA = wideA - (wideA - a)
  const lowA = a - highA
  const wideB = 134217729 * b
  const highB = wideB - (wideB - b)
  const lowB = b - highB
  return lowA * lowB - (product - highA * highB - lowA * highB - highA * lowB)
}

/** The largest correction, each against its own coefficient, both on the scaled columns. */
function largestShare(change: Float64Array, beta: Float64Array, scale: readonly number[]): number {
  let length = 0
  for (let j = 0; j < beta.length; j++) length = Math.max(length, Math.abs(beta[j] / scale[j]))
  let largest = 0
  for (let j = 0; j < change.length; j++) {
    const size = Math.max(Math.abs(beta[j] / scale[j]), length * 1e-8)
    if (change[j] !== 0) largest = Math.max(largest, size > 0 ? Math.abs(change[j]) / size : Number.MAX_VALUE)
  }
  return largest
}

function scaledColumn(column: Float64Array, scale: number, roots: Float64Array): Float64Array {
  const scaled = new Float64Array(column.length)
  for (let i = 0; i < column.length; i++) scaled[i] = column[i] * scale * roots[i]
  return scaled
}

/** The power of two that brings the weighted column's length into [1, 2); 1 for a column of zeros. */
function powerOfTwoScale(column: Float64Array, roots: Float64Array): number {
  let largest = 0
  for (let i = 0; i < column.length; i++) largest = Math.max(largest, Math.abs(column[i] * roots[i]))
  if (largest === 0) return 1
  let square = 0
  for (let i = 0; i < column.length; i++) square += ((column[i] * roots[i]) / largest) ** 2
  return 2 ** -Math.floor(Math.log2(largest * Math.sqrt(square)))
}

/** Length of column j before the decomposition, which R keeps. */
function columnLength(q: Reflections, j: number): number {
  let square = q.diagonal[j] * q.diagonal[j]
  for (let i = 0; i < j; i++) square += q.columns[j][i] * q.columns[j][i]
  return Math.sqrt(square)
}

function dependentColumn(j: number, column: Float64Array): string {
  if (column.every((value) => value === 0)) return `column ${j + 1} is zero`
  return j === 0
    ? 'column 1 is zero where the weight is positive'
    : `column ${j + 1} is a combination of those before it`
}

/** S R⁻¹ R'⁻¹ S, S the scale. */
function crossInverse(q: Reflections, scale: readonly number[]): Float64Array {
  const p = scale.length
  const inverse = new Float64Array(p * p)
  const column = new Float64Array(p)
  for (let j = 0; j < p; j++) {
    column.fill(0)
    column[j] = 1
    solveUpperTransposed(q, column)
    solveUpper(q, column)
    for (let i = 0; i < p; i++) inverse[i * p + j] = column[i] * scale[i] * scale[j]
  }
  return inverse
}

function checkShapes(columns: readonly Float64Array[], y: Float64Array, weights?: Float64Array): void {
  for (const values of [...columns, y, ...(weights ? [weights] : [])]) {
    if (values.length !== y.length) throw new RangeError(`a column has ${values.length} rows, y has ${y.length}`)
    for (let i = 0; i < values.length; i++) {
      if (!Number.isFinite(values[i]))
        throw new RangeError(`row ${i} holds ${values[i]}; least squares needs finite numbers`)
    }
  }
  if (weights) for (const weight of weights) if (weight < 0) throw new RangeError(`a weight is ${weight}`)
}
