/** The density test against a literal version by ml-matrix, its constants for large samples, its size and its power. */
import { inverse, Matrix } from 'ml-matrix'
import { describe, expect, it } from 'vitest'
import { type DensityTest, densityTest } from '../../src/checks/density.js'
import { holm } from '../../src/checks/multiplicity.js'
import { type Random, seededRandom, streamOf } from '../../src/math/index.js'

const sidesOf = (x: Float64Array) => Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0))

function made(x: Float64Array, bandwidth?: number): DensityTest {
  const found = densityTest(x, sidesOf(x), { kernel: 'triangular', ...(bandwidth === undefined ? {} : { bandwidth }) })
  if (!found.ok) throw new Error(found.reason)
  return found
}

/** Slope at 0 of the distribution function of the whole sample, and its variance from each unit left out of nothing. */
function literal(x: readonly number[], side: 1 | -1, order: number, h: number) {
  const n = x.length
  const share = (at: number) => x.filter((value) => (side > 0 ? value <= at : value < at)).length / n
  const rows = x.filter((value) => (side > 0 ? value >= 0 : value < 0) && Math.abs(value) < h)
  const design = new Matrix(rows.map((value) => Array.from({ length: order + 1 }, (_, j) => value ** j)))
  const weights = Matrix.diag(rows.map((value) => 1 - Math.abs(value) / h))
  const solve = inverse(design.transpose().mmul(weights).mmul(design)).mmul(design.transpose()).mmul(weights)
  // on the untreated side the function runs up to the line: counted from it, 1 − F falls
  const values = Matrix.columnVector(rows.map(share))
  const beta = solve.mmul(values)
  const a = solve.getRow(1)
  const fitted = design.mmul(beta).getColumn(0)
  const f = beta.get(1, 0)
  const variance = x.reduce((sum, unit) => {
    const g = rows.reduce((total, row, i) => total + ((side > 0 ? unit <= row : unit < row) ? a[i] : 0), 0)
    const own = rows.indexOf(unit)
    const psi = (g - f) / n + (own < 0 ? 0 : a[own] * (values.get(own, 0) - fitted[own]))
    return sum + psi * psi
  }, 0)
  return { density: f, standardError: Math.sqrt(variance) }
}

describe('the density on either side of a line', () => {
  it('is the slope of a fit to the distribution function, with the variance of its influence', () => {
    const random = seededRandom(2)
    const x = Float64Array.from({ length: 300 }, () => random.normal() + 0.2)
    const found = made(x, 0.9)
    for (const [name, side] of [
      ['untreated', -1],
      ['treated', 1],
    ] as const) {
      expect(found[name]).toBeCloseTo(literal([...x], side, 2, 0.9).density, 2)
      const third = literal([...x], side, 3, 0.9)
      // F at a unit counts the unit itself: the two sides differ from the literal version by 1/n in the level alone
      expect(found.corrected[name].density).toBeCloseTo(third.density, 8)
      expect(found.corrected[name].standardError / third.standardError).toBeCloseTo(1, 1)
    }
  })

  it('has for the difference the variance of leaving out each unit in turn', () => {
    const random = seededRandom(7)
    const n = 400
    const x = Float64Array.from({ length: n }, () => random.normal())
    const without = Float64Array.from(
      x,
      (_, left) =>
        made(
          x.filter((_, i) => i !== left),
          1.5,
        ).difference,
    )
    const mean = without.reduce((sum, value) => sum + value / n, 0)
    const jackknife = Math.sqrt(((n - 1) / n) * without.reduce((sum, value) => sum + (value - mean) ** 2, 0))

    // 0.9988 here; 0.9917 with half of what the two sides share
    expect(Math.abs(made(x, 1.5).standardError / jackknife - 1)).toBeLessThan(0.004)
  })

  it('has the variance of the published constant: 1080/77 f/(n h) at order 3 (CHECKS; Cattaneo, Jansson & Ma 2020)', () => {
    const random = seededRandom(3)
    const n = 40_000
    const x = Float64Array.from({ length: n }, () => 2 * random.next() - 1)
    const { corrected } = made(x, 0.5)
    for (const side of [corrected.untreated, corrected.treated]) {
      expect(side.density).toBeCloseTo(0.5, 1)
      expect(side.standardError ** 2 / ((1080 / 77) * (0.5 / (n * 0.5)))).toBeCloseTo(1, 1)
    }
  })

  it('does not depend on the order of rows by a bit, nor on the unit of the score', () => {
    const random = seededRandom(4)
    const x = Float64Array.from({ length: 500 }, () => random.normal())
    expect(made(x.slice().reverse())).toEqual(made(x))
    const scaled = made(x.map((value) => 1000 * value))
    expect(scaled.z).toBeCloseTo(made(x).z, 8)
    expect(scaled.bandwidth / made(x).bandwidth).toBeCloseTo(1000, 6)
  })

  it('rejects clean data about as often as its size', () => {
    const draws = 400
    let rejected = 0
    for (let k = 0; k < draws; k++) {
      const random = streamOf(6, k)
      if (made(Float64Array.from({ length: 600 }, () => random.normal() - 0.3)).p < 0.05) rejected++
    }
    // three standard errors of 0.05 over 400 draws: 0.033
    expect(rejected / draws).toBeLessThan(0.083)
    expect(rejected / draws).toBeGreaterThan(0.017)
  })

  it('finds sorting at the one of 40 lines that has it', () => {
    const random = seededRandom(7)
    const draw = (random: Random, isSorted: boolean) =>
      Float64Array.from({ length: 2000 }, () => {
        const value = 2 * random.next() - 1
        return isSorted && value < 0 && value > -0.3 && random.next() < 0.8 ? -value : value
      })
    const p = holm(Array.from({ length: 40 }, (_, line) => made(draw(random, line === 17)).p))
    expect(p.flatMap((value, line) => (value < 0.05 ? [line] : []))).toEqual([17])
  })

  it('says where it can not speak', () => {
    const random = seededRandom(8)
    const coarse = Float64Array.from({ length: 2000 }, () => Math.round(8 * random.next()) - 4)
    expect(densityTest(coarse, sidesOf(coarse), { kernel: 'triangular' })).toMatchObject({
      ok: false,
      reason: 'the score has too few distinct values near the line',
    })
    const few = Float64Array.from({ length: 50 }, () => random.next() - 0.5)
    expect(densityTest(few, sidesOf(few), { kernel: 'triangular' })).toMatchObject({ ok: false })
  })
})
