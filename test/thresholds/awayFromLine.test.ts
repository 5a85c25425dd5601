/** Effects between two cutoffs against what was drawn, and the fits against weighted least squares by ml-matrix. */
import { inverse, Matrix } from 'ml-matrix'
import { describe, expect, it } from 'vitest'
import { type Random, seededRandom, streamOf } from '../../src/math/index.js'
import { type AwayOptions, awayFromLine, type CurveUnits } from '../../src/thresholds/index.js'

const effect = (score: number) => 1 + score / 50

function unitsOf(random: Random, cutoff: number, shift: number, bend: number, first: number, count = 2000): CurveUnits {
  const score = Float64Array.from({ length: count }, () => 100 * random.next())
  const treated = Uint8Array.from(score, (value) => (value >= cutoff ? 1 : 0))
  const y = score.map(
    (value, i) => shift + value / 40 + bend * value + (treated[i] ? effect(value) : 0) + 0.5 * random.normal(),
  )
  return { score, treated, y, key: Int32Array.from(score, (_, i) => first + i) }
}

const options: AwayOptions = {
  low: 40,
  high: 70,
  bandwidth: 12,
  kernel: 'triangular',
  at: [45, 50, 55, 60, 65],
  level: 0.95,
  random: seededRandom(1),
}

function made(seed: number, bend = 0) {
  const random = streamOf(31, seed)
  const found = awayFromLine(unitsOf(random, 40, 2, bend, 0), unitsOf(random, 70, 0.5, 0, 10_000), {
    ...options,
    random: seededRandom(seed),
  })
  if (!found.ok) throw new Error(found.reason)
  return found
}

describe('effects between two cutoffs', () => {
  it('are covered by the band, all at once, about as often as its level says', () => {
    const draws = 300
    let covered = 0
    let rejected = 0
    for (let seed = 0; seed < draws; seed++) {
      const { points, criticalValue, parallel } = made(seed)
      if (
        points.every(
          ({ score, estimate, standardError }) => Math.abs(estimate - effect(score)) <= criticalValue * standardError,
        )
      )
        covered++
      if ((parallel?.p as number) < 0.05) rejected++
    }
    // three standard errors of 0.95 and 0.05 over 300 draws: 0.038
    expect(covered / draws).toBeGreaterThan(0.912)
    expect(rejected / draws).toBeLessThan(0.088)
  })

  it('show in the test that untreated curves are not parallel', () => {
    expect(made(1, 0.03).parallel?.p).toBeLessThan(0.001)
  })

  it('are sums of local lines: value and hc2 variance by weighted least squares', () => {
    const random = streamOf(31, 0)
    const [low, high] = [unitsOf(random, 40, 2, 0, 0, 300), unitsOf(random, 70, 0.5, 0, 10_000, 300)]
    const found = awayFromLine(low, high, { ...options, at: [55] })
    if (!found.ok) throw new Error(found.reason)
    const pieces = [
      localLine(low, 1, 55, 1),
      localLine(high, 0, 55, -1),
      localLine(low, 0, 40, -1),
      localLine(high, 0, 40, 1),
    ]
    const psi = new Map<number, number>()
    for (const piece of pieces) for (const [key, value] of piece.psi) psi.set(key, (psi.get(key) ?? 0) + value)
    const variance = [...psi.values()].reduce((sum, value) => sum + value * value, 0)
    const [point] = found.points
    expect(point.estimate).toBeCloseTo(
      pieces.reduce((sum, { value }) => sum + value, 0),
      10,
    )
    expect(point.standardError).toBeCloseTo(Math.sqrt(variance), 10)
  })

  it('need units at the low cutoff and between the two', () => {
    const random = streamOf(31, 0)
    const [low, high] = [unitsOf(random, 40, 2, 0, 0, 300), unitsOf(random, 70, 0.5, 0, 10_000, 300)]
    expect(awayFromLine(low, high, { ...options, bandwidth: 0.1 })).toMatchObject({ ok: false })
  })
})

function localLine({ score, treated, y, key }: CurveUnits, isTreated: number, at: number, sign: number) {
  const weight = (i: number) => Math.max(0, 1 - Math.abs(score[i] - at) / 12)
  const rows = [...score.keys()].filter((i) => treated[i] === isTreated && weight(i) > 0)
  const design = new Matrix(rows.map((i) => [1, score[i] - at]))
  const weights = Matrix.diag(rows.map(weight))
  const solve = inverse(design.transpose().mmul(weights).mmul(design)).mmul(design.transpose()).mmul(weights)
  const values = Matrix.columnVector(rows.map((i) => y[i]))
  const hat = design.mmul(solve)
  const residual = Matrix.sub(values, hat.mmul(values))
  return {
    value: sign * solve.mmul(values).get(0, 0),
    psi: rows.map((i, k): [number, number] => [
      key[i],
      (sign * solve.get(0, k) * residual.get(k, 0)) / Math.sqrt(1 - hat.get(k, k)),
    ]),
  }
}
