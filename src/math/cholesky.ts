/**
 * Small dense symmetric positive definite systems in typed arrays, row-major, n × n.
 * Only the lower triangle is read and written; the upper one is left as it was.
 * Source: Golub & Van Loan, Matrix Computations, section 4.2.
 */

/**
 * Overwrites the lower triangle of a with L, a = L L'. Returns an estimate of the reciprocal condition of a scaled
 * to unit diagonal: the smallest over the largest of L_jj²/a_jj, the part of row j not explained by the rows before.
 * Returns 0, with a spoilt, where a is not positive definite to working precision or holds NaN.
 */
export function choleskyInPlace(a: Float64Array, n: number): number {
  let smallest = Number.POSITIVE_INFINITY
  let largest = 0
  for (let j = 0; j < n; j++) {
    const rowJ = j * n
    const diagonal = a[rowJ + j]
    let pivot = diagonal
    for (let k = 0; k < j; k++) pivot -= a[rowJ + k] * a[rowJ + k]
    if (!(pivot > diagonal * Number.EPSILON && pivot < Number.POSITIVE_INFINITY)) return 0
    const share = pivot / diagonal
    if (share < smallest) smallest = share
    if (share > largest) largest = share
    const root = Math.sqrt(pivot)
    a[rowJ + j] = root
    for (let i = j + 1; i < n; i++) {
      const rowI = i * n
      let value = a[rowI + j]
      for (let k = 0; k < j; k++) value -= a[rowI + k] * a[rowJ + k]
      a[rowI + j] = value / root
    }
  }
  return n === 0 ? 1 : smallest / largest
}

/** Overwrites b with the solution of L L' x = b, L the lower triangle that choleskyInPlace left. */
export function choleskySolveInPlace(l: Float64Array, n: number, b: Float64Array): void {
  for (let i = 0; i < n; i++) {
    let value = b[i]
    for (let k = 0; k < i; k++) value -= l[i * n + k] * b[k]
    b[i] = value / l[i * n + i]
  }
  for (let i = n - 1; i >= 0; i--) {
    let value = b[i]
    for (let k = i + 1; k < n; k++) value -= l[k * n + i] * b[k]
    b[i] = value / l[i * n + i]
  }
}

/** The whole symmetric inverse (L L')⁻¹, row-major. */
export function choleskyInverse(l: Float64Array, n: number): Float64Array {
  const inverse = new Float64Array(n * n)
  const column = new Float64Array(n)
  for (let j = 0; j < n; j++) {
    column.fill(0)
    column[j] = 1
    choleskySolveInPlace(l, n, column)
    for (let i = j; i < n; i++) {
      inverse[i * n + j] = column[i]
      inverse[j * n + i] = column[i]
    }
  }
  return inverse
}
