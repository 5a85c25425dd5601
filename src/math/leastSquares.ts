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
  const roots = weights ? weights.map(Math.sqrt) : new Float64Array(y.length).fill(1)
  let used = 0
  for (let i = 0; i < roots.length; i++) if (roots[i] > 0) used++
  if (p === 0) return { ok: false, reason: 'there is no column to fit' }
  if (used < p) return { ok: false, reason: `${used} rows of positive weight cannot fit ${p} columns` }

  const scale = columns.map((column) => powerOfTwoScale(column, roots))
  const q = reflectInPlace(columns.map((column, j) => column.map((value, i) => value * scale[j] * roots[i])))
  const tolerance = 8 * Number.EPSILON * p * Math.sqrt(used)
  for (let j = 0; j < p; j++) {
    if (!(Math.abs(q.diagonal[j]) > tolerance * columnLength(q, j))) {
      return { ok: false, reason: dependentColumn(j, columns[j]) }
    }
  }
  const coefficients = refined(columns, y, roots, scale, q)
  const residuals = new Float64Array(y.length)
  const pair = new Float64Array(2)
  for (let i = 0; i < y.length; i++) {
    residualAt(columns, y, coefficients, i, pair)
    residuals[i] = pair[0] + pair[1]
  }
  return { ok: true, coefficients, residuals, rank: p, crossInverse: crossInverse(q, scale) }
}

/**
 * Solves [I DX; X'D 0][s; β] = [Dy; 0], D = √W, from s = 0, β = 0: the first step is the plain QR solution, each later
 * one corrects both s and β by the same factors, until a correction no longer counts or no longer shrinks.
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
  const g = new Float64Array(p)
  const pair = new Float64Array(2)
  let previous = Number.POSITIVE_INFINITY
  for (let step = 0; step < 8; step++) {
    for (let i = 0; i < n; i++) {
      residualAt(columns, y, beta, i, pair)
      const product = pair[0] * roots[i]
      const rest = productError(pair[0], roots[i], product) + pair[1] * roots[i]
      f[i] = product - s[i] + rest
    }
    for (let j = 0; j < p; j++) g[j] = -scale[j] * weightedProduct(columns[j], roots, s, pair)
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
    applyForward(q, f)
    for (let i = 0; i < n; i++) s[i] += f[i]
    if (size <= Number.EPSILON / 2) break
    previous = size
  }
  return beta
}

/** y_i − Σ_j x_ij β_j into pair, as a sum of two doubles. */
function residualAt(
  columns: readonly Float64Array[],
  y: Float64Array,
  beta: Float64Array,
  i: number,
  pair: Float64Array,
): void {
  pair[0] = y[i]
  pair[1] = 0
  for (let j = 0; j < columns.length; j++) addProduct(pair, columns[j][i], -beta[j])
}

/** Σ_i x_i d_i s_i in twice the working precision. */
function weightedProduct(x: Float64Array, d: Float64Array, s: Float64Array, pair: Float64Array): number {
  pair[0] = 0
  pair[1] = 0
  for (let i = 0; i < x.length; i++) {
    const product = d[i] * s[i]
    addProduct(pair, x[i], product)
    pair[1] += x[i] * productError(d[i], s[i], product)
  }
  return pair[0] + pair[1]
}

function addProduct(pair: Float64Array, a: number, b: number): void {
  const product = a * b
  const sum = pair[0] + product
  const part = sum - pair[0]
  pair[1] += pair[0] - (sum - part) + (product - part) + productError(a, b, product)
  pair[0] = sum
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
    if (!values.every(Number.isFinite)) throw new RangeError('least squares needs finite numbers throughout')
  }
  if (weights?.some((weight) => weight < 0)) throw new RangeError('a weight is negative')
}
