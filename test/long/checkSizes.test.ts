/** How often checks at the line flag clean data, and whether they find what is planted. Seeded; a table is printed. */
import { describe, expect, it } from 'vitest'
import {
  binnedDensityTest,
  densityTest,
  discreteDensityTest,
  heapingOf,
  holm,
  jointTest,
  randomisationTest,
} from '../../src/checks/index.js'
import { bandwidthsFor, buildSample, covarianceMatrix, jumpAt } from '../../src/jump/index.js'
import { type Random, streamOf } from '../../src/math/index.js'

const sideOf = (x: Float64Array) => Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0))
const draw = (n: number, one: () => number) => Float64Array.from({ length: n }, one)

/** p of one clean draw; undefined where not possible. */
type Test = (random: Random) => number | undefined

const pOf = (made: { ok: true; p: number } | { ok: false }) => (made.ok ? made.p : undefined)
const onLine = (random: Random, n: number) => draw(n, () => random.normal() - 0.3)

/** Predetermined columns that share a part, each at its own bandwidth, as a study tests them. */
function balance(n: number, columns: number): Test {
  return (random) => {
    const x = draw(n, () => 2 * random.next() - 1)
    const common = draw(n, () => random.normal())
    const jumps = Array.from({ length: columns }, () => {
      const y = x.map((value, i) => Math.sin(2 * value) + 0.5 * common[i] + random.normal() * (1 + 0.5 * value))
      const sample = buildSample({ x, treated: sideOf(x), unit: Int32Array.from(x.keys()), y })
      const options = { order: 1, kernel: 'triangular', variance: 'hc2', reference: 't', level: 0.95 } as const
      const chosen = bandwidthsFor(
        sample,
        { kind: 'rule', rule: 'mse' },
        { ...options, sides: 'common', clustered: false },
      )
      const made = chosen.ok ? jumpAt(sample, chosen.bandwidths, options) : chosen
      if (!made.ok) throw new Error(made.reason)
      return made.jump
    })
    const { matrix } = covarianceMatrix(jumps.map(({ influence }) => influence))
    const estimates = Float64Array.from(jumps, ({ corrected }) => corrected.estimate)
    return pOf(
      jointTest(
        estimates,
        matrix,
        jumps.map(({ corrected }) => corrected.degreesOfFreedom),
      ),
    )
  }
}

const tests: readonly (readonly [string, number, Test])[] = [
  [
    'density, n = 2000',
    2000,
    (random) => {
      const x = onLine(random, 2000)
      return pOf(densityTest(x, sideOf(x), { kernel: 'triangular' }))
    },
  ],
  [
    'histogram, n = 2000',
    2000,
    (random) => {
      const x = onLine(random, 2000)
      return pOf(binnedDensityTest(x, sideOf(x)))
    },
  ],
  [
    'few values, sd of 5 steps',
    2000,
    (random) => {
      const x = draw(2000, () => Math.round(5 * random.normal()))
      return pOf(discreteDensityTest(x, sideOf(x)))
    },
  ],
  [
    'randomisation of means, 25 a side',
    4000,
    (random) => {
      const x = draw(100, () => 2 * random.next() - 1)
      const y = draw(100, () => random.normal() ** 2)
      return pOf(randomisationTest(x, y, sideOf(x), { window: 0.5, draws: 199, statistic: 'means' }, random))
    },
  ],
  [
    'randomisation of ranks, 25 a side',
    4000,
    (random) => {
      const x = draw(100, () => 2 * random.next() - 1)
      const y = draw(100, () => Math.round(2 * random.normal()))
      return pOf(randomisationTest(x, y, sideOf(x), { window: 0.5, draws: 199, statistic: 'ranks' }, random))
    },
  ],
  ['balance of 2 columns jointly, n = 500', 2000, balance(500, 2)],
  ['balance of 5 columns jointly, n = 500', 1500, balance(500, 5)],
  ['balance of 10 columns jointly, n = 2000', 1000, balance(2000, 10)],
  [
    'heaping, whole scores',
    1000,
    (random) => {
      const made = heapingOf(draw(2000, () => Math.round(50 + 12 * random.normal())))
      return made.ok ? Math.min(...made.rows.map(({ pHolm }) => pHolm)) : undefined
    },
  ],
  [
    'heaping, exact scores',
    300,
    (random) => {
      const made = heapingOf(draw(2000, () => 50 + 12 * random.normal()))
      return made.ok ? Math.min(...made.rows.map(({ pHolm }) => pHolm)) : undefined
    },
  ],
]

describe('clean data', () => {
  const sizes = new Map<string, number>()
  for (const [k, [name, draws, test]] of tests.entries()) {
    it(name, () => {
      const ps = Array.from({ length: draws }, (_, i) => test(streamOf(20261201, 100_000 * k + i)))
      const possible = ps.filter((p) => p !== undefined)
      const size = possible.filter((p) => p < 0.05).length / possible.length
      sizes.set(name, size)
      expect(possible.length).toBe(draws)
      // those that bound or step by whole counts may flag less often
      const isExact = /^(density|randomisation|balance)/.test(name)
      if (isExact) expect(size).toBeGreaterThanOrEqual(0.035)
      expect(size).toBeLessThanOrEqual(0.065)
    })
  }
  it('prints a table', () => {
    console.table([...sizes].map(([check, size]) => ({ check, 'flagged at 5%': size })))
  })
})

describe('planted', () => {
  // at one of 40 lines 60% of those just short of it move past it; found in 34 and 37 of 40 studies when this was written
  for (const [units, least] of [
    [600, 28],
    [1000, 32],
  ]) {
    it(`sorting at 1 of 40 lines of ${units} units is found, seldom at another`, () => {
      let found = 0
      let elsewhere = 0
      const draws = 40
      for (let k = 0; k < draws; k++) {
        const random = streamOf(40, k)
        const ps = Array.from({ length: 40 }, (_, line) => {
          const x = draw(units, () => {
            const value = random.normal()
            return line === 17 && value < 0 && value > -0.3 && random.next() < 0.6 ? -value : value
          })
          return pOf(densityTest(x, sideOf(x), { kernel: 'triangular' })) ?? 1
        })
        const adjusted = holm(ps)
        if (adjusted[17] < 0.05) found++
        if (adjusted.some((p, line) => line !== 17 && p < 0.05)) elsewhere++
      }
      console.log(
        `sorting at 1 of 40 lines of ${units} units: found ${found} of ${draws}, another flagged ${elsewhere}`,
      )
      expect(found).toBeGreaterThanOrEqual(least)
      expect(elsewhere).toBeLessThanOrEqual(5)
    })
  }
  it('a tenth of the scores moved to multiples of 5 is found', () => {
    const draws = 50
    const found = Array.from({ length: draws }, (_, k) => {
      const random = streamOf(55, k)
      const made = heapingOf(
        draw(2000, () => {
          const score = Math.round(50 + 12 * random.normal())
          return random.next() < 0.1 ? 5 * Math.round(score / 5) : score
        }),
      )
      return made.ok && made.rows.some(({ multiple, pHolm }) => multiple === 5 && pHolm < 0.05)
    }).filter(Boolean).length
    console.log(`a tenth of the scores moved to multiples of 5: found ${found} of ${draws}`)
    expect(found).toBeGreaterThanOrEqual(45)
  })
})
