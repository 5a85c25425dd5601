import jStat from 'jstat'
import { describe, expect, test } from 'vitest'
import {
  chiSquareUpper,
  foldedNormalQuantile,
  normalCdf,
  normalQuantile,
  normalUpper,
  studentQuantile,
  studentTwoSidedP,
} from '../../src/math/index.js'
import { golden, relativeError } from './golden.js'

// Made by R 4.2.2: test/golden/math/distributions.R. A null is an infinite value.
const r = golden<Record<string, (number | null)[][]>>('distributions.json')

/** The rows of a table whose value is off by more than the tolerance; empty when all agree. */
function misses(table: string, tolerance: number, f: (...of: number[]) => number): string[] {
  const rows = r[table]
  expect(rows.length).toBeGreaterThan(15)
  return rows.flatMap((row) => {
    const given = row.slice(0, -1) as number[]
    const last = row[row.length - 1]
    const value = f(...given)
    const isRight =
      last === null ? Math.abs(value) === Number.POSITIVE_INFINITY : relativeError(value, last) <= tolerance
    return isRight ? [] : [`(${given.join(', ')}): ${value}, R has ${last}`]
  })
}

describe('against R 4.2', () => {
  test('normal, both tails to z = 37: rounding of the last place only', () => {
    expect(r.normal.length).toBeGreaterThan(20)
    for (const [z, upper, lower] of r.normal as number[][]) {
      expect(relativeError(normalUpper(z), upper)).toBeLessThan(1e-15)
      expect(relativeError(normalCdf(-z), upper)).toBeLessThan(1e-15)
      expect(relativeError(normalCdf(z), lower)).toBeLessThan(1e-15)
    }
  })
  test('normal quantile down to 1e-300', () => expect(misses('normal_quantile', 1e-15, normalQuantile)).toEqual([]))
  // The rest: 1e-12 as asked; an exponent near 700 alone costs 700 rounding units, 1.6e-13, and R has its own.
  test('Student, 0.3 to 1e8 degrees of freedom, t to 1e6', () => {
    expect(misses('student', 1e-12, studentTwoSidedP)).toEqual([])
  })
  test('Student quantile', () => expect(misses('student_quantile', 1e-12, studentQuantile)).toEqual([]))
  test('chi-square upper tail to 1e-300', () => expect(misses('chi_square', 1e-12, chiSquareUpper)).toEqual([]))
})

describe('Student with very many degrees of freedom', () => {
  // Fisher's expansion (Abramowitz & Stegun 26.7.8): the next term after 1/ν is of order z⁸/ν², under 1e-15 here.
  test('agrees with the normal and its first correction', () => {
    for (const df of [1e9, 1e12, 1e15]) {
      for (const z of [0.5, 1.96, 4]) {
        const density = Math.exp((-z * z) / 2) / Math.sqrt(2 * Math.PI)
        const expected = 2 * (normalUpper(z) + (density * (z ** 3 + z)) / (4 * df))
        expect(relativeError(studentTwoSidedP(z, df), expected)).toBeLessThan(1e-13)
      }
    }
  })
  test('is the normal at Infinity', () => {
    expect(studentTwoSidedP(1.5, Number.POSITIVE_INFINITY)).toBe(2 * normalUpper(1.5))
    expect(studentQuantile(0.975, Number.POSITIVE_INFINITY)).toBe(normalQuantile(0.975))
    expect(relativeError(studentQuantile(0.975, 1e12), normalQuantile(0.975))).toBeLessThan(2e-12)
  })
})

describe('folded normal quantile', () => {
  // Made by R 4.2.2: test/golden/math/folded-normal.R.
  test('against R’s root of pnorm, means to 1e7, levels to 1 − 1e-12', () => {
    const { quantiles } = golden<{ quantiles: number[][] }>('folded-normal.json')
    expect(quantiles.length).toBeGreaterThan(150)
    for (const [outside, t, q] of quantiles) {
      // 1 − outside is rounded to 1e-16, which moves a quantile far out by that over its tail.
      const lost = 1e-16 / outside
      expect(relativeError(foldedNormalQuantile(1 - outside, t), q)).toBeLessThan(1e-14 + lost)
    }
  })
  // CHECKS: 95% quantile of |N(t, 1)| (Armstrong & Kolesár 2018, 2020), printed to six places.
  test('of the bias-aware table', () => {
    const table = [
      [0, 1.959964],
      [0.1, 1.969726],
      [0.2, 1.998549],
      [0.3, 2.045053],
      [0.5, 2.181477],
      [0.8, 2.450465],
      [1, 2.646146],
      [1.5, 3.14487],
      [2, 3.644854],
    ]
    for (const [t, quantile] of table) {
      expect(Math.abs(foldedNormalQuantile(0.95, t) - quantile)).toBeLessThan(5.1e-7)
      expect(foldedNormalQuantile(0.95, -t)).toBe(foldedNormalQuantile(0.95, t))
    }
  })
  test('levels under one half, ends and faults', () => {
    for (const probability of [1e-9, 0.01, 0.3]) {
      for (const t of [0, 0.4, 3, 12]) {
        const q = foldedNormalQuantile(probability, t)
        const inside = normalCdf(q - t) - normalCdf(-q - t)
        expect(Math.abs(inside - probability)).toBeLessThan(1e-12 * Math.max(probability, 1e-4))
      }
    }
    expect(foldedNormalQuantile(0, 1)).toBe(0)
    expect(foldedNormalQuantile(1, 1)).toBe(Number.POSITIVE_INFINITY)
    expect(() => foldedNormalQuantile(0.95, Number.NaN)).toThrow(RangeError)
    expect(() => foldedNormalQuantile(1.1, 0)).toThrow(RangeError)
  })
})

// The package jstat as a second, independent source where it is good to about 1e-7 or better.
test('jstat agrees in its ordinary range', () => {
  for (const p of [0.001, 0.025, 0.2, 0.6, 0.95, 0.995]) {
    expect(Math.abs(normalQuantile(p) - jStat.normal.inv(p, 0, 1))).toBeLessThan(1e-8)
    for (const df of [2, 5.5, 30, 400]) {
      expect(relativeError(studentQuantile(p, df), jStat.studentt.inv(p, df))).toBeLessThan(1e-6)
    }
  }
  for (const x of [0.2, 0.9, 1.7, 3.1]) {
    expect(Math.abs(normalCdf(x) - jStat.normal.cdf(x, 0, 1))).toBeLessThan(1e-14)
    for (const df of [3, 12, 80]) {
      expect(Math.abs(1 - studentTwoSidedP(x, df) / 2 - jStat.studentt.cdf(x, df))).toBeLessThan(1e-7)
      expect(Math.abs(1 - chiSquareUpper(x * df, df) - jStat.chisquare.cdf(x * df, df))).toBeLessThan(1e-8)
    }
  }
})

test('ends and faults', () => {
  expect(normalUpper(60)).toBe(0)
  expect(normalUpper(-60)).toBe(1)
  expect(normalUpper(Number.NEGATIVE_INFINITY)).toBe(1)
  expect(normalUpper(Number.NaN)).toBeNaN()
  expect(normalQuantile(0)).toBe(Number.NEGATIVE_INFINITY)
  expect(normalQuantile(1)).toBe(Number.POSITIVE_INFINITY)
  expect(studentTwoSidedP(0, 3)).toBe(1)
  expect(studentTwoSidedP(Number.NEGATIVE_INFINITY, 3)).toBe(0)
  expect(studentQuantile(0, 3)).toBe(Number.NEGATIVE_INFINITY)
  expect(chiSquareUpper(-1, 3)).toBe(1)
  expect(chiSquareUpper(Number.POSITIVE_INFINITY, 3)).toBe(0)
  const faults = [
    () => normalQuantile(Number.NaN),
    () => normalQuantile(1.2),
    () => studentTwoSidedP(1, 0),
    () => studentTwoSidedP(Number.NaN, 3),
    () => studentQuantile(0.5, Number.NaN),
    () => studentQuantile(-0.1, 3),
    () => chiSquareUpper(Number.NaN, 3),
    () => chiSquareUpper(1, Number.NaN),
  ]
  for (const fault of faults) expect(fault).toThrow(RangeError)
})
