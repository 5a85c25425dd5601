/** Welch's test against oneway.test of R 4.2.2 on its own data sets PlantGrowth and InsectSprays, and a long-lined F against pf. */
import { describe, expect, it } from 'vitest'
import { fisherUpper } from '../../src/math/index.js'
import { welchOfEquality } from '../../src/thresholds/welch.js'

const ofMeans = (mean: readonly number[], variance: readonly number[], each: number) =>
  welchOfEquality(
    Float64Array.from(mean),
    Float64Array.from(variance, (value) => value / each),
    Float64Array.from(mean, () => each - 1),
  )

describe('equal effects, each variance estimated', () => {
  it('of three groups of ten', () => {
    const made = ofMeans([5.032, 4.661, 5.526], [0.3399955555555556, 0.629921111111111, 0.1958711111111111], 10)
    expect(made.statistic).toBeCloseTo(5.180972408113189, 12)
    expect(made.df[1]).toBeCloseTo(17.12841861664413, 10)
    expect(made.p).toBeCloseTo(0.01739282149017, 13)
  })
  it('of six groups of twelve, far in the tail', () => {
    const mean = [14.5, 46 / 3, 25 / 12, 59 / 12, 3.5, 50 / 3]
    const variance = [
      22.272727272727273, 18.242424242424242, 3.9015151515151514, 6.265151515151516, 3, 38.60606060606061,
    ]
    const made = ofMeans(mean, variance, 12)
    expect(made.statistic).toBeCloseTo(36.06544389357725, 11)
    expect(made.df).toEqual([5, expect.closeTo(30.04256050876738, 9)])
    expect(made.p / 7.999379455673348e-12).toBeCloseTo(1, 9)
  })
  it('of two thousand lines has the tail of F', () => {
    expect(fisherUpper(0.99, 1999, 8000.5)).toBeCloseTo(0.6090458001494714, 11)
    expect(fisherUpper(1.2, 1999, 12000.5) / 2.3673117076603384e-8).toBeCloseTo(1, 8)
  })
  it('is chi-square where variances are known', () => {
    const [one, two] = [Float64Array.of(1, 2, 4), Float64Array.of(1, 2, 1)]
    const made = welchOfEquality(one, two, new Float64Array(3).fill(Number.POSITIVE_INFINITY))
    // weights 1, ½, 1: mean 2.4; (1.96 + 0.08 + 2.56)/2, by hand
    expect(made.statistic).toBeCloseTo(2.3, 12)
    // 1 − pchisq(4.6, 2) = exp(−2.3)
    expect(made.p).toBeCloseTo(Math.exp(-2.3), 6)
  })
})
