import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { seededRandom } from '../../src/math/index.js'
import {
  effectSlope,
  type LineEffects,
  leaveOneOut,
  meanWithoutEachLine,
  perUnitOfDose,
  targetEffect,
} from '../../src/thresholds/index.js'
import { randomEffectsMean } from '../../src/thresholds/randomEffects.js'

/** Colditz et al. 1994, 13 BCG trials: log risk ratios and variances (the 5th by its counts: 0.0512101722), latitudes. */
const y = [
  -0.8893113339, -1.5853886572, -1.3480731483, -1.44155119, -0.2175473222, -0.7861155858, -1.6208982236, 0.0119523335,
  -0.4694176487, -1.3713448035, -0.3393588283, 0.4459134006, -0.0173139482,
]
const v = [
  0.325584765, 0.1945811214, 0.4153679654, 0.0200100319, 0.0512101722, 0.0069056185, 0.2230172476, 0.0039615793,
  0.0564342105, 0.0730247936, 0.012412214, 0.5325058452, 0.0714046597,
]
const latitude = [44, 55, 42, 52, 13, 44, 19, 13, 27, 42, 18, 33, 33]

const independent = (estimate: readonly number[], variance: readonly number[]): LineEffects => {
  const covariance = new Float64Array(estimate.length ** 2)
  variance.forEach((value, a) => {
    covariance[a * estimate.length + a] = value
  })
  return {
    ids: estimate.map((_, a) => `line ${a + 1}`),
    estimate: Float64Array.from(estimate),
    covariance,
    isDiagonal: true,
  }
}

/** Slope, intercept, τ², standard error, Knapp–Hartung standard error, its ends and p: base R (test/golden/thresholds/slope.R). */
const golden = JSON.parse(readFileSync('test/golden/thresholds/slope.json', 'utf8')) as Record<string, number[]>

function expectGolden(
  effects: LineEffects,
  attribute: readonly number[],
  wanted: readonly number[],
  tolerance: number,
) {
  const made = effectSlope(effects, Float64Array.from(attribute), 0.95)
  if (!made.ok) throw new Error(made.reason)
  const { estimate, intercept, tauSquared, standardError, knappHartung: scaled } = made.slope
  const found = [
    ...[estimate, intercept, tauSquared, standardError],
    ...[scaled.standardError, scaled.low, scaled.high, scaled.p],
  ]
  found.forEach((value, i) => {
    expect(Math.abs(value / wanted[i] - 1)).toBeLessThan(tolerance)
  })
}

describe('the slope of effects', () => {
  it('on latitude in the BCG trials (CHECKS; a general-purpose meta-analysis library in R)', () => {
    const made = effectSlope(independent(y, v), Float64Array.from(latitude), 0.95)
    if (!made.ok) throw new Error(made.reason)
    const { estimate, standardError, intercept } = made.slope
    expect(Math.abs(estimate - -0.0291016609)).toBeLessThan(2e-6)
    expect(Math.abs(standardError - 0.0071955548)).toBeLessThan(2e-6)
    expect(Math.abs(intercept - 0.2514642944)).toBeLessThan(5e-5)
  })

  // R's optimise finds the top of a likelihood to the root of its precision
  it('has the restricted likelihood and the Knapp–Hartung interval of base R', () => {
    expectGolden(independent(y, v), latitude, golden.bcg, 1e-6)
  })

  it('counts what lines share, in the variance and in that of true effects', () => {
    const { effects, omega, attribute, shared } = golden
    const related: LineEffects = {
      ids: effects.map((_, a) => `line ${a + 1}`),
      estimate: Float64Array.from(effects),
      covariance: Float64Array.from(omega),
      isDiagonal: false,
    }
    expectGolden(related, attribute, shared, 1e-9)
  })

  it('is weighted least squares where true effects do not vary', () => {
    const made = effectSlope(independent([1, 2, 3, 4], [1, 1, 1, 1]), Float64Array.of(1, 2, 3, 4), 0.95)
    expect(made).toMatchObject({ ok: true, slope: { tauSquared: 0, lines: 4 } })
    if (made.ok) expect(made.slope.estimate).toBeCloseTo(1, 12)
    if (made.ok) expect(made.slope.standardError).toBeCloseTo(1 / Math.sqrt(5), 12)
  })

  it('needs three lines that differ, and passes over those without the attribute', () => {
    const effects = independent([1, 2, 3], [1, 1, 1])
    expect(effectSlope(effects, Float64Array.of(1, 1, 1), 0.95)).toMatchObject({ ok: false })
    expect(effectSlope(effects, Float64Array.of(1, 2, Number.NaN), 0.95)).toMatchObject({ ok: false })
  })
})

/** Shared units: every pair of lines correlated. */
function related(): { effects: LineEffects; weights: Float64Array } {
  const covariance = Float64Array.of(2, 0.5, 0.3, 0.5, 1, -0.2, 0.3, -0.2, 3)
  const effects = { ids: ['a', 'b', 'c'], estimate: Float64Array.of(1, 4, -2), covariance, isDiagonal: false }
  return { effects, weights: Float64Array.of(0.5, 0.3, 0.2) }
}

describe('the mean without a line', () => {
  it('is the target of the other lines', () => {
    const { effects, weights } = related()
    const found = leaveOneOut(effects, weights, 0.95)
    expect(found.map(({ line }) => line)).toEqual(['a', 'b', 'c'])
    const others: LineEffects = {
      ids: ['a', 'c'],
      estimate: Float64Array.of(1, -2),
      covariance: Float64Array.of(2, 0.3, 0.3, 3),
      isDiagonal: false,
    }
    const target = targetEffect(others, { kind: 'shares', name: 'w', shares: Float64Array.of(0.5, 0.2) }, 0.95)
    if (!target.ok) throw new Error(target.reason)
    expect(found[1].estimate).toBeCloseTo(target.estimate, 12)
    expect(found[1].standardError).toBeCloseTo(target.standardError, 12)
    expect(found[1].low).toBeCloseTo(target.low, 12)
  })
})

describe('the mean without each of 40 lines', () => {
  const random = seededRandom(11)
  const count = 40
  const estimate = Float64Array.from({ length: count }, () => random.normal())
  const raw = Float64Array.from({ length: count }, () => random.next() ** 3)
  const total = raw.reduce((sum, weight) => sum + weight, 0)
  const weights = raw.map((weight) => weight / total)
  // AA' + I: a covariance of lines that share units
  const factor = Float64Array.from({ length: count * count }, () => random.normal())
  const covariance = Float64Array.from({ length: count * count }, (_, cell) => {
    const [a, b] = [Math.floor(cell / count), cell % count]
    let product = a === b ? 1 : 0
    for (let k = 0; k < count; k++) product += factor[a * count + k] * factor[b * count + k]
    return product
  })
  const ids = Array.from(estimate, (_, a) => `line ${a}`)

  it.each([false, true])('is the double sum over the others, each made anew (independent lines: %s)', (isDiagonal) => {
    const known = covariance.map((value, cell) => (isDiagonal && Math.floor(cell / count) !== cell % count ? 0 : value))
    const found = leaveOneOut({ ids, estimate, covariance: known, isDiagonal }, weights, 0.95)
    expect(found).toHaveLength(count)
    found.forEach((one, left) => {
      const share = weights.map((weight, a) => (a === left ? 0 : weight))
      const sum = share.reduce((all, weight) => all + weight, 0)
      let [mean, variance] = [0, 0]
      for (let a = 0; a < count; a++) {
        mean += (share[a] / sum) * estimate[a]
        for (let b = 0; b < count; b++) variance += (share[a] / sum) * (share[b] / sum) * known[a * count + b]
      }
      expect(Math.abs(one.estimate - mean)).toBeLessThan(1e-12)
      expect(Math.abs(one.standardError / Math.sqrt(variance) - 1)).toBeLessThan(1e-12)
    })
  })
})

describe('the random-effects mean without a line', () => {
  it('is that of the other lines at the same variance of true effects', () => {
    const tauSquared = 0.313243326
    const found = meanWithoutEachLine(independent(y, v), tauSquared, 0.95)
    expect(found).toHaveLength(13)
    found.forEach((one, a) => {
      const others = (values: readonly number[]) => Float64Array.from(values.filter((_, i) => i !== a))
      const wanted = randomEffectsMean(others(y), others(v), tauSquared, 0.95)
      for (const name of ['estimate', 'standardError', 'low', 'high'] as const)
        expect(one[name] / wanted[name]).toBeCloseTo(1, 10)
    })
    expect(meanWithoutEachLine(independent([1, 2], [1, 1]), 0, 0.95)).toEqual([])
  })
})

describe('the effect per unit of dose', () => {
  it('is the slope through 0 with the stated weights', () => {
    const { effects, weights } = related()
    const made = perUnitOfDose(effects, weights, Float64Array.of(1, 2, 3), 0.95)
    const divisor = 0.5 + 0.3 * 4 + 0.2 * 9
    expect(made?.estimate).toBeCloseTo((0.5 * 1 + 0.3 * 2 * 4 + 0.2 * 3 * -2) / divisor, 12)
    const c = [0.5, 0.6, 0.6].map((share) => share / divisor)
    const variance =
      c[0] ** 2 * 2 + c[1] ** 2 + c[2] ** 2 * 3 + 2 * (c[0] * c[1] * 0.5 + c[0] * c[2] * 0.3 - c[1] * c[2] * 0.2)
    expect(made?.standardError).toBeCloseTo(Math.sqrt(variance), 12)
    expect(perUnitOfDose(effects, weights, new Float64Array(3), 0.95)).toBeUndefined()
  })
})
