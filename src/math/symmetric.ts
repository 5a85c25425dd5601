/** Eigenvalues of symmetric matrices. Row-major, n × n. */
import { EigenvalueDecomposition, Matrix } from 'ml-matrix'

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
