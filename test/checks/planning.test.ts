import { describe, expect, it } from 'vitest'
import {
  boundaryConstant,
  densityAtLine,
  detectableInStandardErrors,
  plannedStandardError,
  powerAt,
  scoreDesignEffect,
  timesTheUnits,
} from '../../src/checks/planning.js'

describe('power', () => {
  it('of the smallest detectable effect is what was asked: 2.801582 standard errors at 80% (R: uniroot on pnorm)', () => {
    const multiple = detectableInStandardErrors(0.8, 0.05)
    expect(multiple).toBeCloseTo(2.801582, 6)
    expect(powerAt(multiple, 1, 0.05)).toBeCloseTo(0.8, 12)
    expect(powerAt(0, 2, 0.05)).toBeCloseTo(0.05, 12)
    expect(detectableInStandardErrors(0.05001, 0.05)).toBeLessThan(0.05)
    expect(() => detectableInStandardErrors(0.05, 0.05)).toThrow(RangeError)
  })

  it('is reached by the units that are said to be needed', () => {
    const times = timesTheUnits(0.2, 0.1, detectableInStandardErrors(0.9, 0.05))
    expect(powerAt(0.2, 0.1 / Math.sqrt(times), 0.05)).toBeCloseTo(0.9, 10)
  })
})

describe('the design effect of a score', () => {
  // Schochet 2009, IES NCEE 2008-4026, table 4.2
  it.each([
    ['normal', 0.5, 2.75],
    ['normal', 0.33, 2.46],
    ['normal', 0.25, 2.17],
    ['normal', 0.1, 1.52],
    ['uniform', 0.5, 4],
    ['uniform', 0.33, 2.97],
    ['uniform', 0.25, 2.29],
  ] as const)('%s, share treated %f: %f', (shape, share, effect) => {
    expect(Math.abs(scoreDesignEffect(shape, share) - effect)).toBeLessThan(0.005)
  })
})

describe('the constant of a fit at the end of its data', () => {
  // Fan & Gijbels 1996, section 3.2.5: one-sided kernels; 4.8 for the triangular line, 4 for the uniform one
  it('is 24/5 for the triangular line, 1, 4, 9 for uniform orders 0 to 2', () => {
    expect(boundaryConstant('triangular', 1)).toBeCloseTo(4.8, 12)
    expect([0, 1, 2].map((order) => boundaryConstant('uniform', order))).toEqual([
      expect.closeTo(1, 12),
      expect.closeTo(4, 12),
      expect.closeTo(9, 11),
    ])
  })
})

describe('a planned standard error', () => {
  const assumed = {
    units: 1000,
    residualSd: 2,
    shareTreated: 0.5,
    shape: 'normal' as const,
    constant: boundaryConstant('triangular', 1),
    intraclassCorrelation: 0,
    clusterSize: 1,
  }

  it('is that of random assignment times the root of the design effect', () => {
    expect(plannedStandardError(assumed)).toBeCloseTo(Math.sqrt((4 / 250) * scoreDesignEffect('normal', 0.5)), 12)
    const clustered = plannedStandardError({ ...assumed, intraclassCorrelation: 0.1, clusterSize: 21 })
    expect(clustered).toBeCloseTo(Math.sqrt(3) * plannedStandardError(assumed), 12)
  })

  it('within a bandwidth follows from the density at the line', () => {
    const variance = (2 * 4.8 * 4) / (1000 * 0.5 * densityAtLine('normal', 0.5))
    expect(plannedStandardError({ ...assumed, bandwidth: 0.5 })).toBeCloseTo(Math.sqrt(variance), 12)
    expect(densityAtLine('uniform', 0.2)).toBeCloseTo(1 / Math.sqrt(12), 12)
  })
})
