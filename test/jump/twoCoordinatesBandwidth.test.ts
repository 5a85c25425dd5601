/**
 * The bandwidth for fits in two coordinates. Its constants against sums over a fine grid on the half disc and the half line,
 * solved by the project's own weighted least squares; its scaling by what it must leave unchanged.
 */
import { describe, expect, it } from 'vitest'
import { buildPlaneSample, type Kernel, planeBandwidth } from '../../src/jump/index.js'
import { addPlaneWeights, fitPlane, levelFunctional } from '../../src/jump/planeFit.js'

/** Constants of the half plane with derivatives of size 1 in every direction, from units on a grid. */
function planeOnGrid(kernel: Kernel, order: number, steps: number) {
  const eastMetres: number[] = []
  const northMetres: number[] = []
  for (let i = -steps; i < steps; i++) {
    for (let j = 0; j < steps; j++) {
      const [e, n] = [(i + 0.5) / steps, (j + 0.5) / steps]
      if (e * e + n * n > 1) continue
      eastMetres.push(e)
      northMetres.push(n)
    }
  }
  const count = eastMetres.length
  const { treated: side } = buildPlaneSample({
    eastMetres: Float64Array.from(eastMetres),
    northMetres: Float64Array.from(northMetres),
    treated: new Uint8Array(count).fill(1),
    unit: new Int32Array(count),
    y: new Float64Array(count),
  })
  const fitted = fitPlane(side, order, 1, kernel)
  if (!fitted.ok) throw new Error(fitted.reason)
  const l = new Float64Array(fitted.fit.count)
  addPlaneWeights(l, fitted.fit, levelFunctional(fitted.fit), 1)
  let square = 0
  for (let a = 0; a <= order + 1; a++) {
    const c = order + 1 - a
    let response = 0
    for (let i = 0; i < l.length; i++) response += l[i] * side.eastMetres[i] ** a * side.northMetres[i] ** c
    square += (response / (factorial(a) * factorial(c))) ** 2
  }
  return { variance: l.reduce((sum, value) => sum + value * value, 0) * steps * steps, squaredBias: square }
}

function factorial(n: number): number {
  return n <= 1 ? 1 : n * factorial(n - 1)
}

/** [V, B²] of local linear fits at an edge: CHECKS, "Kernels at an edge", B² = (bias × 1/2)². */
const atEdge: Readonly<Record<Kernel, readonly [number, number]>> = {
  triangular: [24 / 5, 0.05 ** 2],
  epanechnikov: [56832 / 12635, (11 / 190) ** 2],
  uniform: [4, (1 / 12) ** 2],
}

describe('bandwidth carried over to two coordinates', () => {
  for (const kernel of ['triangular', 'epanechnikov', 'uniform'] as const) {
    it(`${kernel}: constants of the half plane by a grid, of the edge from published values`, () => {
      const { variance, squaredBias } = planeOnGrid(kernel, 1, 300)
      const [v1, squaredBias1] = atEdge[kernel]
      const expected = ((2 * variance * squaredBias1) / (v1 * squaredBias)) ** (1 / 6)
      // the grid's error at the round edge: 1e-3 for the uniform kernel, which jumps there, far less for the others
      expect(Math.abs(planeBandwidth(1, 1, 1, kernel).factor / expected - 1)).toBeLessThan(1e-3)
    })
  }

  it('triangular, order 1: 0.8299 (L h⁵)^(1/6)', () => {
    const { bandwidth, factor } = planeBandwidth(1000, 100_000, 1, 'triangular')
    expect(factor).toBeCloseTo(0.8299, 4)
    expect(bandwidth).toBeCloseTo(factor * (1e5 * 1e15) ** (1 / 6), 6)
  })

  it('lengths in other units give the same bandwidth', () => {
    for (const order of [0, 1, 2, 3]) {
      const metres = planeBandwidth(1300, 64_000, order, 'triangular').bandwidth
      expect(planeBandwidth(1.3, 64, order, 'triangular').bandwidth * 1000).toBeCloseTo(metres, 6)
    }
  })

  it('falls like n^(−1/6) where the one-dimensional one falls like n^(−1/5)', () => {
    const before = planeBandwidth(1000, 50_000, 1, 'epanechnikov').bandwidth
    const after = planeBandwidth(1000 * 64 ** -0.2, 50_000, 1, 'epanechnikov').bandwidth
    expect(after / before).toBeCloseTo(0.5, 10)
  })

  it('throws on lengths that are none', () => {
    expect(() => planeBandwidth(0, 1, 1, 'uniform')).toThrow(RangeError)
    expect(() => planeBandwidth(Number.NaN, 1, 1, 'uniform')).toThrow(RangeError)
    expect(() => planeBandwidth(1, Number.NaN, 1, 'uniform')).toThrow(RangeError)
  })
})
