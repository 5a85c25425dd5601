import { readFileSync } from 'node:fs'
import { describe, expect, test } from 'vitest'
import { seededRandom } from '../../src/math/index.js'
import type { Comparison } from '../../src/results.js'
import { type ComparisonResult, compareLines, type LineEffects } from '../../src/thresholds/index.js'

interface RandomEffectsCase {
  readonly estimate: readonly number[]
  readonly variance: readonly number[]
  readonly level: number
  readonly q: number
  readonly i_squared: number
  readonly dl: number
  readonly reml: number
  readonly pm: number
  readonly mean: number
  readonly standard_error: number
  readonly low: number
  readonly high: number
  readonly prediction_low: number
  readonly prediction_high: number
  readonly shrunken: readonly number[]
  readonly shrunken_low: readonly number[]
  readonly shrunken_high: readonly number[]
}

interface Golden {
  readonly random_effects: readonly RandomEffectsCase[]
  readonly correlated: {
    readonly estimate: readonly number[]
    readonly covariance: readonly number[]
    readonly wald: number
    readonly wald_p: number
  }
}

/** Made by compare.R beside it, R 4.2.2: dense matrices, uniroot, integrate. */
const golden: Golden = JSON.parse(readFileSync(new URL('../golden/thresholds/compare.json', import.meta.url), 'utf8'))

const diagonal = (estimate: readonly number[], variance: readonly number[]): LineEffects => {
  const count = estimate.length
  const covariance = new Float64Array(count * count)
  for (let a = 0; a < count; a++) covariance[a * count + a] = variance[a]
  const ids = estimate.map((_, a) => `line ${a}`)
  return { ids, estimate: Float64Array.from(estimate), covariance, isDiagonal: true }
}

const correlated: LineEffects = {
  ids: golden.correlated.estimate.map((_, a) => `line ${a}`),
  estimate: Float64Array.from(golden.correlated.estimate),
  covariance: Float64Array.from(golden.correlated.covariance),
  isDiagonal: false,
}

function compared(effects: LineEffects, level = 0.95, draws = 100): ComparisonResult {
  const outcome = compareLines(effects, { level, random: seededRandom(1), draws })
  if (!outcome.ok) throw new Error(outcome.reason)
  return outcome.comparison
}

/** Relative closeness; an expected 0 must be 0 to the same absolute size. */
function expectClose(actual: number, expected: number, relative: number): void {
  expect(Math.abs(actual - expected), `${actual} against ${expected}`).toBeLessThanOrEqual(
    relative * (expected === 0 ? 1 : Math.abs(expected)),
  )
}

test('a comparison is what results.json carries', () => {
  const comparison: Comparison = compared(correlated)
  expect(Object.keys(comparison)).toContain('random_effects')
})

describe('random effects', () => {
  test('13 BCG vaccine trials', () => {
    // Colditz et al. 1994: cases and others, vaccinated, then cases and others, not vaccinated (counts from memory; the log
    // risk ratios and variances they give agree with those printed to 10 decimals beside the values below).
    const counts = [
      [4, 119, 11, 128],
      [6, 300, 29, 274],
      [3, 228, 11, 209],
      [62, 13536, 248, 12619],
      [33, 5036, 47, 5761],
      [180, 1361, 372, 1079],
      [8, 2537, 10, 619],
      [505, 87886, 499, 87892],
      [29, 7470, 45, 7232],
      [17, 1699, 65, 1600],
      [186, 50448, 141, 27197],
      [5, 2493, 3, 2338],
      [27, 16886, 29, 17825],
    ]
    const printedY = [
      -0.8893113339, -1.5853886572, -1.3480731483, -1.44155119, -0.2175473222, -0.7861155858, -1.6208982236,
      0.0119523335, -0.4694176487, -1.3713448035, -0.3393588283, 0.4459134006, -0.0173139482,
    ]
    const printedV = [
      0.325584765, 0.1945811214, 0.4153679654, 0.0200100319, 0.0512101722, 0.0069056185, 0.2230172476, 0.0039615793,
      0.0564342105, 0.0730247936, 0.012412214, 0.5325058452, 0.0714046597,
    ]
    const y = counts.map(([a, b, c, d]) => Math.log(a / (a + b) / (c / (c + d))))
    const v = counts.map(([a, b, c, d]) => 1 / a - 1 / (a + b) + 1 / c - 1 / (c + d))
    for (let k = 0; k < 13; k++) {
      expect(y[k]).toBeCloseTo(printedY[k], 9)
      expect(v[k]).toBeCloseTo(printedV[k], 9)
    }
    const c = compared(diagonal(y, v))
    // By a general-purpose meta-analysis library, printed to 10 decimals: 1e-9 relative. What rests on its restricted
    // likelihood is good to 1e-6 and its Paule–Mandel value to 1e-4, where its iterations stop (the generalised Q at
    // 0.3180937119 is 11.9993, not 12); the golden case of the same data has both to 1e-10.
    expectClose(c.tau_squared.dl, 0.3087602629, 1e-9)
    expectClose(c.tau_squared.pm, 0.3180937119, 1e-4)
    expectClose(c.q, 152.23300808, 1e-9)
    expectClose(c.wald.statistic, 152.23300808, 1e-9)
    expect(c.wald.df).toBe(12)
    expectClose(c.i_squared, 92.11734685, 1e-9)
    expectClose(c.tau_squared.reml, 0.313243326, 1e-6)
    expectClose(c.random_effects.estimate, -0.7145323484, 1e-6)
    expectClose(c.random_effects.standard_error, 0.1807917455, 1e-6)
    expectClose(c.random_effects.low, -1.108443723, 1e-6)
    expectClose(c.random_effects.high, -0.3206209737, 1e-6)
    expectClose(c.prediction.low, -1.99601697, 1e-6)
    expectClose(c.prediction.high, 0.56695227, 1e-6)
  })

  test.each(golden.random_effects.map((g, k) => [k, g] as const))('golden case %i', (_, g) => {
    const c = compared(diagonal(g.estimate, g.variance), g.level)
    // Root and likelihood agree to 1e-10: uniroot's own step is the coarser.
    expectClose(c.q, g.q, 1e-12)
    expectClose(c.i_squared, g.i_squared, 1e-12)
    expectClose(c.tau_squared.dl, g.dl, 1e-12)
    expectClose(c.tau_squared.reml, g.reml, 1e-10)
    expectClose(c.tau_squared.pm, g.pm, 1e-10)
    expectClose(c.random_effects.estimate, g.mean, 1e-10)
    expectClose(c.random_effects.standard_error, g.standard_error, 1e-10)
    expectClose(c.random_effects.low, g.low, 1e-10)
    expectClose(c.random_effects.high, g.high, 1e-10)
    expectClose(c.prediction.low, g.prediction_low, 1e-10)
    expectClose(c.prediction.high, g.prediction_high, 1e-10)
    for (let a = 0; a < g.estimate.length; a++) {
      expectClose(c.shrunken[a].estimate, g.shrunken[a], 1e-9)
      expectClose(c.shrunken[a].low, g.shrunken_low[a], 1e-9)
      expectClose(c.shrunken[a].high, g.shrunken_high[a], 1e-9)
    }
  })

  test('two equal estimates: no heterogeneity, and the mean is theirs', () => {
    const c = compared(diagonal([0.7, 0.7], [0.1, 0.4]))
    expect(c.q).toBe(0)
    expect(c.i_squared).toBe(0)
    expect(c.tau_squared).toEqual({ dl: 0, reml: 0, pm: 0 })
    expect(c.random_effects.estimate).toBe(0.7)
    expect(c.wald.p).toBe(1)
  })
})

describe('Wald test of equal effects', () => {
  test('correlated lines against dense matrix algebra', () => {
    const { wald } = compared(correlated)
    expectClose(wald.statistic, golden.correlated.wald, 1e-11)
    expect(wald.df).toBe(7)
    expectClose(wald.p, golden.correlated.wald_p, 1e-10)
  })

  test('independent lines by both routes', () => {
    const effects = diagonal([0.42, -0.15, 0.88, 0.31], [0.031, 0.112, 0.054, 0.009])
    const dense = compared({ ...effects, isDiagonal: false }).wald
    expectClose(compared(effects).wald.statistic, dense.statistic, 1e-12)
  })

  test('a line entered twice adds nothing: its rank is missing from the degrees of freedom', () => {
    const { estimate, covariance } = correlated
    const source = [0, 1, 2, 3, 4, 5, 6, 7, 2]
    const twice: LineEffects = {
      ids: source.map((a, k) => `${a} at ${k}`),
      estimate: Float64Array.from(source, (a) => estimate[a]),
      covariance: Float64Array.from(source.flatMap((a) => source.map((b) => covariance[a * 8 + b]))),
      isDiagonal: false,
    }
    const { wald, contrasts_of } = compared(twice)
    expectClose(wald.statistic, golden.correlated.wald, 1e-8)
    expect(wald.df).toBe(7)
    // 36 pairs, but the line and its copy have no difference to test.
    expect(contrasts_of).toBe(35)
  })

  test('effects that share one shock are compared without it', () => {
    // Covariance v on the diagonal plus a common c: differences do not see c, so the statistic is that of c = 0.
    const y = [1.2, 0.4, -0.3, 0.9, 0.1]
    const v = [0.2, 0.3, 0.1, 0.25, 0.4]
    const plain = compared(diagonal(y, v))
    const shared = diagonal(y, v)
    const covariance = shared.covariance.map((value) => value + 5)
    expectClose(compared({ ...shared, covariance, isDiagonal: false }).wald.statistic, plain.wald.statistic, 1e-10)
  })
})

describe('whatever the scale and the order of lines', () => {
  test('permuted', () => {
    const order = [5, 2, 7, 0, 3, 6, 1, 4]
    const permuted: LineEffects = {
      ids: order.map((a) => correlated.ids[a]),
      estimate: Float64Array.from(order, (a) => correlated.estimate[a]),
      covariance: Float64Array.from(order.flatMap((a) => order.map((b) => correlated.covariance[a * 8 + b]))),
      isDiagonal: false,
    }
    const plain = compared(correlated)
    const other = compared(permuted)
    expectClose(other.wald.statistic, plain.wald.statistic, 1e-12)
    expectClose(other.tau_squared.reml, plain.tau_squared.reml, 1e-12)
    expectClose(other.random_effects.standard_error, plain.random_effects.standard_error, 1e-12)
    for (const [k, a] of order.entries()) expectClose(other.shrunken[k].low, plain.shrunken[a].low, 1e-11)
    const holm = (c: ComparisonResult) =>
      new Map(c.contrasts.map((contrast) => [[...contrast.lines].sort().join('-'), contrast.p_holm]))
    for (const [lines, p] of holm(plain)) expectClose(holm(other).get(lines)!, p, 1e-11)
  })

  test('outcome times -1000, plus a constant', () => {
    const plain = compared(correlated)
    const scaled = compared({
      ...correlated,
      estimate: correlated.estimate.map((value) => -1000 * value + 5e4),
      covariance: correlated.covariance.map((value) => 1e6 * value),
    })
    expectClose(scaled.wald.statistic, plain.wald.statistic, 1e-9)
    expectClose(scaled.q, plain.q, 1e-9)
    for (const kind of ['dl', 'reml', 'pm'] as const) {
      expectClose(scaled.tau_squared[kind], 1e6 * plain.tau_squared[kind], 1e-9)
    }
    expectClose(scaled.random_effects.low, 5e4 - 1000 * plain.random_effects.high, 1e-12)
    expectClose(scaled.prediction.low, 5e4 - 1000 * plain.prediction.high, 1e-12)
    for (const [k, contrast] of plain.contrasts.entries()) {
      expect(scaled.contrasts[k].lines).toEqual(contrast.lines)
      expectClose(scaled.contrasts[k].p_holm, contrast.p_holm, 1e-8)
    }
  })
})

describe('what cannot be compared is a reason', () => {
  const options = { level: 0.95, random: seededRandom(1) }
  test.each<[string, LineEffects, string]>([
    ['no line', diagonal([], []), 'no line has an estimate'],
    ['one line', diagonal([1], [1]), 'one line only'],
    ['no estimate', diagonal([1, Number.NaN], [1, 1]), 'line line 1 has no estimate'],
    ['no error', diagonal([1, 2], [0, 1]), 'line line 0 has no standard error'],
  ])('%s', (_, effects, reason) => {
    expect(compareLines(effects, options)).toEqual({ ok: false, reason })
  })

  test('a level or draws out of range, or arrays that do not fit, are the caller’s fault', () => {
    const effects = diagonal([1, 2], [1, 1])
    expect(() => compareLines(effects, { ...options, level: 95 })).toThrow(RangeError)
    expect(() => compareLines(effects, { ...options, level: Number.NaN })).toThrow(RangeError)
    expect(() => compareLines(effects, { ...options, draws: 0 })).toThrow(RangeError)
    expect(() => compareLines({ ...effects, covariance: new Float64Array(3) }, options)).toThrow(RangeError)
  })
})
