/** A quadratic form in the pseudo-inverse of a covariance matrix of low rank, as fast as its rank is low. */
import { choleskyInPlace, choleskySolveInPlace } from '../math/index.js'

/** Scaled to unit diagonal, what is left of a variance after the rows before counts as zero up to this. */
const SMALLEST_PIVOT = 1e-10

/**
 * d' A⁺ d and the rank r of A, A symmetric positive semidefinite, n x n row-major, scaled to unit diagonal first.
 * Cholesky with complete pivoting gives A = G G' with G of full rank n x r (Higham 1990, Analysis of the Cholesky
 * decomposition of a semi-definite matrix), and then A⁺ = G (G'G)⁻² G'. About n r² steps, where eigenvalues take n³.
 * Rows of zero variance are left out. The part of d outside the range of A does not count.
 */
export function quadraticFormByRank(a: Float64Array, d: Float64Array): { statistic: number; rank: number } {
  const count = d.length
  const scale = new Float64Array(count)
  const scaled = new Float64Array(count)
  for (let i = 0; i < count; i++) {
    const variance = a[i * count + i]
    scale[i] = variance > 0 ? 1 / Math.sqrt(variance) : 0
    scaled[i] = d[i] * scale[i]
  }
  const columns = pivotedColumns(a, scale)
  const rank = columns.length
  const gram = new Float64Array(rank * rank)
  const projected = new Float64Array(rank)
  for (let k = 0; k < rank; k++) {
    projected[k] = dot(columns[k], scaled)
    for (let m = 0; m <= k; m++) gram[k * rank + m] = dot(columns[k], columns[m])
  }
  if (rank > 0 && !(choleskyInPlace(gram, rank) > 0)) throw new Error('the pivoted factor lost its rank')
  choleskySolveInPlace(gram, rank, projected)
  return { statistic: dot(projected, projected), rank }
}

/** The columns of G for A scaled by `scale` on both sides. */
function pivotedColumns(a: Float64Array, scale: Float64Array): Float64Array[] {
  const count = scale.length
  const left = scale.map((value) => (value > 0 ? 1 : 0))
  const columns: Float64Array[] = []
  while (columns.length < count) {
    let pivot = 0
    for (let i = 1; i < count; i++) if (left[i] > left[pivot]) pivot = i
    if (!(left[pivot] > SMALLEST_PIVOT)) break
    const column = new Float64Array(count)
    for (let i = 0; i < count; i++) column[i] = a[pivot * count + i] * scale[pivot] * scale[i]
    for (const earlier of columns) {
      const factor = earlier[pivot]
      for (let i = 0; i < count; i++) column[i] -= factor * earlier[i]
    }
    const root = Math.sqrt(left[pivot])
    for (let i = 0; i < count; i++) {
      column[i] /= root
      left[i] -= column[i] * column[i]
    }
    left[pivot] = 0
    columns.push(column)
  }
  return columns
}

/** Σ a_k b_k of arrays of equal length. */
export function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0
  for (let k = 0; k < a.length; k++) sum += a[k] * b[k]
  return sum
}
