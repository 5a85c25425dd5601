import { describe, expect, test } from 'vitest'
import { inverseRootTimes, seededRandom, symmetricEigen } from '../../src/math/index.js'

function product(matrix: Float64Array, n: number) {
  return (v: Float64Array, out: Float64Array) => {
    for (let i = 0; i < n; i++) {
      out[i] = 0
      for (let j = 0; j < n; j++) out[i] += matrix[i * n + j] * v[j]
    }
  }
}

/** A'A + ridge I of a seeded rows × n matrix A. */
function gram(rows: number, n: number, ridge: number, seed: number): Float64Array {
  const random = seededRandom(seed)
  const a = Float64Array.from({ length: rows * n }, () => random.next() - 0.5)
  const out = new Float64Array(n * n)
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) for (let r = 0; r < rows; r++) out[i * n + j] += a[r * n + i] * a[r * n + j]
    out[i * n + i] += ridge
  }
  return out
}

describe('B^(−1/2) b', () => {
  test.each([
    ['well conditioned', gram(12, 12, 1, 1), 12, 1e-13],
    ['identity plus rank 3 of 40', gram(3, 40, 1, 2), 40, 1e-13],
    ['condition about 1e4', gram(9, 9, 1e-4, 3), 9, 1e-10],
    ['one row', Float64Array.of(4), 1, 1e-15],
  ])('%s, against all eigenvalues', (_, matrix, n, tolerance) => {
    const random = seededRandom(9)
    const b = Float64Array.from({ length: n }, () => random.next() - 0.3)
    const { values, vectors } = symmetricEigen(matrix, n)
    const expected = new Float64Array(n)
    for (let k = 0; k < n; k++) {
      let along = 0
      for (let i = 0; i < n; i++) along += vectors[i * n + k] * b[i]
      for (let i = 0; i < n; i++) expected[i] += (vectors[i * n + k] * along) / Math.sqrt(values[k])
    }
    const found = inverseRootTimes(product(matrix, n), b, 1e-12)
    const size = Math.hypot(...expected)
    expect(Math.hypot(...found.map((value, i) => value - expected[i]))).toBeLessThan(tolerance * size)
  })
  test('ends after a few products where B is the identity and a little more, however long b is', () => {
    const n = 5000
    let products = 0
    const multiply = (v: Float64Array, out: Float64Array) => {
      products++
      let sum = 0
      for (let i = 0; i < n; i++) sum += v[i] * (i % 3)
      for (let i = 0; i < n; i++) out[i] = v[i] + ((i % 3) * sum) / n
    }
    inverseRootTimes(multiply, new Float64Array(n).fill(1), 1e-12)
    expect(products).toBeLessThanOrEqual(3)
  })
  test('takes out directions of eigenvalue 0', () => {
    const found = inverseRootTimes(product(Float64Array.of(1, -1, -1, 1), 2), Float64Array.of(3, 1), 1e-12)
    // eigenvalue 2 along (1, −1)/√2: the part (1, −1) of b over √2
    expect(Math.abs(found[0] - Math.SQRT1_2)).toBeLessThan(1e-14)
    expect(Math.abs(found[1] + Math.SQRT1_2)).toBeLessThan(1e-14)
    expect(Array.from(inverseRootTimes(product(gram(3, 3, 1, 1), 3), new Float64Array(3), 1e-12))).toEqual([0, 0, 0])
  })
})
