import { describe, expect, it } from 'vitest'
import { type EffectFound, judgePlacebos, rankAmongPlacebos } from '../../src/checks/index.js'
import { studentTwoSidedP } from '../../src/math/index.js'

function effect(estimate: number, standardError: number, degreesOfFreedom = Infinity): EffectFound {
  return { estimate, standardError, p: studentTwoSidedP(estimate / standardError, degreesOfFreedom) }
}

/** K effects with t of 0.1, 0.2, …, alternating in sign, each of standard error 2. */
const quiet = (count: number) =>
  Array.from({ length: count }, (_, i) => effect(((i % 2 === 0 ? 1 : -1) * (i + 1)) / 5, 2))

describe('a real effect among placebo effects', () => {
  it('is ranked by |t| and by |estimate|, itself counted in', () => {
    const placebos = [effect(-1, 1), effect(5, 10), effect(3, 1), effect(-4, 4)]
    // t: 1, 0.5, 3, 1 against 2; sizes: 1, 5, 3, 4 against 2
    const ranked = rankAmongPlacebos(effect(2, 1), placebos, 0.95)
    expect(ranked).toMatchObject({ of: 5, byT: { rank: 2, p: 0.4 }, byEstimate: { rank: 4, p: 0.8 }, smallestP: 0.2 })
  })

  it('does not depend on signs or on the order of placebos', () => {
    const placebos = quiet(9)
    const turned = [...placebos].reverse().map(({ estimate, ...rest }) => ({ estimate: -estimate, ...rest }))
    expect(rankAmongPlacebos(effect(-1, 2), turned, 0.95)).toEqual(rankAmongPlacebos(effect(1, 2), placebos, 0.95))
  })

  it('counts ties against it, and t of p too small to tell apart by size', () => {
    const tie = effect(1, 1)
    expect(rankAmongPlacebos(tie, [tie, tie], 0.95).byT).toEqual({ rank: 3, p: 1 })
    const [huge, larger] = [effect(100, 1), effect(200, 1)]
    expect([huge.p, larger.p]).toEqual([0, 0])
    expect(rankAmongPlacebos(huge, [larger], 0.95).byT.rank).toBe(2)
    expect(rankAmongPlacebos(larger, [huge], 0.95).byT.rank).toBe(1)
  })

  it('puts a t of few degrees of freedom on the scale of its p', () => {
    // t = 6 on 1 degree of freedom: p = 0.105; t = 3 on many: p = 0.0027
    expect(rankAmongPlacebos(effect(3, 1), [effect(6, 1, 1)], 0.95).byT.rank).toBe(1)
  })

  it('has the chance of as many false alarms or more', () => {
    // R 4.2: pbinom(2, 20, 0.05, lower.tail = FALSE), pbinom(8, …), pbinom(99, 1000, …), pbinom(39, 1000, …)
    const chance = (alarms: number, count: number) => {
      const placebos = Array.from({ length: count }, (_, i) => effect(i < alarms ? 3 : 0.1, 1))
      return rankAmongPlacebos(effect(1, 1), placebos, 0.95)
    }
    expect(chance(3, 20).falseAlarms).toBe(3)
    expect(chance(3, 20).falseAlarmsP).toBeCloseTo(0.0754836737884964, 12)
    expect(chance(9, 20).falseAlarmsP / 1.97933810831935e-7).toBeCloseTo(1, 10)
    expect(chance(100, 1000).falseAlarmsP / 8.41025108487736e-11).toBeCloseTo(1, 9)
    expect(chance(40, 1000).falseAlarmsP).toBeCloseTo(0.940185120948097, 12)
    expect(chance(0, 20).falseAlarmsP).toBe(1)
  })

  it('refuses what is no effect', () => {
    for (const wrong of [
      { ...effect(1, 1), estimate: Number.NaN },
      effect(1, 0),
      { estimate: 1, standardError: 1, p: Number.NaN },
    ])
      expect(() => rankAmongPlacebos(effect(1, 1), [wrong], 0.95)).toThrow(RangeError)
    expect(() => rankAmongPlacebos(effect(1, 1), [], 1)).toThrow(RangeError)
  })
})

describe('the verdict', () => {
  const judge = (real: EffectFound, placebos: readonly EffectFound[], level = 0.95) =>
    judgePlacebos(rankAmongPlacebos(real, placebos, level), real, level)

  it('is not possible under five placebo lines', () => {
    expect(judge(effect(9, 1), quiet(4))).toEqual({
      verdict: 'not possible',
      says: '4 borders that change nothing have an estimate, under the 5 it takes; the smallest p they could give is 0.2',
    })
    expect(judge(effect(9, 1), quiet(5)).verdict).toBe('fine')
  })

  it('says how small a p few lines can give', () => {
    expect(judge(effect(9, 1), quiet(18)).says).toContain('the smallest p so few lines could give is 0.053')
    expect(judge(effect(9, 1), quiet(19)).says).not.toContain('smallest p')
  })

  it('doubts an effect that does not stand out', () => {
    const one = [...quiet(18), effect(30, 2)]
    expect(judge(effect(6, 2), quiet(19)).verdict).toBe('fine')
    expect(judge(effect(6, 2), one).verdict).toBe('doubt')
    expect(judge(effect(6, 2), one).says).toContain('ranks 2 of 20 by |t| (p = 0.1)')
    // with too few lines for a p of 5%, only the first place will do
    expect(judge(effect(6, 2), [...quiet(9), effect(30, 2)]).verdict).toBe('doubt')
  })

  it('asks nothing of a study that claims no effect', () => {
    const { verdict, says } = judge(effect(1, 2), quiet(19))
    expect(verdict).toBe('fine')
    expect(says).toContain('the study claims no effect at its level')
  })

  it('doubts intervals that leave out 0 too often', () => {
    const alarms = [...quiet(17), effect(4.2, 2), effect(4.3, 2), effect(-4.4, 2), effect(4.5, 2)]
    const { verdict, says } = judge(effect(90, 2), alarms)
    expect(verdict).toBe('doubt')
    expect(says).toContain('4 of their 21 intervals leave out 0, 1.1 to be expected, so intervals here are too narrow')
  })
})
