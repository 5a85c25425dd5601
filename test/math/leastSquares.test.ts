import { describe, expect, test } from 'vitest'
import { type LeastSquares, leastSquares, seededRandom } from '../../src/math/index.js'
import { golden, relativeError } from './golden.js'

function fitted(columns: Float64Array[], y: Float64Array, weights?: Float64Array): Extract<LeastSquares, { ok: true }> {
  const fit = leastSquares(columns, y, weights)
  if (!fit.ok) throw new Error(fit.reason)
  return fit
}

const powers = (x: Float64Array, degree: number) =>
  Array.from({ length: degree + 1 }, (_, k) => Float64Array.from(x, (value) => value ** k))

describe('NIST Statistical Reference Datasets, certified values (CHECKS)', () => {
  test('Longley: 12 digits, standard deviations of the certified 15 too', () => {
    const data = golden<Record<string, number[]>>('longley.json')
    const names = ['deflator', 'gnp', 'unemployed', 'armed_forces', 'population', 'year']
    const columns = [new Float64Array(16).fill(1), ...names.map((name) => Float64Array.from(data[name]))]
    const fit = fitted(columns, Float64Array.from(data.employed))
    // Intercept first. The certified values have 15 digits; the prices are not exact doubles, which costs two or three.
    const certified = [
      -3482258.63459582, 15.0618722713733, -0.035819179292591, -2.02022980381683, -1.03322686717359,
      -0.0511041056535807, 1829.15146461355,
    ]
    for (let j = 0; j < 7; j++) expect(relativeError(fit.coefficients[j], certified[j])).toBeLessThan(1e-12)
    // Residual standard deviation 304.854073561965 (NIST, from memory); with crossInverse it gives that of the intercept,
    // 890420.383607373 (NIST, from memory). The inverse is not refined: the condition number 5e9 of it leaves 10 digits.
    const squares = fit.residuals.reduce((total, e) => total + e * e, 0)
    expect(relativeError(Math.sqrt(squares / 9), 304.854073561965)).toBeLessThan(1e-12)
    expect(relativeError(Math.sqrt((fit.crossInverse[0] * squares) / 9), 890420.383607373)).toBeLessThan(1e-9)
  })
  test('Wampler1: all ones, whatever the positive weights', () => {
    const columns = powers(
      Float64Array.from({ length: 21 }, (_, i) => i),
      5,
    )
    const y = Float64Array.from({ length: 21 }, (_, i) => columns.reduce((total, column) => total + column[i], 0))
    const random = seededRandom(3)
    const weights = [
      undefined,
      Float64Array.from(y, () => 0.1 + random.next()),
      Float64Array.from(y, () => 10 ** (6 * random.next() - 3)),
      Float64Array.from(y, (_, i) => (i % 3 === 0 ? 0 : i)),
    ]
    for (const w of weights) {
      const fit = fitted(columns, y, w)
      for (const coefficient of fit.coefficients) expect(Math.abs(coefficient - 1)).toBeLessThan(1e-13)
      for (const e of fit.residuals) expect(Math.abs(e)).toBeLessThan(1e-9)
    }
  })
  // Wampler4 (NIST, from memory): the same curve with large alternating errors; certified coefficients 1 again.
  test('Wampler4: all ones under errors a thousand times the signal at its start', () => {
    const delta = [
      75901, -204794, 204863, -204436, 253665, -200894, 214131, -185192, 221249, -138370, 315911, -27644, 455253,
      197434, 783995, 608816, 1370781, 1303798, 2205519, 2408860, 3444321,
    ]
    const columns = powers(
      Float64Array.from({ length: 21 }, (_, i) => i),
      5,
    )
    const fit = fitted(columns, Float64Array.from(delta))
    for (const coefficient of fit.coefficients) expect(Math.abs(coefficient - 1)).toBeLessThan(1e-8)
  })
})

describe('properties', () => {
  const random = seededRandom(8)
  const n = 60
  const columns = [0, 1, 2].map((k) => Float64Array.from({ length: n }, () => (k === 0 ? 1 : random.normal())))
  const y = Float64Array.from({ length: n }, () => random.normal())
  const weights = Float64Array.from({ length: n }, () => random.integer(4))

  test('a weight of k gives what k copies of the row give', () => {
    const rows = Array.from(weights, (w, i) => Array<number>(w).fill(i)).flat()
    const pick = (values: Float64Array) => Float64Array.from(rows, (i) => values[i])
    const once = fitted(columns, y, weights)
    const copied = fitted(columns.map(pick), pick(y))
    for (let j = 0; j < 3; j++) expect(Math.abs(once.coefficients[j] - copied.coefficients[j])).toBeLessThan(1e-14)
    for (let j = 0; j < 9; j++) expect(Math.abs(once.crossInverse[j] - copied.crossInverse[j])).toBeLessThan(1e-15)
  })
  test('weighted residuals are orthogonal to every column, and crossInverse inverts the moments', () => {
    const { residuals, crossInverse } = fitted(columns, y, weights)
    for (let j = 0; j < 3; j++) {
      let product = 0
      for (let i = 0; i < n; i++) product += weights[i] * columns[j][i] * residuals[i]
      expect(Math.abs(product)).toBeLessThan(1e-13)
      for (let k = 0; k < 3; k++) {
        let entry = 0
        for (let m = 0; m < 3; m++) {
          for (let i = 0; i < n; i++) entry += weights[i] * columns[j][i] * columns[m][i] * crossInverse[m * 3 + k]
        }
        expect(Math.abs(entry - (j === k ? 1 : 0))).toBeLessThan(1e-13)
      }
    }
  })
  test('units of a column, even by 1e150, change its coefficient alone', () => {
    const scaled = [columns[0], columns[1].map((x) => x * 1e-150), columns[2].map((x) => x * 1e150)]
    const plain = fitted(columns, y)
    const other = fitted(scaled, y)
    expect(relativeError(other.coefficients[0], plain.coefficients[0])).toBeLessThan(1e-13)
    expect(relativeError(other.coefficients[1], plain.coefficients[1] * 1e150)).toBeLessThan(1e-13)
    expect(relativeError(other.coefficients[2], plain.coefficients[2] * 1e-150)).toBeLessThan(1e-13)
  })
})

describe('what cannot be fitted', () => {
  const ones = new Float64Array(5).fill(1)
  const x = Float64Array.from([1, 2, 3, 4, 5])
  const y = Float64Array.from([2, 1, 4, 3, 5])
  test('a column that is a combination of others is named', () => {
    const twice = x.map((value) => 0.1 * value + 0.3)
    expect(leastSquares([ones, x, twice], y)).toEqual({
      ok: false,
      reason: 'column 3 is a combination of those before it',
    })
    expect(leastSquares([ones, new Float64Array(5)], y)).toEqual({ ok: false, reason: 'column 2 is zero' })
  })
  test('nearly dependent columns (NIST Filip is the like) are still fitted', () => {
    const near = x.map((value, i) => value * (1 + (i === 2 ? 1e-8 : 0)))
    expect(leastSquares([ones, x, near], y).ok).toBe(true)
  })
  test('fewer rows of positive weight than columns', () => {
    const fit = leastSquares([ones, x], y, Float64Array.from([0, 0, 1, 0, 0]))
    expect(fit).toEqual({ ok: false, reason: '1 row of positive weight cannot fit 2 columns' })
    expect(leastSquares([], y).ok).toBe(false)
  })
  test('faults of the caller throw', () => {
    expect(() => leastSquares([ones], new Float64Array(4))).toThrow(RangeError)
    expect(() => leastSquares([ones], y, new Float64Array(4))).toThrow(RangeError)
    expect(() => leastSquares([ones], Float64Array.from([1, 2, Number.NaN, 3, 4]))).toThrow(RangeError)
    expect(() => leastSquares([ones], y, Float64Array.from([1, 1, -1, 1, 1]))).toThrow(RangeError)
  })
})
