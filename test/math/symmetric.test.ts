import { describe, expect, test } from 'vitest'
import {
  choleskyInPlace,
  choleskyInverse,
  choleskySolveInPlace,
  seededRandom,
  symmetricEigen,
} from '../../src/math/index.js'

/** B B' for a seeded n × rank matrix B. */
function covariance(n: number, rank: number, seed: number): { a: Float64Array; b: Float64Array } {
  const random = seededRandom(seed)
  const b = Float64Array.from({ length: n * rank }, () => random.normal())
  const a = new Float64Array(n * n)
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) for (let k = 0; k < rank; k++) a[i * n + j] += b[i * rank + k] * b[j * rank + k]
  }
  return { a, b }
}

function timesVector(a: Float64Array, n: number, x: Float64Array): Float64Array {
  return Float64Array.from({ length: n }, (_, i) => x.reduce((total, value, j) => total + a[i * n + j] * value, 0))
}

const hilbert = (n: number) => Float64Array.from({ length: n * n }, (_, i) => 1 / (Math.floor(i / n) + (i % n) + 1))

describe('Cholesky', () => {
  test('factor of a matrix known in whole numbers', () => {
    const a = Float64Array.from([4, 99, 99, 12, 37, 99, -16, -43, 98])
    // Pivots 4, 1, 9 over diagonals 4, 37, 98: the smallest share is 1/37, the largest 1.
    expect(choleskyInPlace(a, 3)).toBe(1 / 37)
    expect([...a]).toEqual([2, 99, 99, 6, 1, 99, -8, 5, 3])
  })
  test('inverse of the Hilbert matrix of side 4: whole numbers (Choi 1983)', () => {
    const a = hilbert(4)
    expect(choleskyInPlace(a, 4)).toBeGreaterThan(0)
    const exact = [16, -120, 240, -140, -120, 1200, -2700, 1680, 240, -2700, 6480, -4200, -140, 1680, -4200, 2800]
    // Condition number 1.6e4: four of sixteen digits.
    choleskyInverse(a, 4).forEach((value, i) => {
      expect(Math.abs(value - exact[i])).toBeLessThan(1e-11 * 6480)
    })
  })
  test('solves what it factored', () => {
    const { a } = covariance(6, 9, 2)
    const x = Float64Array.from([1, -2, 3, -4, 5, -6])
    const b = timesVector(a, 6, x)
    const factor = a.slice()
    expect(choleskyInPlace(factor, 6)).toBeGreaterThan(1e-4)
    choleskySolveInPlace(factor, 6, b)
    for (let i = 0; i < 6; i++) expect(Math.abs(b[i] - x[i])).toBeLessThan(1e-11)
  })
  test('says 0 for matrices that are singular, indefinite or not numbers', () => {
    expect(choleskyInPlace(Float64Array.from([1, 1, 1, 1]), 2)).toBe(0)
    expect(choleskyInPlace(Float64Array.from([1, 2, 2, 1]), 2)).toBe(0)
    expect(choleskyInPlace(Float64Array.from([0]), 1)).toBe(0)
    expect(choleskyInPlace(Float64Array.from([1, 0, Number.NaN, 1]), 2)).toBe(0)
    expect(choleskyInPlace(Float64Array.from([Number.POSITIVE_INFINITY]), 1)).toBe(0)
  })
  test('its condition estimate does not depend on units', () => {
    const { a } = covariance(3, 5, 4)
    const units = [1e-6, 1, 1e9]
    const scaled = a.map((value, i) => value * units[Math.floor(i / 3)] * units[i % 3])
    const ratio = choleskyInPlace(a, 3) / choleskyInPlace(scaled, 3)
    expect(Math.abs(ratio - 1)).toBeLessThan(1e-12)
  })
})

describe('eigenvalues', () => {
  test('of the second-difference matrix: 2 − 2 cos(kπ/(n + 1)) (Strang, Linear Algebra and Its Applications)', () => {
    const n = 7
    const a = Float64Array.from({ length: n * n }, (_, i) => {
      const apart = Math.abs(Math.floor(i / n) - (i % n))
      return apart === 0 ? 2 : apart === 1 ? -1 : 0
    })
    const { values, vectors } = symmetricEigen(a, n)
    for (let k = 0; k < n; k++) {
      expect(Math.abs(values[k] - (2 - 2 * Math.cos(((k + 1) * Math.PI) / (n + 1))))).toBeLessThan(1e-14)
      const vector = Float64Array.from({ length: n }, (_, i) => vectors[i * n + k])
      const image = timesVector(a, n, vector)
      for (let i = 0; i < n; i++) expect(Math.abs(image[i] - values[k] * vector[i])).toBeLessThan(1e-14)
      expect(Math.abs(vector.reduce((total, v) => total + v * v, 0) - 1)).toBeLessThan(1e-14)
    }
  })
  test('reads the lower triangle and refuses what is not finite', () => {
    expect([...symmetricEigen(Float64Array.from([2, 99, 0, 1]), 2).values]).toEqual([1, 2])
    expect(() => symmetricEigen(Float64Array.from([1, 0, Number.NaN, 1]), 2)).toThrow(RangeError)
  })
})
