/** Joint test of several jumps; tails of F from R 4.2.2: pf(x, above, below, lower.tail = FALSE). */
import { describe, expect, it } from 'vitest'
import { jointTest } from '../../src/checks/joint.js'
import { fisherUpper, studentTwoSidedP } from '../../src/math/index.js'

describe('joint test', () => {
  it('has the tails of F', () => {
    expect(fisherUpper(2.5, 5, 60)).toBeCloseTo(0.0402057188302693, 13)
    expect(fisherUpper(0.4, 2, 17.5)).toBeCloseTo(0.676294555042401, 13)
    expect(fisherUpper(12, 1, 8)).toBeCloseTo(0.00851626337090128, 13)
    expect(fisherUpper(1.8, 10, 90.25)).toBeCloseTo(0.0717174683093097, 13)
  })
  it("is Student's for one jump", () => {
    const made = jointTest(Float64Array.of(2.4), Float64Array.of(1.44), [17])
    expect(made).toMatchObject({ ok: true, degreesOfFreedom: [1, 17] })
    expect(made.ok && made.p).toBeCloseTo(studentTwoSidedP(2, 17), 13)
  })
  // (1, 2) with covariance ((2, 1), (1, 3)): T² = 1·(1/5) + 2·(3/5) = 7/5, by hand
  it('weighs jumps by their covariance, with the mean of their degrees of freedom', () => {
    const made = jointTest(Float64Array.of(1, 2), Float64Array.of(2, 1, 1, 3), [26, 16])
    expect(made).toMatchObject({ ok: true, degreesOfFreedom: [2, 20] })
    expect(made.ok && made.square).toBeCloseTo(1.4, 13)
    expect(made.ok && made.f).toBeCloseTo((1.4 * 20) / 42, 13)
  })
  it('refuses jumps that repeat one another, or too many', () => {
    expect(jointTest(Float64Array.of(1, 1), Float64Array.of(1, 1, 1, 1), [30, 30])).toMatchObject({ ok: false })
    expect(jointTest(Float64Array.of(1, 2), Float64Array.of(2, 1, 1, 3), [1.5, 1.9])).toMatchObject({ ok: false })
  })
})
