/** Ratios against kernel-weighted two-stage least squares and Anderson–Rubin ends by uniroot, both by base R 4.2.2. */
import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import {
  buildSample,
  crossClusters,
  jumpAt,
  type Sample,
  takeUpRatio,
  varianceOf,
  withOutcomes,
} from '../../src/jump/index.js'
import { andersonRubinSet } from '../../src/jump/takeUp.js'
import { seededRandom } from '../../src/math/index.js'

interface Case {
  readonly x: number[]
  readonly d: number[]
  readonly y: number[]
  readonly ratio: [number]
  readonly standardError: [number]
  readonly f: [number]
  readonly ends: number[]
}
const golden = JSON.parse(readFileSync('test/golden/jump/take-up.json', 'utf8')) as Record<string, Case>

const options = { order: 1, kernel: 'triangular', variance: 'hc0', reference: 'normal', level: 0.95 } as const
const bandwidths = { h: { untreated: 0.8, treated: 0.8 }, b: { untreated: 0.8, treated: 0.8 } }

function ratioOf({ x, d, y }: Case, order = 1) {
  const sample = buildSample({
    x: Float64Array.from(x),
    treated: Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0)),
    unit: Int32Array.from(x, (_, i) => i),
    y: Float64Array.from(y),
  })
  const pick = (unit: Int32Array) => Float64Array.from(unit, (row) => d[row])
  const other = withOutcomes(sample, pick(sample.untreated.unit), pick(sample.treated.unit))
  const [outcome, takeUp] = [sample, other].map((one) => jumpAt(one, bandwidths, { ...options, order }))
  if (!outcome.ok || !takeUp.ok) throw new Error('no estimate')
  const made = takeUpRatio(outcome.jump, takeUp.jump, { level: 0.95 })
  if (typeof made === 'string') throw new Error(made)
  return { made, outcome: outcome.jump, takeUp: takeUp.jump }
}

describe('the effect per unit of take-up', () => {
  it.each(Object.keys(golden))('is two-stage least squares, first stage %s', (name) => {
    const { ratio, standardError, f } = golden[name]
    // the corrected estimate at h = b and order 0 is the plain one of order 1
    const { made } = ratioOf(golden[name])
    expect(made.plain.estimate / ratio[0]).toBeCloseTo(1, 9)
    expect(made.plain.standardError / standardError[0]).toBeCloseTo(1, 9)
    const byOrder0 = ratioOf(golden[name], 0).made
    expect(byOrder0.corrected.estimate / ratio[0]).toBeCloseTo(1, 9)
    expect(byOrder0.corrected.standardError / standardError[0]).toBeCloseTo(1, 9)
    expect(byOrder0.f / f[0]).toBeCloseTo(1, 9)
  })

  it.each(Object.keys(golden))('has the Anderson–Rubin ends of the definition, first stage %s', (name) => {
    const { ends } = golden[name]
    const set = ratioOf(golden[name], 0).made.andersonRubin
    const finite = set.flat().filter(Number.isFinite)
    expect(finite).toHaveLength(ends.length)
    finite.forEach((end, i) => {
      expect(Math.abs(end / ends[i] - 1)).toBeLessThan(1e-8)
    })
  })

  it('is bounded with a strong first stage and not with a weak one', () => {
    expect(ratioOf(golden.strong, 0).made.andersonRubin).toHaveLength(1)
    const unbounded = ratioOf(golden.none, 0).made.andersonRubin
    expect(unbounded.flat().some((end) => !Number.isFinite(end))).toBe(true)
  })

  it('is bounded from an F of the squared quantile, 3.84, on', () => {
    const setOf = (name: string) => ratioOf(golden[name], 0).made
    expect(setOf('over_four').f).toBeCloseTo(4.86, 2)
    expect(setOf('over_four').andersonRubin).toHaveLength(1)
    expect(setOf('under_four').f).toBeCloseTo(3.62, 2)
    const [first, second] = setOf('under_four').andersonRubin
    expect(first[0]).toBe(Number.NEGATIVE_INFINITY)
    expect(second[1]).toBe(Number.POSITIVE_INFINITY)
  })

  it('is the jump itself where take-up jumps by exactly 1', () => {
    const { x, y } = golden.strong
    const { made, outcome } = ratioOf({ ...golden.strong, d: x.map((value) => (value >= 0 ? 1 : 0)), y })
    expect(made.corrected.estimate).toBeCloseTo(outcome.corrected.estimate, 12)
    expect(made.corrected.standardError).toBeCloseTo(outcome.corrected.standardError, 12)
    const [[low, high]] = made.andersonRubin
    expect(low).toBeCloseTo(outcome.corrected.low, 10)
    expect(high).toBeCloseTo(outcome.corrected.high, 10)
  })
})

describe('the variance of the ratio', () => {
  // the ratio's linear form: the jump of y − τd over that of take-up
  it('counts both kinds of clusters that cross', () => {
    const { x, d, y } = golden.strong
    const { cluster, crossed } = crossClusters(
      Int32Array.from(x, (_, i) => (i * 7) % 15),
      Int32Array.from(x, (_, i) => (i * i) % 12),
    )
    const sample = buildSample({
      x: Float64Array.from(x),
      treated: Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0)),
      unit: Int32Array.from(x, (_, i) => i),
      y: Float64Array.from(y),
      cluster,
    })
    const clustered = { ...options, variance: 'clusters', crossed } as const
    const jumpOf = (one: Sample) => {
      const made = jumpAt(one, bandwidths, clustered)
      if (!made.ok) throw new Error(made.reason)
      return made.jump
    }
    const other = (value: (row: number) => number) =>
      jumpOf(
        withOutcomes(
          sample,
          ...([sample.untreated, sample.treated].map(({ unit }) => Float64Array.from(unit, value)) as [
            Float64Array,
            Float64Array,
          ]),
        ),
      )
    const takeUp = other((row) => d[row])
    const made = takeUpRatio(jumpOf(sample), takeUp, { level: 0.95 })
    if (typeof made === 'string') throw new Error(made)
    const rest = other((row) => y[row] - made.corrected.estimate * d[row])
    expect(made.corrected.standardError * Math.abs(takeUp.corrected.estimate)).toBeCloseTo(
      rest.corrected.standardError,
      10,
    )
    const onPairs = { key: made.influence.key, psi: made.influence.psi }
    expect(varianceOf(made.influence)).toBeCloseTo(made.corrected.standardError ** 2, 12)
    expect(Math.abs(varianceOf(onPairs) / varianceOf(made.influence) - 1)).toBeGreaterThan(0.01)
  })
})

describe('the Anderson–Rubin set', () => {
  const [low, high] = [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY]
  const apart = { yy: 1, yd: 0, dd: 1 }

  it('is an interval, two rays or all numbers, where its ends solve the equation', () => {
    const on = (t: number, y: number, d: number) => Math.abs(y - t * d) - 2 * Math.sqrt(1 + t * t)
    const bounded = andersonRubinSet(5, 5, apart, 2)
    expect(bounded).toHaveLength(1)
    for (const end of bounded[0]) expect(on(end, 5, 5)).toBeCloseTo(0, 12)
    const [before, after] = andersonRubinSet(5, 1, apart, 2)
    expect([before[0], after[1]]).toEqual([low, high])
    for (const end of [before[1], after[0]]) expect(on(end, 5, 1)).toBeCloseTo(0, 12)
    expect(andersonRubinSet(1, 1, apart, 2)).toEqual([[low, high]])
  })

  it('is one ray where F is the square of the quantile, and nothing where take-up neither jumps nor varies', () => {
    expect(andersonRubinSet(3, 2, apart, 2)).toEqual([[5 / 12, high]])
    expect(andersonRubinSet(-3, 2, apart, 2)).toEqual([[low, -5 / 12]])
    expect(andersonRubinSet(3, 0, { yy: 1, yd: 0, dd: 0 }, 2)).toEqual([])
  })

  // an outcome of c times take-up: (c − t)²(τ_d² − z²V_dd) ≤ 0
  it('is the ratio alone, or all numbers, where the outcome is take-up times a number', () => {
    const random = seededRandom(3)
    for (let i = 0; i < 500; i++) {
      const [c, jump, dd] = [3 * random.normal(), 0.3 + random.next(), 0.2 * random.next() ** 2]
      const set = andersonRubinSet(c * jump, jump, { yy: c * c * dd, yd: c * dd, dd }, 1.96)
      expect(set).toHaveLength(1)
      const [[first, last]] = set
      if (jump ** 2 < 1.96 ** 2 * dd) expect([first, last]).toEqual([low, high])
      else for (const end of [first, last]) expect(Math.abs(end / c - 1)).toBeLessThan(1e-9)
    }
  })

  it('keeps its width where that is a billionth of the ratio', () => {
    const [[first, last]] = andersonRubinSet(2, 1, { yy: 1e-18, yd: 0, dd: 0 }, 2)
    expect((last - first) / 4e-9).toBeCloseTo(1, 6)
  })

  // F = 4 is above 1.96² = 3.84, F = 3.61 is not
  it('is bounded when F is above the square of the quantile only', () => {
    expect(andersonRubinSet(5, 2, apart, 1.96)).toHaveLength(1)
    expect(andersonRubinSet(5, 1.9, apart, 1.96)).toHaveLength(2)
  })
})
