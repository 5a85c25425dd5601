import { describe, expect, test } from 'vitest'
import { legendreShifted, quantileOfSorted, standardDeviation } from '../../src/math/index.js'
import { meanOf, sum } from '../../src/math/sums.js'

describe('sums', () => {
  test('keep what a plain sum loses', () => {
    expect(sum([1, 1e100, 1, -1e100])).toBe(2)
    expect(sum(new Float64Array(1_000_000).fill(0.1))).toBe(100000)
    expect(meanOf(new Float64Array(10).fill(0.1))).toBe(0.1)
  })
  test('of nothing, and of what is not finite', () => {
    expect(sum([])).toBe(0)
    expect(meanOf([])).toBeNaN()
    expect(sum([1, Number.POSITIVE_INFINITY, 2])).toBe(Number.POSITIVE_INFINITY)
    expect(sum([Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY])).toBeNaN()
    expect(sum([1, Number.NaN])).toBeNaN()
  })
})

describe('quantiles', () => {
  // R 4.2: quantile(c(1, 2, 4, 8, 16), c(0, .1, .25, .5, .9, 1)), its default type 7.
  test('as R’s default', () => {
    const sorted = Float64Array.from([1, 2, 4, 8, 16])
    const found = [0, 0.1, 0.25, 0.5, 0.9, 1].map((p) => quantileOfSorted(sorted, p))
    const expected = [1, 1.4, 2, 4, 12.8, 16]
    for (const [i, value] of found.entries()) expect(Math.abs(value - expected[i])).toBeLessThan(1e-14)
    expect(quantileOfSorted(Float64Array.from([5]), 0.3)).toBe(5)
  })
  test('do not turn an infinite neighbour into NaN, and refuse what is none', () => {
    expect(quantileOfSorted(Float64Array.from([1, 2, Number.POSITIVE_INFINITY]), 0.5)).toBe(2)
    expect(() => quantileOfSorted(new Float64Array(0), 0.5)).toThrow(RangeError)
    expect(() => quantileOfSorted(Float64Array.from([1]), Number.NaN)).toThrow(RangeError)
    expect(() => quantileOfSorted(Float64Array.from([1]), 1.1)).toThrow(RangeError)
  })
})

describe('standard deviation', () => {
  // NIST Statistical Reference Datasets, univariate, NumAcc3 and NumAcc4 (from memory): certified 0.1 exactly.
  test('NumAcc3 and NumAcc4: 1000000.2 and 10000000.2 amid alternating neighbours', () => {
    for (const [centre, tolerance] of [
      [1000000.2, 1e-9],
      [10000000.2, 1e-8],
    ]) {
      const values = Float64Array.from({ length: 1001 }, (_, i) => (i === 0 ? centre : centre + (i % 2 ? -0.1 : 0.1)))
      // The data are not exact doubles: their own rounding, 1e-10 and 1e-9, bounds the agreement.
      expect(Math.abs(standardDeviation(values) - 0.1)).toBeLessThan(tolerance)
    }
  })
  test('small cases, whole numbers', () => {
    expect(standardDeviation(Float64Array.from([2, 4, 4, 4, 5, 5, 7, 9]))).toBe(Math.sqrt(32 / 7))
    expect(standardDeviation(Float64Array.from([3, 3, 3]))).toBe(0)
    expect(standardDeviation(Float64Array.from([3]))).toBeNaN()
  })
})

describe('shifted Legendre polynomials', () => {
  // Abramowitz & Stegun, table 22.13.
  test('the recurrence gives the values of the tabled coefficients', () => {
    // Rows: coefficients of P_j in 1, t, t² … (Abramowitz & Stegun, table 22.13).
    const table = [[1], [-1, 2], [1, -6, 6], [-1, 12, -30, 20], [1, -20, 90, -140, 70], [-1, 30, -210, 560, -630, 252]]
    const out = new Float64Array(6)
    for (const t of [0, 0.13, 0.5, 0.77, 1]) {
      legendreShifted(5, t, out)
      for (let j = 0; j <= 5; j++) {
        const value = table[j].reduceRight((total, coefficient) => total * t + coefficient, 0)
        expect(Math.abs(out[j] - value)).toBeLessThan(1e-13)
      }
    }
    legendreShifted(5, 1, out)
    expect([...out]).toEqual([1, 1, 1, 1, 1, 1])
    expect(() => legendreShifted(6, 0.5, out)).toThrow(RangeError)
  })
})
