import { readFileSync } from 'node:fs'
import { describe, expect, test } from 'vitest'
import { benjaminiHochberg } from '../../src/checks/index.js'
import { choleskyInPlace, normalUpper, seededRandom } from '../../src/math/index.js'
import { type Contrasts, contrastsOf, LARGEST_LIST } from '../../src/thresholds/contrasts.js'
import type { LineEffects } from '../../src/thresholds/index.js'

/** Made by compare.R beside it, R 4.2.2. */
const golden = JSON.parse(readFileSync(new URL('../golden/thresholds/compare.json', import.meta.url), 'utf8'))

const effectsOf = (estimate: readonly number[], covariance: readonly number[], isDiagonal = false): LineEffects => ({
  ids: estimate.map((_, a) => `line ${a}`),
  estimate: Float64Array.from(estimate),
  covariance: Float64Array.from(covariance),
  isDiagonal,
})

/** Equal variances and one common correlation. */
function exchangeable(count: number, correlation: number): LineEffects {
  const covariance: number[] = []
  for (let a = 0; a < count; a++) for (let b = 0; b < count; b++) covariance.push(a === b ? 3 : 3 * correlation)
  return effectsOf(new Array(count).fill(0), covariance, correlation === 0)
}

const criticalOf = (effects: LineEffects, level: number, draws = 20_000, seed = 5): number =>
  contrastsOf(effects, level, seededRandom(seed), draws).criticalValue

describe('p-values', () => {
  const contrasts: Contrasts = contrastsOf(
    effectsOf(golden.correlated.estimate, golden.correlated.covariance),
    0.95,
    seededRandom(1),
    1000,
  )

  test('all 28 pairs against base R, Holm and BH by p.adjust', () => {
    expect(contrasts.of).toBe(28)
    expect(contrasts.listed.length).toBe(28)
    const g = golden.correlated
    for (let k = 0; k < 28; k++) {
      const [first, second] = [g.contrast_first[k], g.contrast_second[k]]
      const contrast = contrasts.listed.find((one) => one.lines[0] === first && one.lines[1] === second)!
      expect(contrast.estimate).toBeCloseTo(g.contrast_estimate[k], 14)
      expect(contrast.standardError / g.contrast_se[k]).toBeCloseTo(1, 13)
      expect(contrast.p / g.contrast_p[k]).toBeCloseTo(1, 11)
      expect(contrast.pHolm / g.contrast_p_holm[k]).toBeCloseTo(1, 11)
      expect(contrast.pBh / g.contrast_p_bh[k]).toBeCloseTo(1, 11)
      expect(contrast.high - contrast.low).toBeCloseTo(2 * contrasts.criticalValue * contrast.standardError, 13)
    }
  })

  test('ascending', () => {
    for (let k = 1; k < 28; k++) expect(contrasts.listed[k].p).toBeGreaterThanOrEqual(contrasts.listed[k - 1].p)
  })
})

describe('p-values by Benjamini and Hochberg where not all pairs are listed', () => {
  // 60 lines have 1,770 pairs, of which 1,000 are listed; benjaminiHochberg of all is held to base R in ../checks.
  test.each([0.1, 3])('are those among all pairs, spread of the effects %d', (spread) => {
    const random = seededRandom(8)
    const effects = exchangeable(60, 0)
    effects.estimate.forEach((_, a) => {
      effects.estimate[a] = spread * random.normal()
    })
    const { listed, of } = contrastsOf(effects, 0.95, seededRandom(1), 10)
    expect([listed.length, of]).toEqual([1000, 1770])
    const all: number[] = []
    for (let a = 0; a < 60; a++)
      for (let b = a + 1; b < 60; b++)
        all.push(2 * normalUpper(Math.abs(effects.estimate[a] - effects.estimate[b]) / Math.sqrt(6)))
    const wanted = benjaminiHochberg(all).sort((a, b) => a - b)
    expect(wanted[0]).toBeLessThan(1)
    listed.forEach(({ pBh }, k) => {
      expect(pBh / wanted[k]).toBeCloseTo(1, 11)
    })
  })
})

describe('critical value of the largest |t|', () => {
  // 20,000 draws: the 95% quantile has a standard error of about 0.013, the 90% one of about 0.010. Four of them.
  test('two lines: the normal quantile, exactly', () => {
    expect(criticalOf(effectsOf([0, 1], [1, 0.3, 0.3, 2]), 0.95)).toBeCloseTo(1.959963984540054, 12)
  })

  test('three independent lines of unequal precision, by integration', () => {
    const effects = effectsOf([0, 0, 0], golden.critical.independent3, true)
    expect(Math.abs(criticalOf(effects, 0.95) - golden.critical.independent3_95)).toBeLessThan(0.05)
    expect(Math.abs(criticalOf(effects, 0.9) - golden.critical.independent3_90)).toBeLessThan(0.04)
  })

  test('three correlated lines, by integration', () => {
    const effects = effectsOf([0, 0, 0], golden.critical.correlated3)
    expect(Math.abs(criticalOf(effects, 0.95) - golden.critical.correlated3_95)).toBeLessThan(0.05)
    // 400,000 draws come four and a half times nearer.
    expect(Math.abs(criticalOf(effects, 0.95, 400_000) - golden.critical.correlated3_95)).toBeLessThan(0.011)
  })

  test('ten exchangeable lines: the range of ten normals, whatever the correlation', () => {
    for (const correlation of [0, 0.6, -0.1]) {
      const critical = criticalOf(exchangeable(10, correlation), 0.95)
      expect(Math.abs(critical - golden.critical.range10_95)).toBeLessThan(0.05)
    }
  })

  test('forty lines', () => {
    expect(Math.abs(criticalOf(exchangeable(40, 0), 0.9) - golden.critical.range40_90)).toBeLessThan(0.04)
  })

  test('many lines: a bound, not below and at most 2.5% above', () => {
    const critical = criticalOf(exchangeable(150, 0), 0.95)
    expect(critical).toBeGreaterThan(golden.critical.range150_95)
    expect(critical).toBeLessThan(golden.critical.range150_95 * 1.025)
  })

  test('the search for the largest |t| passes over no pair: the same draws, every pair looked at', () => {
    const count = 12
    const draws = 400
    const variance = Array.from({ length: count }, (_, a) => 10 ** ((a % 5) - 2))
    for (const shared of [0, 0.7]) {
      const correlation = new Float64Array(count * count)
      for (let a = 0; a < count; a++) {
        for (let b = 0; b < count; b++) correlation[a * count + b] = a === b ? 1 : shared ** Math.abs(a - b)
      }
      const covariance = Array.from(correlation, (value, k) => {
        return value * Math.sqrt(variance[Math.floor(k / count)] * variance[k % count])
      })
      const effects = effectsOf(new Array(count).fill(0), covariance, shared === 0)
      choleskyInPlace(correlation, count)
      const random = seededRandom(17)
      const maxima = Array.from({ length: draws }, () => {
        const normal = Array.from({ length: count }, () => random.normal())
        const drawn = variance.map((v, a) => {
          let value = 0
          for (let k = 0; k <= a; k++) value += correlation[a * count + k] * normal[k]
          return Math.sqrt(v) * value
        })
        let largest = 0
        for (let a = 0; a < count; a++) {
          for (let b = 0; b < a; b++) {
            const error = Math.sqrt(variance[a] + variance[b] - 2 * covariance[a * count + b])
            largest = Math.max(largest, Math.abs(drawn[a] - drawn[b]) / error)
          }
        }
        return largest
      })
      maxima.sort((a, b) => a - b)
      for (const level of [0.5, 0.9]) {
        expect(criticalOf(effects, level, draws, 17)).toBeCloseTo(maxima[Math.ceil(level * (draws + 1)) - 1], 11)
      }
    }
  })

  test('the same seed gives the same value, another seed another', () => {
    const effects = exchangeable(10, 0.2)
    expect(criticalOf(effects, 0.95, 2000, 3)).toBe(criticalOf(effects, 0.95, 2000, 3))
    expect(criticalOf(effects, 0.95, 2000, 3)).not.toBe(criticalOf(effects, 0.95, 2000, 4))
  })
})

test('lines with the same estimate and units have no contrast', () => {
  const contrasts = contrastsOf(effectsOf([1, 1, 3], [1, 1, 0, 1, 1, 0, 0, 0, 1]), 0.95, seededRandom(1), 500)
  expect(contrasts.of).toBe(2)
  // Both contrasts are the same one, so the critical value is a single normal's, up to the error of 500 draws.
  expect(contrasts.criticalValue).toBeLessThan(2.25)
  // 0.1 + 0.2 is not 0.3: what is left of the variance is rounding.
  const rounded = effectsOf([1, 1.5], [0.3, 0.3, 0.3, 0.1 + 0.2])
  expect(contrastsOf(rounded, 0.95, seededRandom(1), 500).of).toBe(0)
  const none = contrastsOf(effectsOf([1, 1], [1, 1, 1, 1]), 0.95, seededRandom(1), 500)
  expect(none).toEqual({ listed: [], of: 0, criticalValue: expect.closeTo(1.959963984540054, 12) })
})

test('of many contrasts the 1,000 of smallest p are listed, adjusted over all', () => {
  const count = 120
  const random = seededRandom(8)
  const variance = Array.from({ length: count }, () => 0.5 + random.next())
  const estimate = variance.map((v) => Math.sqrt(v) * 3 * random.normal())
  const covariance = new Array<number>(count * count).fill(0)
  for (let a = 0; a < count; a++) covariance[a * count + a] = variance[a]
  const { listed, of } = contrastsOf(effectsOf(estimate, covariance, true), 0.95, seededRandom(1), 10)
  expect(of).toBe((count * (count - 1)) / 2)
  expect(listed.length).toBe(LARGEST_LIST)
  const ratios: number[] = []
  for (let a = 0; a < count; a++) {
    for (let b = a + 1; b < count; b++) {
      ratios.push(Math.abs(estimate[a] - estimate[b]) / Math.sqrt(variance[a] + variance[b]))
    }
  }
  ratios.sort((a, b) => b - a)
  for (const k of [0, 1, 500, 999]) {
    expect(Math.abs(listed[k].estimate) / listed[k].standardError).toBeCloseTo(ratios[k], 12)
  }
  expect(listed[0].pHolm / (of * listed[0].p)).toBeCloseTo(1, 14)
})

test('equal contrasts keep the order of the pairs', () => {
  const { listed } = contrastsOf(exchangeable(60, 0), 0.95, seededRandom(1), 10)
  expect(listed.length).toBe(LARGEST_LIST)
  expect(listed[0].lines).toEqual([0, 1])
  expect(listed[59].lines).toEqual([1, 2])
})
