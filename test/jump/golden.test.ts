/**
 * One line against weighted least squares with sandwich variances, and pooled fixed effects against dense least
 * squares. Values made by base R (test/golden/jump/*.R beside them). Tolerance 1e-9 relative: both are dense double
 * computations of the same formula; the worst agreement seen is about 1e-12.
 */
import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { buildSample, jumpAt, type Variance } from '../../src/jump/index.js'
import { poolLines } from '../../src/thresholds/index.js'

const read = (name: string) => JSON.parse(readFileSync(new URL(`../golden/jump/${name}`, import.meta.url), 'utf8'))

const close = (got: number, wanted: number) =>
  expect(Math.abs(got - wanted)).toBeLessThanOrEqual(1e-9 * Math.abs(wanted))

describe('one line', () => {
  const golden = read('weighted-least-squares.json')
  const variances = ['hc0', 'hc1', 'hc2', 'hc3', 'neighbours', 'clusters'] as const
  for (const known of golden.cases) {
    it(`${known.kernel}, order ${known.order}, h ${known.h}, b ${known.b}${known.weighted ? ', weighted' : ''}`, () => {
      for (const variance of variances) {
        const jump = jumpOf(known, variance)
        close(jump.plain.estimate, known.plain)
        close(jump.corrected.estimate, known.corrected)
        close(jump.plain.standardError ** 2, known.plainVariance[variance])
        close(jump.corrected.standardError ** 2, known.correctedVariance[variance])
        const dof = variance === 'clusters' ? 'G' : 'dof'
        close(jump.plain.degreesOfFreedom, known.plainVariance[dof] - (dof === 'G' ? 1 : 0))
        close(jump.corrected.degreesOfFreedom, known.correctedVariance[dof] - (dof === 'G' ? 1 : 0))
      }
    })
  }

  function jumpOf(
    known: { order: number; kernel: never; h: number; b: number; weighted: boolean },
    variance: Variance,
  ) {
    const sample = buildSample({
      x: Float64Array.from(golden.x),
      treated: Uint8Array.from(golden.x, (x: number) => (x >= 0 ? 1 : 0)),
      unit: Int32Array.from(golden.x, (_, i) => i as number),
      y: Float64Array.from(golden.y),
      cluster: Int32Array.from(golden.cluster),
      w: known.weighted ? Float64Array.from(golden.w) : undefined,
    })
    const { order, kernel, h, b } = known
    const bandwidths = { h: { untreated: h, treated: h }, b: { untreated: b, treated: b } }
    const estimated = jumpAt(sample, bandwidths, { order, kernel, variance, reference: 't', level: 0.95 })
    if (!estimated.ok) throw new Error(estimated.reason)
    return estimated.jump
  }
})

describe('pooled with line fixed effects, against one dummy per line', () => {
  const golden = read('pooled-fixed-effects.json')
  for (const known of golden.cases) {
    it(`${known.kernel}, order ${known.order}${known.weighted ? ', weighted' : ''}`, () => {
      const sample = buildSample({
        x: Float64Array.from(golden.x),
        treated: Uint8Array.from(golden.x, (x: number) => (x >= 0 ? 1 : 0)),
        unit: Int32Array.from(golden.x, (_, i) => i as number),
        y: Float64Array.from(golden.y),
        group: Int32Array.from(golden.line),
        w: known.weighted ? Float64Array.from(golden.w) : undefined,
      })
      const pooled = poolLines(sample, 9, {
        order: known.order,
        kernel: known.kernel,
        variance: 'hc2',
        reference: 't',
        level: 0.95,
        bandwidth: { kind: 'fixed', untreated: known.untreated, treated: known.treated },
        sides: 'common',
        clustered: false,
        fixedEffects: true,
      })
      if (!pooled.ok) throw new Error(pooled.reason)
      close(pooled.jump.plain.estimate, known.jump)
      known.shares.forEach((share: number, line: number) => {
        close(pooled.weights[line], share)
      })
    })
  }
})
