/**
 * A covariance matrix that is one. Sums with a kernel that is not positive definite may give estimates whose variances are
 * positive one by one, but not that of every combination of them.
 */
import { choleskyInPlace } from '../math/index.js'

/**
 * Shrinks the covariances, all by the one factor 1/(1 + r), so that no combination has a negative variance; variances stay
 * as they are. r is 0 where nothing is wrong, else the least that serves, to a third. Changes the matrix in place, row-major
 * count × count, symmetric; returns r. With a variance that is not positive nothing can be done: NaN.
 */
export function shrinkToDefinite(matrix: Float64Array, count: number): number {
  const standardErrors = new Float64Array(count)
  for (let a = 0; a < count; a++) {
    standardErrors[a] = Math.sqrt(matrix[a * count + a])
    if (!(standardErrors[a] > 0)) return Number.NaN
  }
  if (isDominant(matrix, standardErrors)) return 0
  const serves = (ridge: number) => choleskyInPlace(correlation(matrix, standardErrors, ridge), count) > 0
  if (serves(0)) return 0
  let ridge = 1e-12
  while (!serves(ridge)) ridge *= 10
  for (let step = 0, width = Math.sqrt(10); step < 3 && ridge > 1e-6; step++, width = Math.sqrt(width))
    if (serves(ridge / width)) ridge /= width
  for (let a = 0; a < count; a++) for (let b = 0; b < count; b++) if (a !== b) matrix[a * count + b] /= 1 + ridge
  return ridge
}

/** Are the correlations of every row too small to matter (Gershgorin's discs above 0)? */
function isDominant(matrix: Float64Array, standardErrors: Float64Array): boolean {
  const count = standardErrors.length
  for (let a = 0; a < count; a++) {
    let others = 0
    for (let b = 0; b < count; b++) if (b !== a) others += Math.abs(matrix[a * count + b]) / standardErrors[b]
    if (!(others < standardErrors[a])) return false
  }
  return true
}

/** Scaled to a diagonal of 1 + ridge. */
function correlation(matrix: Float64Array, standardErrors: Float64Array, ridge: number): Float64Array {
  const count = standardErrors.length
  const scaled = new Float64Array(count * count)
  for (let a = 0; a < count; a++) {
    for (let b = 0; b < count; b++)
      scaled[a * count + b] = a === b ? 1 + ridge : matrix[a * count + b] / (standardErrors[a] * standardErrors[b])
  }
  return scaled
}
