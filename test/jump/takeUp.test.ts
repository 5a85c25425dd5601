/** Ratios against kernel-weighted two-stage least squares and Anderson–Rubin ends by uniroot, both by base R 4.2.2. */
import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { buildSample, jumpAt, takeUpRatio, withOutcomes } from '../../src/jump/index.js'
import { andersonRubinSet } from '../../src/jump/takeUp.js'

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

describe('the Anderson–Rubin set', () => {
  it('is an interval, two rays, all numbers, one ray or nothing', () => {
    const apart = { yy: 1, yd: 0, dd: 1 }
    expect(andersonRubinSet(5, 5, apart, 2)).toHaveLength(1)
    expect(andersonRubinSet(5, 1, apart, 2)).toHaveLength(2)
    expect(andersonRubinSet(1, 1, apart, 2)).toEqual([[Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY]])
    expect(andersonRubinSet(3, 2, { yy: 1, yd: 0, dd: 1 }, 2)).toHaveLength(1)
    // outcome and take-up move together without error of their own difference, which is far from 0 at every t
    expect(andersonRubinSet(10, 4, { yy: 1, yd: 2, dd: 4 }, 1)).toHaveLength(1)
  })
})
