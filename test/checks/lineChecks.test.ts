/** Checks at the line against literal versions in base R (golden/checks/line-checks.R). */
import { describe, expect, it } from 'vitest'
import { binnedDensityTest } from '../../src/checks/binnedDensity.js'
import { binomialTail } from '../../src/checks/binomial.js'
import { discreteDensityTest } from '../../src/checks/discreteDensity.js'
import { heapingOf } from '../../src/checks/heaping.js'
import { balancedWindow, randomisationTest } from '../../src/checks/randomisation.js'
import { streamOf } from '../../src/math/index.js'
import golden from '../golden/checks/line-checks.json' with { type: 'json' }

const sideOf = (x: Float64Array) => Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0))

function sure<T extends { ok: boolean }>(made: T): Extract<T, { ok: true }> {
  if (!made.ok) throw new Error(JSON.stringify(made))
  return made as Extract<T, { ok: true }>
}

describe('histogram at the line', () => {
  const x = Float64Array.from(golden.histogram.x)
  it('agrees with the literal fits', () => {
    const made = sure(binnedDensityTest(x, sideOf(x)))
    expect(made.binWidth).toBeCloseTo(golden.histogram.width[0], 12)
    expect(made.bandwidth).toBeCloseTo(golden.histogram.bandwidth[0], 8)
    expect(made.untreated).toBeCloseTo(golden.histogram.densities[0], 9)
    expect(made.treated).toBeCloseTo(golden.histogram.densities[1], 9)
    expect(made.logDifference).toBeCloseTo(golden.histogram.log_difference[0], 9)
    expect(made.standardError).toBeCloseTo(golden.histogram.standard_error[0], 9)
  })
  it('turns its sign with the sides', () => {
    const there = sure(binnedDensityTest(x, sideOf(x)))
    const turned = x.map((value) => -value)
    const back = sure(
      binnedDensityTest(
        turned,
        sideOf(x).map((side) => 1 - side),
      ),
    )
    expect(back.logDifference).toBeCloseTo(-there.logDifference, 12)
  })
  it('says when there is too little', () => {
    expect(binnedDensityTest(x.subarray(0, 50), sideOf(x).subarray(0, 50))).toEqual({
      ok: false,
      reason: 'only 50 units',
    })
  })
})

describe('few values', () => {
  const x = Float64Array.from(golden.few_values.x)
  it('takes the smaller binomial tail at the bounds', () => {
    const made = sure(discreteDensityTest(x, sideOf(x)))
    expect(made.units).toEqual([38, 70, 44])
    expect(made.curvature).toBeCloseTo(golden.few_values.curvature[0], 12)
    expect(made.p).toBeCloseTo(golden.few_values.p[0], 10)
    expect(sure(discreteDensityTest(x, sideOf(x), 0)).p).toBeCloseTo(golden.few_values.p[1], 10)
    expect(sure(discreteDensityTest(x, sideOf(x), 0.3)).p).toBeCloseTo(golden.few_values.p[2], 10)
  })
  it('has binomial tails to nine digits', () => {
    const { count, trials, chance, tail } = golden.binomial
    tail.forEach((value, i) => {
      expect(binomialTail(count[i], trials[i], chance[i]) / value).toBeCloseTo(1, 9)
    })
  })
  it('refuses values unevenly apart', () => {
    const uneven = x.map((value) => (value < 0 ? value - 0.5 : value))
    expect(discreteDensityTest(uneven, sideOf(x))).toMatchObject({ ok: false })
  })
})

describe('heaping', () => {
  const scores = Float64Array.from(golden.round.scores)
  it('counts round numbers against their neighbours', () => {
    const made = sure(heapingOf(scores))
    expect(made).toMatchObject({ step: 1, isRounded: true })
    for (const [multiple, [units, expected, z]] of [
      [5, golden.round.at_5],
      [10, golden.round.at_10],
    ] as const) {
      const row = made.rows.find((one) => one.multiple === multiple)
      expect(row?.units).toBe(units)
      expect(row?.expected).toBeCloseTo(expected, 10)
      expect(row?.z).toBeCloseTo(z, 10)
    }
  })
  it('sees the step of scores kept in halves, and none in exact ones', () => {
    const random = streamOf(3, 0)
    const exact = Float64Array.from({ length: 2000 }, () => 50 + 12 * random.normal())
    expect(sure(heapingOf(exact)).isRounded).toBe(false)
    expect(sure(heapingOf(exact.map((value) => Math.round(value * 2) / 2)))).toMatchObject({
      step: 0.5,
      isRounded: true,
    })
  })
  it('finds multiples of 5 planted among exact scores, and names the largest heaps', () => {
    const random = streamOf(4, 0)
    const scores = Float64Array.from({ length: 4000 }, () => {
      const score = 50 + 12 * random.normal()
      return random.next() < 0.1 ? 5 * Math.round(score / 5) : score
    })
    const made = sure(heapingOf(scores))
    expect(made.rows.find(({ multiple }) => multiple === 5)?.pHolm).toBeLessThan(1e-6)
    expect(made.heaps.every(({ score }) => score % 5 === 0)).toBe(true)
    expect([45, 50, 55]).toContain(made.heaps[0].score)
  })
})

describe('window randomisation', () => {
  const y = Float64Array.from(golden.permutations.y)
  const x = Float64Array.from(y, (_, i) => (i < 6 ? -1 : 1) * (1 + i / 100))
  // 40,000 draws: a standard error of at most 0.0025
  it('comes near the exact p over all assignments', () => {
    for (const statistic of ['means', 'ranks'] as const) {
      const options = { window: 2, draws: 40_000, statistic }
      const made = sure(randomisationTest(x, y, sideOf(x), options, streamOf(1, 0)))
      expect(made.statistic).toBeCloseTo(golden.permutations[statistic][0], 12)
      expect(Math.abs(made.p - golden.permutations[statistic][1])).toBeLessThan(0.01)
    }
  })
  it('assigns within groups, as all their assignments do', () => {
    // two lines, 3 of 6 and 2 of 5 treated: 20 × 10 assignments, counted here one by one
    const outcome = Float64Array.of(1, 2.5, 3, 4, 6, 5, 12, 10, 14, 15, 13)
    const side = Uint8Array.of(0, 0, 0, 1, 1, 1, 0, 0, 0, 1, 1)
    const group = Int32Array.from(outcome, (_, i) => (i < 6 ? 0 : 1))
    const at = Float64Array.from(side, (one) => (one === 1 ? 1 : -1))
    const sumsOf = (values: readonly number[], count: number): number[] =>
      Array.from({ length: 2 ** values.length }, (_, mask) => values.filter((_, i) => mask & (1 << i)))
        .filter((chosen) => chosen.length === count)
        .map(
          (chosen) =>
            chosen.reduce((sum, value) => sum + value, 0) - (count * values.reduce((a, b) => a + b)) / values.length,
        )
    const both = sumsOf([...outcome.subarray(0, 6)], 3).flatMap((a) =>
      sumsOf([...outcome.subarray(6)], 2).map((b) => a + b),
    )
    const seen = 15 - (3 * 21.5) / 6 + 28 - (2 * 64) / 5
    const exact = both.filter((sum) => Math.abs(sum) >= Math.abs(seen) - 1e-9).length / both.length
    expect(both).toHaveLength(200)
    const options = { window: 2, draws: 40_000, statistic: 'means', group } as const
    const made = sure(randomisationTest(at, outcome, side, options, streamOf(3, 0)))
    expect(made.statistic).toBeCloseTo(seen / (9 / 6 + 6 / 5), 12)
    expect(Math.abs(made.p - exact)).toBeLessThan(0.01)
  })
  it('stops where a predetermined column starts to differ', () => {
    const random = streamOf(2, 0)
    const x = Float64Array.from({ length: 1000 }, () => 2 * random.next() - 1)
    const column = x.map((value) => (Math.abs(value) > 0.05 ? 4 * Math.sign(value) : 0) + random.normal())
    const made = sure(balancedWindow(x, [column], sideOf(x), { draws: 500 }, streamOf(2, 1)))
    expect(made.window).toBeLessThan(0.08)
    expect(made.tried[made.tried.length - 1].smallestP).toBeLessThan(0.15)
    expect(sure(balancedWindow(x, [], sideOf(x), { draws: 500 }, streamOf(2, 1))).tried).toHaveLength(1)
  })
  it('needs five units a side', () => {
    const made = randomisationTest(x, y, sideOf(x), { window: 1.02, draws: 10, statistic: 'means' }, streamOf(1, 0))
    expect(made).toEqual({ ok: false, reason: 'only 3 units on the untreated side' })
  })
})
