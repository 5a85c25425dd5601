import { readFileSync } from 'node:fs'
import { expect, test } from 'vitest'
import { type LineEffects, type TargetKind, targetEffect } from '../../src/thresholds/index.js'

/** Made by compare.R beside it, R 4.2.2. */
const golden = JSON.parse(
  readFileSync(new URL('../golden/thresholds/compare.json', import.meta.url), 'utf8'),
).correlated

const effects: LineEffects = {
  ids: ['a', 'b', 'c', 'd', 'e', 'f', 'g', 'h'],
  estimate: Float64Array.from(golden.estimate),
  covariance: Float64Array.from(golden.covariance),
  isDiagonal: false,
}
const twoLines: LineEffects = {
  ids: ['a', 'b'],
  estimate: Float64Array.of(1, 4),
  covariance: Float64Array.of(0.25, 0, 0, 1),
  isDiagonal: true,
}

function estimated(of: LineEffects, kind: TargetKind, level = 0.95) {
  const target = targetEffect(of, kind, level)
  if (!target.ok) throw new Error(target.reason)
  return target
}

test('shares of correlated lines, against dense matrix algebra', () => {
  const shares = Float64Array.of(3, 1, 4, 1, 5, 9, 2, 6)
  const target = estimated(effects, { kind: 'shares', name: 'residents', shares })
  expect(target.kind).toBe('residents')
  expect(target.estimate / golden.target).toBeCloseTo(1, 13)
  expect(target.standardError / golden.target_se).toBeCloseTo(1, 13)
  expect(target.p / golden.target_p).toBeCloseTo(1, 11)
  // 1.959963984540054 is the 97.5% quantile of the standard normal.
  expect(target.high - target.low).toBeCloseTo(2 * 1.959963984540054 * golden.target_se, 13)
  for (const [a, weight] of golden.target_weights.entries()) expect(target.weights[a]).toBeCloseTo(weight, 15)
})

test('units, equal and precision, by hand for two independent lines', () => {
  const units = estimated(twoLines, { kind: 'units', units: Float64Array.of(300, 100) })
  expect(units.estimate).toBeCloseTo(0.75 * 1 + 0.25 * 4, 14)
  expect(units.standardError).toBeCloseTo(Math.sqrt(0.5625 * 0.25 + 0.0625), 14)
  const equal = estimated(twoLines, { kind: 'equal' })
  expect(equal.estimate).toBeCloseTo(2.5, 14)
  expect(equal.standardError).toBeCloseTo(Math.sqrt(1.25) / 2, 14)
  const precision = estimated(twoLines, { kind: 'precision' })
  expect(Array.from(precision.weights)).toEqual([0.8, 0.2])
  expect(precision.standardError).toBeCloseTo(Math.sqrt(1 / 5), 14)
})

test('one line is its own target', () => {
  const one: LineEffects = {
    ids: ['a'],
    estimate: Float64Array.of(2),
    covariance: Float64Array.of(4),
    isDiagonal: true,
  }
  expect(estimated(one, { kind: 'equal' })).toMatchObject({ estimate: 2, standardError: 2 })
})

test('weights near the density of units at the line give the pooled effect, other shares another', () => {
  // CHECKS of the pooling identity (Cattaneo, Keele, Titiunik & Vazquez-Bare 2016): effects 1, 2, 4; cutoffs 20, 50, 80 in
  // scores uniform on [0, 100], [20, 80], [60, 100] held by shares .5, .3, .2; pooled 2.3333, weighted by share 1.9.
  const lines: LineEffects = {
    ids: ['20', '50', '80'],
    estimate: Float64Array.of(1, 2, 4),
    covariance: Float64Array.of(1, 0, 0, 0, 1, 0, 0, 0, 1),
    isDiagonal: true,
  }
  const share = [0.5, 0.3, 0.2]
  const atLine = Float64Array.from([1 / 100, 1 / 60, 1 / 40], (density, a) => density * share[a])
  expect(estimated(lines, { kind: 'shares', name: 'density', shares: atLine }).estimate).toBeCloseTo(7 / 3, 14)
  expect(estimated(lines, { kind: 'shares', name: 'share', shares: Float64Array.from(share) }).estimate).toBeCloseTo(
    1.9,
    14,
  )
})

test('what gives no target is a reason', () => {
  const shares = (...values: number[]): TargetKind => ({
    kind: 'shares',
    name: 'residents',
    shares: Float64Array.from(values),
  })
  const reason = (kind: TargetKind, of = twoLines) => targetEffect(of, kind, 0.95)
  expect(reason(shares(1, Number.NaN))).toEqual({ ok: false, reason: 'the weight (residents) of line b is missing' })
  expect(reason(shares(-1, 2))).toEqual({ ok: false, reason: 'the weight (residents) of line a is -1' })
  expect(reason(shares(0, 0))).toEqual({ ok: false, reason: 'the weights (residents) of the lines sum to zero' })
  const none: LineEffects = {
    ids: [],
    estimate: new Float64Array(0),
    covariance: new Float64Array(0),
    isDiagonal: true,
  }
  expect(reason({ kind: 'equal' }, none)).toEqual({ ok: false, reason: 'no line has an estimate' })
  expect(() => targetEffect(twoLines, shares(1), 0.95)).toThrow(RangeError)
  expect(() => targetEffect(twoLines, { kind: 'equal' }, 1)).toThrow(RangeError)
})
