/**
 * Coverage of corrected 95% intervals over draws of the three published designs, the mean plug-in bandwidth against the
 * population optimum, and the published coverage and length at that optimum (CHECKS: 10,000 replications).
 */
import { describe, expect, it } from 'vitest'
import { bandwidthsFor, buildSample, jumpAt } from '../../src/jump/index.js'
import { designs, drawDesign } from './designs.js'

const options = { order: 1, kernel: 'triangular', variance: 'hc2', reference: 't', level: 0.95 } as const

describe('plug-in bandwidth and coverage, 1,000 draws of each design', () => {
  for (const design of designs) {
    for (const n of [200, 500, 2000]) {
      it(`${design.name}, n = ${n}`, () => {
        let covered = 0
        let bandwidth = 0
        let length = 0
        const draws = 1000
        for (let k = 0; k < draws; k++) {
          const sample = buildSample(drawDesign(design, n, k))
          const chosen = bandwidthsFor(
            sample,
            { kind: 'rule', rule: 'mse' },
            { ...options, sides: 'common', clustered: false },
          )
          if (!chosen.ok) throw new Error(chosen.reason)
          const estimated = jumpAt(sample, chosen.bandwidths, options)
          if (!estimated.ok) throw new Error(estimated.reason)
          const { low, high } = estimated.jump.corrected
          if (low <= design.jump && design.jump <= high) covered++
          bandwidth += chosen.bandwidths.h.treated / draws
          length += (high - low) / draws
        }
        console.log(
          `${design.name}, n = ${n}: coverage ${(covered / draws).toFixed(3)}, mean length ${length.toFixed(3)}, mean h ${bandwidth.toFixed(4)}`,
        )
        expect(covered / draws).toBeGreaterThanOrEqual(0.91)
        expect(covered / draws).toBeLessThanOrEqual(0.97)
        if (n === 500) expect(Math.abs(bandwidth / design.optimum[0] - 1)).toBeLessThan(design.tolerance)
      })
    }
  }
})

describe('at the population optimum, normal reference, neighbours variance, 10,000 draws', () => {
  // Standard error of a coverage near 0.93 over 10,000 draws: 0.0025; four of them. Lengths to 1.5%: the first and third
  // design agree to 0.2%; where the curve is steep at the line (the second) the neighbours' residuals carry the slope.
  for (const design of designs) {
    it(design.name, () => {
      const [h, b] = design.optimum
      const bandwidths = { h: { untreated: h, treated: h }, b: { untreated: b, treated: b } }
      const found = [0, 0, 0, 0]
      const draws = 10_000
      for (let k = 0; k < draws; k++) {
        const sample = buildSample(drawDesign(design, 500, 100_000 + k))
        const estimated = jumpAt(sample, bandwidths, { ...options, variance: 'neighbours', reference: 'normal' })
        if (!estimated.ok) throw new Error(estimated.reason)
        const { corrected, plain } = estimated.jump
        ;[corrected, plain].forEach(({ low, high }, i) => {
          if (low <= design.jump && design.jump <= high) found[2 * i] += 1 / draws
          found[2 * i + 1] += (high - low) / draws
        })
      }
      console.log(`${design.name}: ${found.map((value) => value.toFixed(4)).join(', ')}`)
      found.forEach((value, i) => {
        const tolerance = i % 2 === 0 ? 0.01 : 0.015 * design.atOptimum[i]
        expect(Math.abs(value - design.atOptimum[i])).toBeLessThan(tolerance)
      })
    })
  }
})
