/** Symmetric matrices that may be singular: eigenvalues, and quadratic forms in the pseudo-inverse. Row-major, n × n. */
import { EigenvalueDecomposition, Matrix } from 'ml-matrix'
import { choleskyInPlace, choleskySolveInPlace } from './cholesky.js'

/**
 * Eigenvalues in ascending order and the matrix of eigenvectors, row-major, column k belonging to values[k], of unit
 * length. Only the lower triangle of a is read. Throws RangeError where an entry is not finite.
 */
export function symmetricEigen(a: Float64Array, n: number): { values: Float64Array; vectors: Float64Array } {
  const matrix = new Matrix(n, n)
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const entry = a[i * n + j]
      if (!Number.isFinite(entry)) throw new RangeError(`entry ${i}, ${j} of the matrix is ${entry}`)
      matrix.set(i, j, entry)
      matrix.set(j, i, entry)
    }
  }
  if (n === 0) return { values: new Float64Array(0), vectors: new Float64Array(0) }
  const decomposition = new EigenvalueDecomposition(matrix, { assumeSymmetric: true })
  const found = decomposition.realEigenvalues
  const columns = Array.from(found.keys()).sort((i, j) => found[i] - found[j])
  const values = Float64Array.from(columns, (column) => found[column])
  const vectors = new Float64Array(n * n)
  for (let i = 0; i < n; i++) {
    for (let k = 0; k < n; k++) vectors[i * n + k] = decomposition.eigenvectorMatrix.get(i, columns[k])
  }
  return { values, vectors }
}

/**
 * d' A⁺ d and the rank of A, for a covariance matrix A (positive semi-definite) and a vector d in its range: the Wald
 * statistic and its degrees of freedom. A is first scaled to unit diagonal, which changes neither for d in the range
 * and keeps very unequal variances from being taken for singularity. Eigenvalues of the scaled matrix up to
 * `tolerance` times the largest count as 0 (default 1e-10), and so do rows of zero variance; the part of d there is left out.
 * Cholesky where no pivot of the scaled matrix is under the root of the tolerance, eigenvalues otherwise.
 */
export function quadraticFormPseudoInverse(
  a: Float64Array,
  n: number,
  d: Float64Array,
  tolerance = 1e-10,
): { statistic: number; rank: number } {
  const kept: number[] = []
  for (let i = 0; i < n; i++) {
    if (!(a[i * n + i] >= 0)) throw new RangeError(`variance ${i} is ${a[i * n + i]}`)
    if (a[i * n + i] > 0) kept.push(i)
  }
  const size = kept.length
  const scale = kept.map((i) => 1 / Math.sqrt(a[i * n + i]))
  const scaled = new Float64Array(size * size)
  const vector = new Float64Array(size)
  for (let i = 0; i < size; i++) {
    vector[i] = d[kept[i]] * scale[i]
    for (let j = 0; j < size; j++) scaled[i * size + j] = a[kept[i] * n + kept[j]] * scale[i] * scale[j]
  }
  const factor = scaled.slice()
  if (choleskyInPlace(factor, size) > Math.max(1e-6, Math.sqrt(tolerance))) {
    const solution = vector.slice()
    choleskySolveInPlace(factor, size, solution)
    return { statistic: dot(vector, solution), rank: size }
  }
  return eigenForm(scaled, size, vector, tolerance)
}

function eigenForm(
  a: Float64Array,
  n: number,
  d: Float64Array,
  tolerance: number,
): { statistic: number; rank: number } {
  const { values, vectors } = symmetricEigen(a, n)
  let statistic = 0
  let rank = 0
  for (let k = n - 1; k >= 0 && values[k] > tolerance * values[n - 1]; k--) {
    let component = 0
    for (let i = 0; i < n; i++) component += vectors[i * n + k] * d[i]
    statistic += (component * component) / values[k]
    rank++
  }
  return { statistic, rank }
}

function dot(a: Float64Array, b: Float64Array): number {
  let total = 0
  for (let i = 0; i < a.length; i++) total += a[i] * b[i]
  return total
}
