/**
 * B^(−1/2) b for a symmetric positive semi-definite B known by its products with vectors.
 * Source: the Lanczos method (Golub & Van Loan, Matrix Computations, sections 10.1 and 10.2), every vector made orthogonal
 * to all before it, twice. The answer is ‖b‖ Q f(T) e_1 with T the tridiagonal Q'BQ. It ends by itself after as many
 * steps as B has distinct eigenvalues in b: one more than the rank of B − I, however long b is.
 */
import { symmetricEigen } from './symmetric.js'

/** Lengths below this share of what they came from are rounding. */
const rounding = 1e-13

/** Steps between looks at the answer. */
const stride = 4

/**
 * `multiply` writes B v to its second argument. Eigenvalues up to `smallest` count as 0, and their directions are taken out
 * (pseudo-inverse). Relative error about 1e-13 where the eigenvalues of B lie above 1e-4.
 */
export function inverseRootTimes(
  multiply: (v: Float64Array, product: Float64Array) => void,
  b: Float64Array,
  smallest: number,
): Float64Array {
  const length = Math.sqrt(dot(b, b))
  if (length === 0) return b.slice()
  const basis = [b.map((value) => value / length)]
  const diagonal: number[] = []
  const beside: number[] = []
  let before: Float64Array | undefined
  for (;;) {
    const next = new Float64Array(b.length)
    multiply(basis[basis.length - 1], next)
    diagonal.push(dot(basis[basis.length - 1], next))
    for (let pass = 0; pass < 2; pass++) for (const q of basis) subtract(next, q, dot(q, next))
    const rest = Math.sqrt(dot(next, next))
    const isLast = !(rest > rounding * Math.abs(diagonal[0])) || basis.length === b.length
    if (isLast || basis.length % stride === 0) {
      const now = firstColumn(diagonal, beside, smallest)
      if (isLast || (before && isSettled(before, now))) return combined(basis, now, length)
      before = now
    }
    beside.push(rest)
    basis.push(next.map((value) => value / rest))
  }
}

/** The first column of T^(−1/2). */
function firstColumn(diagonal: readonly number[], beside: readonly number[], smallest: number): Float64Array {
  const n = diagonal.length
  const matrix = new Float64Array(n * n)
  for (let i = 0; i < n; i++) {
    matrix[i * n + i] = diagonal[i]
    if (i > 0) matrix[i * n + i - 1] = beside[i - 1]
  }
  const { values, vectors } = symmetricEigen(matrix, n)
  const column = new Float64Array(n)
  for (let k = 0; k < n; k++) {
    if (!(values[k] > smallest)) continue
    const scaled = vectors[k] / Math.sqrt(values[k])
    for (let i = 0; i < n; i++) column[i] += vectors[i * n + k] * scaled
  }
  return column
}

function isSettled(before: Float64Array, now: Float64Array): boolean {
  let change = 0
  let size = 0
  for (let i = 0; i < now.length; i++) {
    change += (now[i] - (i < before.length ? before[i] : 0)) ** 2
    size += now[i] ** 2
  }
  return change <= rounding * rounding * size
}

function combined(basis: readonly Float64Array[], shares: Float64Array, length: number): Float64Array {
  const sum = new Float64Array(basis[0].length)
  basis.forEach((q, k) => {
    subtract(sum, q, -length * shares[k])
  })
  return sum
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0
  for (let i = 0; i < a.length; i++) sum += a[i] * b[i]
  return sum
}

function subtract(from: Float64Array, what: Float64Array, times: number): void {
  for (let i = 0; i < from.length; i++) from[i] -= times * what[i]
}
