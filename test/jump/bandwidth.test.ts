/** The plug-in bandwidth against METHODS section 5 written out literally (literalBandwidth.ts). */
import { describe, expect, it } from 'vitest'
import { bandwidthsFor, buildSample } from '../../src/jump/index.js'
import { seededRandom } from '../../src/math/index.js'
import { type Data, type KernelName, literalBandwidths } from './literalBandwidth.js'

function draw(n: number, seed: number, kind: 'smooth' | 'ties' | 'lopsided'): Data {
  const random = seededRandom(seed)
  const data: Data = { x: [], y: [], treated: [], w: [], cluster: [] }
  for (let i = 0; i < n; i++) {
    const u = random.next()
    const x =
      kind === 'ties'
        ? Math.round((2 * u - 1) * 60)
        : kind === 'lopsided'
          ? 1000 * (u < 0.85 ? -u : u - 0.8)
          : 2 * (u + random.next()) - 2
    const treated = x >= 0
    data.x.push(x)
    data.treated.push(treated)
    data.y.push(Math.sin(x) + (treated ? 0.4 : 0) + 0.3 * random.normal() * (1 + 0.5 * Math.abs(Math.cos(x))))
    data.w?.push(0.5 + random.next())
    data.cluster?.push(Math.floor(random.next() * 25))
  }
  return data
}

function ours(data: Data, order: number, kernel: KernelName, rule: 'mse' | 'coverage', sides: 'common' | 'separate') {
  const sample = buildSample({
    x: Float64Array.from(data.x),
    y: Float64Array.from(data.y),
    treated: Uint8Array.from(data.treated, Number),
    unit: Int32Array.from(data.x, (_, i) => i),
    w: data.w && Float64Array.from(data.w),
    cluster: data.cluster && Int32Array.from(data.cluster),
  })
  const chosen = bandwidthsFor(
    sample,
    { kind: 'rule', rule },
    { order, kernel, sides, clustered: data.cluster !== undefined },
  )
  if (!chosen.ok) throw new Error(chosen.reason)
  return chosen.bandwidths
}

const relative = (got: number, wanted: number) => Math.abs(got / wanted - 1)

describe('plug-in bandwidth equals its literal version to 1e-9', () => {
  for (const kernel of ['triangular', 'epanechnikov', 'uniform'] as const) {
    for (const order of [0, 1, 2, 3]) {
      for (const kind of ['smooth', 'ties', 'lopsided'] as const) {
        it(`${kernel}, order ${order}, ${kind}`, () => {
          const full = draw(400, 11 + order, kind)
          for (const data of [
            { x: full.x, y: full.y, treated: full.treated },
            { ...full, cluster: undefined },
            { ...full, w: undefined },
          ]) {
            for (const rule of ['mse', 'coverage'] as const) {
              const literal = literalBandwidths(data, order, kernel, rule)
              const common = ours(data, order, kernel, rule, 'common')
              expect(relative(common.h.treated, literal.h)).toBeLessThan(1e-9)
              expect(relative(common.b.untreated, literal.b)).toBeLessThan(1e-9)
              const separate = ours(data, order, kernel, rule, 'separate')
              expect(relative(separate.h.untreated, literal.separate.h[0])).toBeLessThan(1e-9)
              expect(relative(separate.h.treated, literal.separate.h[1])).toBeLessThan(1e-9)
              expect(relative(separate.b.treated, literal.separate.b[1])).toBeLessThan(1e-9)
            }
          }
        })
      }
    }
  }
})

describe('a score with few values', () => {
  const coarse = (values: number) => {
    const random = seededRandom(values)
    const data: Data = { x: [], y: [], treated: [] }
    for (let i = 0; i < 600; i++) {
      const x = (Math.floor((2 * random.next() - 1) * values) + 0.5) / values
      data.x.push(x)
      data.treated.push(x >= 0)
      data.y.push(x + (x >= 0 ? 0.4 : 0) + 0.3 * random.normal())
    }
    return ours(data, 1, 'triangular', 'mse', 'common')
  }
  it('of eight a side has bandwidths wide enough for every fit', () => {
    const made = coarse(8)
    // five values strictly inside the sixth, 5.5/8
    expect(made.b.treated).toBeGreaterThanOrEqual(5.5 / 8)
    expect(made.h.treated).toBeGreaterThanOrEqual(5.5 / 8)
  })
  it('of five a side has a reason', () => {
    expect(() => coarse(5)).toThrow('only 2 distinct distances')
  })
})
