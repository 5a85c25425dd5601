/** Published worked examples and exact constants that one line's estimate must reproduce. */
import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { buildSample, type Entries, fitLocal, jumpAt, type Kernel, type Variance } from '../../src/jump/index.js'
import { coefficientOf, functional, responseOf } from '../../src/jump/localPolynomial.js'

/**
 * Deaths per 100,000 by age cell around 21, United States: Carpenter & Dobkin 2009, as tabulated for Angrist & Pischke
 * 2015, Mastering 'Metrics, Table 4.1; estimates recomputed from the table by weighted least squares. Five decimals: the
 * ages of the table are rounded to six, which moves the sixth decimal of an estimate.
 */
describe('drinking age', () => {
  const rows = readFileSync(new URL('../fixtures/drinking-age/deaths.csv', import.meta.url), 'utf8')
    .trim()
    .split('\n')
    .slice(1)
    .map((row) => row.split(',').map((cell) => (cell === '' ? Number.NaN : Number(cell))))
    .filter(([, all]) => Number.isFinite(all))
  const entries: Entries = {
    x: Float64Array.from(rows, ([age]) => age - 21),
    treated: Uint8Array.from(rows, ([age]) => (age >= 21 ? 1 : 0)),
    unit: Int32Array.from(rows, (_, i) => i),
    y: Float64Array.from(rows, ([, all]) => all),
  }
  const estimate = (h: number, variance: Variance, order = 1, kernel: Kernel = 'triangular') => {
    const both = { untreated: h, treated: h }
    const options = { order, kernel, variance, reference: 't', level: 0.95 } as const
    const estimated = jumpAt(buildSample(entries), { h: both, b: both }, options)
    if (!estimated.ok) throw new Error(estimated.reason)
    return estimated.jump
  }

  it('local linear, triangular, all causes', () => {
    const one = estimate(1, 'hc0')
    expect(one.unitsInBandwidth.untreated + one.unitsInBandwidth.treated).toBe(24)
    expect(one.plain.estimate).toBeCloseTo(9.70035842, 5)
    expect(one.plain.standardError).toBeCloseTo(1.76325849, 5)
    expect(estimate(1, 'hc2').plain.standardError).toBeCloseTo(2.11733549, 5)
    expect(estimate(1, 'hc3').plain.standardError).toBeCloseTo(2.5764723, 5)
    const wider = estimate(1.5, 'hc0')
    expect(wider.unitsInBandwidth.untreated + wider.unitsInBandwidth.treated).toBe(36)
    expect(wider.plain.estimate).toBeCloseTo(9.28728418, 5)
    expect(wider.plain.standardError).toBeCloseTo(1.48012602, 5)
  })

  it('quadratic on both sides, unweighted: 9.547789, and its HC1 with n/(n−6) over both sides', () => {
    const quadratic = estimate(100, 'hc0', 2, 'uniform')
    expect(quadratic.plain.estimate).toBeCloseTo(9.547789, 6)
    const n = rows.length
    expect(quadratic.plain.standardError * Math.sqrt(n / (n - 6))).toBeCloseTo(1.829703, 6)
  })
})

/** Bias and variance constants of a local fit at an edge: exact integrals, CHECKS table; also Fan & Gijbels 1996, chapter 3. */
describe('kernels at an edge', () => {
  const n = 200_000
  const t = Float64Array.from({ length: n }, (_, i) => (i + 0.5) / n)
  const constants = (order: number, kernel: Kernel) => {
    const side = { t, y: new Float64Array(n), w: null, unit: new Int32Array(n), cluster: null, group: null }
    const fitted = fitLocal(side, order, 1, kernel)
    if (!fitted.ok) throw new Error(fitted.reason)
    const level = functional(fitted.fit, 0)
    const weights = new Float64Array(fitted.fit.count)
    const bias = responseOf(fitted.fit, level)
    expect(coefficientOf(fitted.fit, 0)).toBe(0)
    let squares = 0
    const basis = [1, 0, 0]
    for (let i = 0; i < weights.length; i++) {
      const z = (2 * t[i]) / fitted.fit.scale - 1
      basis[1] = z
      basis[2] = z * z
      const k = kernel === 'triangular' ? 1 - t[i] : kernel === 'epanechnikov' ? 1 - t[i] * t[i] : 1
      const value = k * level.reduce((sum, c, j) => sum + c * basis[j], 0)
      squares += value * value * n
    }
    return { bias, variance: squares }
  }
  it.each([
    ['triangular', -1 / 10, 24 / 5, 3.43754386],
    ['epanechnikov', -11 / 95, 56832 / 12635, 3.19989632],
    ['uniform', -1 / 6, 4, 2.70192008],
  ] as const)('local linear, %s', (kernel, bias, variance, constant) => {
    const got = constants(1, kernel)
    expect(got.bias).toBeCloseTo(bias, 8)
    expect(got.variance).toBeCloseTo(variance, 7)
    expect((got.variance / got.bias ** 2) ** 0.2).toBeCloseTo(constant, 7)
  })
  it('local quadratic, triangular and uniform', () => {
    expect(constants(2, 'triangular').variance).toBeCloseTo(72 / 7, 6)
    expect(constants(2, 'triangular').bias).toBeCloseTo(1 / 35, 8)
    expect(constants(2, 'uniform').variance).toBeCloseTo(9, 6)
    expect(constants(2, 'uniform').bias).toBeCloseTo(1 / 20, 8)
  })
})
