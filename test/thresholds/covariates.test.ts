/** Covariates against joint weighted least squares by base R 4.2.2 (test/golden/thresholds/covariates.R). */
import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { buildSample } from '../../src/jump/index.js'
import { poolLines } from '../../src/thresholds/index.js'

const golden = JSON.parse(readFileSync('test/golden/thresholds/covariates.json', 'utf8')) as Record<string, number[]>
const { x, line, w, a, b, y, joint, withLines } = golden

function pooled(fixedEffects: boolean, covariates: readonly (readonly number[])[], width: number | 'mse' = 0.8) {
  const sample = buildSample({
    x: Float64Array.from(x),
    treated: Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0)),
    unit: Int32Array.from(x, (_, i) => i),
    y: Float64Array.from(y),
    w: Float64Array.from(w),
    group: Int32Array.from(line),
  })
  const made = poolLines(sample, 5, {
    order: 1,
    kernel: 'triangular',
    variance: 'hc2',
    reference: 't',
    level: 0.95,
    bandwidth: width === 'mse' ? { kind: 'rule', rule: 'mse' } : { kind: 'fixed', untreated: width, treated: width },
    sides: 'common',
    clustered: false,
    fixedEffects,
    covariates: covariates.map((values) => Float64Array.from(values)),
  })
  if (!made.ok) throw new Error(made.reason)
  return made
}

describe('covariates', () => {
  it('make the plain jump that of the joint regression', () => {
    const made = pooled(false, [a, b])
    expect(made.jump.plain.estimate / joint[0]).toBeCloseTo(1, 10)
    expect(made.coefficients[0] / joint[1]).toBeCloseTo(1, 10)
    expect(made.coefficients[1] / joint[2]).toBeCloseTo(1, 10)
  })

  it('and so with a dummy for each line', () => {
    const made = pooled(true, [a, b])
    expect(made.jump.plain.estimate / withLines[0]).toBeCloseTo(1, 10)
    expect(made.coefficients[0] / withLines[1]).toBeCloseTo(1, 10)
  })

  it('are left out where they are constant or a sum of others', () => {
    const sum = a.map((value, i) => value + 2 * b[i])
    const made = pooled(false, [a.map(() => 3), a, b, sum])
    expect([...made.coefficients].map(Number.isNaN)).toEqual([true, false, false, true])
    expect(made.jump.plain.estimate / joint[0]).toBeCloseTo(1, 9)
  })

  it('narrow the interval where they explain the outcome, and keep its level at the line', () => {
    const [without, made] = [pooled(true, [], 'mse'), pooled(true, [a, b], 'mse')]
    expect(made.jump.corrected.standardError).toBeLessThan(without.jump.corrected.standardError)
    expect(Math.abs(made.jump.atLine.untreated - without.jump.atLine.untreated)).toBeLessThan(0.5)
    expect(made.jump.bandwidths.h.treated).not.toBe(without.jump.bandwidths.h.treated)
  })
})
