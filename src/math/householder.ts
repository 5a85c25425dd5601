/**
 * Householder QR of a tall matrix held as columns (Golub & Van Loan, Matrix Computations, section 5.2.1).
 * Each column keeps its reflector below the diagonal and its part of R above it; the diagonal of R stands apart.
 */

export interface Reflections {
  /** p columns of length n: R above the diagonal, reflectors on and below it. */
  readonly columns: readonly Float64Array[]
  /** R_jj, length p. */
  readonly diagonal: Float64Array
  /** 2/(v'v) of each reflector; 0 where there is none. */
  readonly twoOverSquare: Float64Array
}

/** Overwrites the columns (all of one length n ≥ p) by their QR decomposition. */
export function reflectInPlace(columns: readonly Float64Array[]): Reflections {
  const p = columns.length
  const diagonal = new Float64Array(p)
  const twoOverSquare = new Float64Array(p)
  for (let j = 0; j < p; j++) {
    const v = columns[j]
    let square = 0
    for (let i = j; i < v.length; i++) square += v[i] * v[i]
    const length = Math.sqrt(square)
    diagonal[j] = v[j] > 0 ? -length : length
    if (length === 0) continue
    const head = v[j] - diagonal[j]
    twoOverSquare[j] = 2 / (square - v[j] * v[j] + head * head)
    v[j] = head
    for (let k = j + 1; k < p; k++) reflect(v, j, twoOverSquare[j], columns[k])
  }
  return { columns, diagonal, twoOverSquare }
}

/** Overwrites y (length n) by Q'y. */
export function applyTransposed(q: Reflections, y: Float64Array): void {
  for (let j = 0; j < q.columns.length; j++) reflect(q.columns[j], j, q.twoOverSquare[j], y)
}

/** Overwrites y (length n) by Qy. */
export function applyForward(q: Reflections, y: Float64Array): void {
  for (let j = q.columns.length - 1; j >= 0; j--) reflect(q.columns[j], j, q.twoOverSquare[j], y)
}

/** Overwrites b (its first p entries) by R⁻¹b. */
export function solveUpper(q: Reflections, b: Float64Array): void {
  for (let j = q.columns.length - 1; j >= 0; j--) {
    b[j] /= q.diagonal[j]
    for (let i = 0; i < j; i++) b[i] -= q.columns[j][i] * b[j]
  }
}

/** Overwrites b (its first p entries) by R'⁻¹b. */
export function solveUpperTransposed(q: Reflections, b: Float64Array): void {
  for (let j = 0; j < q.columns.length; j++) {
    let value = b[j]
    for (let i = 0; i < j; i++) value -= q.columns[j][i] * b[i]
    b[j] = value / q.diagonal[j]
  }
}

function reflect(v: Float64Array, from: number, twoOverSquare: number, y: Float64Array): void {
  let product = 0
  for (let i = from; i < v.length; i++) product += v[i] * y[i]
  const step = product * twoOverSquare
  for (let i = from; i < v.length; i++) y[i] -= step * v[i]
}
