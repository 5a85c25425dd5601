/** Identities and invariances that any right estimator of a jump has; METHODS section 3 for the first. */
import { describe, expect, it } from 'vitest'
import {
  type BandwidthChoice,
  bandwidthsFor,
  buildSample,
  type Entries,
  type JumpFit,
  jumpAt,
  type Variance,
} from '../../src/jump/index.js'
import { seededRandom } from '../../src/math/index.js'

const variances: readonly Variance[] = ['hc0', 'hc1', 'hc2', 'hc3', 'neighbours', 'clusters']

function draw(n: number, seed: number): Entries & { w: Float64Array; cluster: Int32Array } {
  const random = seededRandom(seed)
  const x = Float64Array.from({ length: n }, () => 2 * random.next() - 1.1)
  return {
    x,
    treated: Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0)),
    unit: Int32Array.from(x, (_, i) => i),
    y: Float64Array.from(x, (value) => Math.cos(2 * value) + (value >= 0 ? 0.5 : 0) + 0.2 * random.normal()),
    w: Float64Array.from(x, () => 0.5 + random.next()),
    cluster: Int32Array.from(x, () => Math.floor(random.next() * 40)),
  }
}

function estimate(entries: Entries, order: number, variance: Variance, choice: BandwidthChoice): JumpFit {
  const sample = buildSample(entries)
  const chosen = bandwidthsFor(sample, choice, {
    order,
    kernel: 'triangular',
    sides: 'common',
    clustered: variance === 'clusters',
  })
  if (!chosen.ok) throw new Error(chosen.reason)
  const options = { order, kernel: 'triangular', variance, reference: 't', level: 0.95 } as const
  const estimated = jumpAt(sample, chosen.bandwidths, options)
  if (!estimated.ok) throw new Error(estimated.reason)
  return estimated.jump
}

const fixed = (h: number): BandwidthChoice => ({ kind: 'fixed', untreated: h, treated: h })
const rule: BandwidthChoice = { kind: 'rule', rule: 'mse' }
const close = (got: number, wanted: number, tolerance: number) =>
  expect(Math.abs(got - wanted)).toBeLessThanOrEqual(tolerance * Math.max(1e-3, Math.abs(wanted)))

describe('jump', () => {
  it('with h = b the corrected estimate is the next order, standard error included, to 1e-10', () => {
    for (const order of [0, 1, 2, 3]) {
      for (const variance of variances) {
        const { corrected } = estimate(draw(500, 3), order, variance, fixed(0.7))
        const { plain } = estimate(draw(500, 3), order + 1, variance, fixed(0.7))
        close(corrected.estimate, plain.estimate, 1e-10)
        close(corrected.standardError, plain.standardError, 1e-10)
        close(corrected.degreesOfFreedom, plain.degreesOfFreedom, 1e-10)
      }
    }
  })

  it('swapping the sides flips the sign', () => {
    const entries = draw(400, 5)
    const swapped = { ...entries, x: entries.x.map((x) => -x), treated: entries.treated.map((side) => 1 - side) }
    for (const variance of variances) {
      const jump = estimate(entries, 1, variance, rule)
      const mirrored = estimate(swapped, 1, variance, rule)
      close(mirrored.corrected.estimate, -jump.corrected.estimate, 1e-11)
      close(mirrored.corrected.standardError, jump.corrected.standardError, 1e-11)
      close(mirrored.bandwidths.h.treated, jump.bandwidths.h.treated, 1e-11)
    }
  })

  it('rescaling the score scales the bandwidths and nothing else; shifting the outcome changes nothing', () => {
    const entries = draw(400, 6)
    const jump = estimate(entries, 1, 'hc2', rule)
    for (const factor of [1e-6, 3.7, 1e7]) {
      const scaled = estimate(
        { ...entries, x: entries.x.map((x) => x * factor), y: entries.y.map((y) => y + 1e6) },
        1,
        'hc2',
        rule,
      )
      close(scaled.bandwidths.h.treated / factor, jump.bandwidths.h.treated, 1e-8)
      close(scaled.bandwidths.b.treated / factor, jump.bandwidths.b.treated, 1e-8)
      close(scaled.corrected.estimate, jump.corrected.estimate, 1e-8)
      close(scaled.corrected.standardError, jump.corrected.standardError, 1e-8)
    }
  })

  it('the order of rows does not change one bit, ties included', () => {
    const base = draw(600, 7)
    const entries = { ...base, x: base.x.map((x) => Math.round(x * 40) / 40 || 0.0125) }
    entries.treated = Uint8Array.from(entries.x, (x) => (x >= 0 ? 1 : 0))
    const random = seededRandom(99)
    const order = Array.from(entries.x, (_, i) => ({ i, key: random.next() }))
      .sort((a, b) => a.key - b.key)
      .map(({ i }) => i)
    const shuffled: Entries = {
      x: Float64Array.from(order, (i) => entries.x[i]),
      treated: Uint8Array.from(order, (i) => entries.treated[i]),
      unit: Int32Array.from(order, (i) => entries.unit[i]),
      y: Float64Array.from(order, (i) => entries.y[i]),
      w: Float64Array.from(order, (i) => entries.w[i]),
      cluster: Int32Array.from(order, (i) => entries.cluster[i]),
    }
    for (const variance of variances) {
      const a = estimate(entries, 1, variance, rule)
      const b = estimate(shuffled, 1, variance, rule)
      expect(b.bandwidths).toEqual(a.bandwidths)
      expect(b.plain).toEqual(a.plain)
      expect(b.corrected).toEqual(a.corrected)
    }
  })

  it('weight 2 gives the coefficients of a repeated row', () => {
    const entries = draw(200, 8)
    const doubled = { ...entries, w: Float64Array.from(entries.x, (_, i) => (i % 3 === 0 ? 2 : 1)) }
    const rows = Array.from(entries.x, (_, i) => (i % 3 === 0 ? [i, i] : [i])).flat()
    const repeated: Entries = {
      x: Float64Array.from(rows, (i) => entries.x[i]),
      treated: Uint8Array.from(rows, (i) => entries.treated[i]),
      unit: Int32Array.from(rows, (_, i) => i),
      y: Float64Array.from(rows, (i) => entries.y[i]),
    }
    const a = estimate(doubled, 2, 'hc0', fixed(0.8))
    const b = estimate(repeated, 2, 'hc0', fixed(0.8))
    close(a.plain.estimate, b.plain.estimate, 1e-11)
    close(a.corrected.estimate, b.corrected.estimate, 1e-11)
  })

  it('a side without enough units has a reason that names it', () => {
    const entries = draw(300, 9)
    const options = { order: 1, kernel: 'triangular', variance: 'hc2', reference: 't', level: 0.95 } as const
    const narrow = { untreated: 0.5, treated: 1e-3 }
    const estimated = jumpAt(buildSample(entries), { h: narrow, b: narrow }, options)
    expect(estimated).toMatchObject({ ok: false, reason: expect.stringMatching(/^treated side: only \d distinct/) })
    const same = buildSample({ ...entries, y: entries.y.map(() => 4) })
    const wide = { untreated: 0.5, treated: 0.5 }
    expect(jumpAt(same, { h: wide, b: wide }, options)).toEqual({
      ok: false,
      reason: 'the outcome is the same for every unit near the line',
    })
  })
})
