/** The solver behind line fixed effects against certified values: NIST Statistical Reference Datasets (CHECKS). */
import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { seededRandom } from '../../src/math/index.js'
import { type Absorbed, absorbedLeastSquares, type Rows } from '../../src/thresholds/absorbed.js'

type Fit = Extract<Absorbed, { ok: true }>

function rowsOf(rows: readonly number[][], y: readonly number[], weights?: readonly number[], groups?: number[]): Rows {
  return {
    group: Int32Array.from(rows, (_, i) => groups?.[i] ?? 0),
    weight: Float64Array.from(rows, (_, i) => weights?.[i] ?? 1),
    design: rows[0].map((_, column) => Float64Array.from(rows, (row) => row[column])),
    y: Float64Array.from(y),
  }
}

function fitted(rows: readonly number[][], y: readonly number[], weights?: readonly number[], groups?: number[]): Fit {
  const count = groups ? Math.max(...groups) + 1 : 1
  const fit = absorbedLeastSquares(rowsOf(rows, y, weights, groups), count)
  if (!fit.ok) throw new Error('dependent columns')
  return fit
}

const digits = (got: number, wanted: number) => -Math.log10(Math.abs(got / wanted - 1) || 1e-16)

describe('absorbed least squares', () => {
  it('Longley: more than 10 digits of every coefficient, the intercept as the level of one group', () => {
    const data = JSON.parse(readFileSync(new URL('../golden/math/longley.json', import.meta.url), 'utf8'))
    const names = ['deflator', 'gnp', 'unemployed', 'armed_forces', 'population', 'year']
    const rows = data.employed.map((_: number, i: number) => names.map((name) => data[name][i]))
    const fit = fitted(rows, data.employed)
    const certified = [
      15.0618722713733, -0.035819179292591, -2.02022980381683, -1.03322686717359, -0.0511041056535807, 1829.15146461355,
    ]
    certified.forEach((value, j) => {
      expect(digits(fit.slopes[j], value)).toBeGreaterThan(10)
    })
    expect(digits(fit.levels[0], -3482258.63459582)).toBeGreaterThan(10)
  })

  it('Wampler1: all ones, whatever the positive weights', () => {
    const random = seededRandom(3)
    const x = Array.from({ length: 21 }, (_, i) => i)
    const rows = x.map((value) => [1, 2, 3, 4, 5].map((power) => value ** power))
    const y = rows.map((row) => 1 + row.reduce((sum, value) => sum + value, 0))
    for (const weights of [undefined, x.map(() => 0.1 + random.next()), x.map((value) => 1 + value)]) {
      const fit = fitted(rows, y, weights)
      for (const value of [...fit.slopes, ...fit.levels]) expect(Math.abs(value - 1)).toBeLessThan(1e-8)
    }
  })

  it('gives every group its own level, and none to a group without rows', () => {
    const rows = [[1], [2], [5], [3], [7]]
    const groups = [0, 0, 2, 2, 2]
    const fit = fitted(
      rows,
      rows.map(([x], i) => 4 * x + (groups[i] === 0 ? 10 : -6)),
      undefined,
      groups,
    )
    expect(fit.slopes[0]).toBeCloseTo(4, 13)
    expect(fit.levels[0]).toBeCloseTo(10, 12)
    expect(fit.levels[1]).toBeNaN()
    expect(fit.levels[2]).toBeCloseTo(-6, 12)
  })

  it('refuses columns that depend on one another within groups', () => {
    const rows = [[1], [1], [4], [4]]
    const fit = absorbedLeastSquares(rowsOf(rows, [0, 1, 2, 3], undefined, [0, 0, 1, 1]), 2)
    expect(fit).toEqual({ ok: false })
  })
})
