import { describe, expect, it } from 'vitest'
import { smoothnessByRule } from '../../src/jump/biasAwareSmoothness.js'
import { worstBiasOf } from '../../src/jump/biasAwareWorst.js'
import {
  type BiasAware,
  type BiasAwareOptions,
  bandwidthRange,
  biasAware,
  buildSample,
  type Entries,
  jumpAt,
  type Kernel,
  type Sample,
} from '../../src/jump/index.js'
import { seededRandom } from '../../src/math/index.js'
import { poolBiasAware, poolLines } from '../../src/thresholds/index.js'

const options: BiasAwareOptions = {
  order: 1,
  kernel: 'triangular',
  variance: 'hc2',
  reference: 't',
  level: 0.95,
  smoothness: 'rule',
}

const close = (value: number, known: number, tolerance = 1e-10) =>
  expect(Math.abs(value - known)).toBeLessThanOrEqual(tolerance * Math.abs(known))

function entriesOf(n: number, seed: number, change: Partial<Entries> = {}, round?: number): Entries {
  const random = seededRandom(seed)
  const x = Float64Array.from({ length: n }, () => {
    const at = 2 * random.next() - 1
    return round ? (Math.floor(at * round) + 0.5) / round : at
  })
  return {
    x,
    treated: Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0)),
    unit: Int32Array.from(x.keys()),
    y: Float64Array.from(x, (value) => value + 2 * value * value + 0.3 * random.normal()),
    ...change,
  }
}

function interval(sample: Sample, changed: Partial<BiasAwareOptions> = {}): BiasAware {
  const made = biasAware(sample, { ...options, ...changed })
  if (!made.ok) throw new Error(made.reason)
  return made.interval
}

/** l of one side, order 1, unit by unit from the normal equations. */
function weightsOf(t: Float64Array, h: number, kernel: Kernel): Float64Array {
  const k = t.map((value) => {
    const u = value / h
    if (kernel === 'uniform') return u <= 1 ? 1 : 0
    return u < 1 ? (kernel === 'triangular' ? 1 - u : 1 - u * u) : 0
  })
  const moment = (power: number) => k.reduce((sum, weight, i) => sum + weight * t[i] ** power, 0)
  const [s0, s1, s2] = [moment(0), moment(1), moment(2)]
  return k.map((weight, i) => (weight * (s2 - s1 * t[i])) / (s0 * s2 - s1 * s1))
}

const w = (at: number, t: Float64Array, l: Float64Array) =>
  l.reduce((sum, v, i) => sum + (t[i] > at ? v * (t[i] - at) : 0), 0)

/** Midpoint rule; w is straight between distances, so only segments with a corner or a change of sign are off. */
function integral(t: Float64Array, l: Float64Array, steps: number): number {
  const width = t[t.length - 1] / steps
  let total = 0
  for (let step = 0; step < steps; step++) total += Math.abs(w((step + 0.5) * width, t, l)) * width
  return total
}

const distances = (n: number, seed: number) => {
  const random = seededRandom(seed)
  return Float64Array.from({ length: n }, () => random.next()).sort()
}

describe('worst bias', () => {
  it.each(['triangular', 'epanechnikov', 'uniform'] as const)('%s: half |Σ l t²|, for w keeps its sign', (kernel) => {
    for (const [n, h] of [
      [40, 0.7],
      [41, 1.5],
      [300, 0.2],
    ]) {
      const t = distances(n, n)
      const l = weightsOf(t, h, kernel)
      close(worstBiasOf(t, l), Math.abs(l.reduce((sum, v, i) => sum + v * t[i] ** 2, 0)) / 2, 1e-11)
    }
  })
  it('against numeric integration where w changes its sign, ties and a unit on the line among the distances', () => {
    const random = seededRandom(3)
    for (let draw = 0; draw < 20; draw++) {
      const t = Float64Array.from({ length: 14 }, () => Math.floor(9 * random.next()) / 8).sort()
      const l = t.map(() => random.normal())
      // made exact for straight lines by the weights of two distances
      const [a, b] = [l.reduce((sum, v) => sum + v, 0) - 1, l.reduce((sum, v, i) => sum + v * t[i], 0)]
      const [first, last] = [t[0], t[13]]
      l[13] -= (b - a * first) / (last - first)
      l[0] -= a - (b - a * first) / (last - first)
      close(
        l.reduce((sum, v) => sum + v, 0),
        1,
        1e-12,
      )
      close(worstBiasOf(t, l), integral(t, l, 20_000), 1e-5)
    }
  })
  it('is attained by m″ = sign(w), and no other curve in pieces comes near', () => {
    const t = distances(25, 8)
    const random = seededRandom(5)
    const l = weightsOf(t, 0.8, 'triangular').map((v, i) => v + (i % 2 === 0 ? 1 : -1) * 0.02)
    const [a, b] = [l.reduce((sum, v) => sum + v, 0) - 1, l.reduce((sum, v, i) => sum + v * t[i], 0)]
    const width = t[24] - t[0]
    l[24] -= (b - a * t[0]) / width
    l[0] -= a - (b - a * t[0]) / width
    const pieces = 4000
    const step = t[24] / pieces
    // bias of the curve with the given second derivative by piece and m(0) = m'(0) = 0
    const biasOf = (second: (at: number) => number) => {
      let [value, slope, at, bias] = [0, 0, 0, 0]
      let next = 0
      while (next < 25 && t[next] <= 0) next++
      for (let piece = 0; piece < pieces; piece++) {
        const bend = second(at + step / 2)
        while (next < 25 && t[next] <= at + step * (1 + 1e-9)) {
          const d = t[next] - at
          bias += l[next] * (value + slope * d + (bend * d * d) / 2)
          next++
        }
        value += slope * step + (bend * step * step) / 2
        slope += bend * step
        at += step
      }
      return bias
    }
    const worst = worstBiasOf(t, l)
    expect(t.some((_, i) => i > 0 && w(t[i - 1], t, l) * w(t[i], t, l) < 0)).toBe(true)
    close(
      biasOf((at) => Math.sign(w(at, t, l))),
      worst,
      1e-3,
    )
    for (let draw = 0; draw < 200; draw++) {
      const knots = Array.from({ length: 12 }, () => (random.next() < 0.5 ? -1 : 1))
      const bias = biasOf((at) => knots[Math.min(11, Math.floor((12 * at) / t[24]))])
      expect(Math.abs(bias)).toBeLessThan(worst * (1 + 1e-3))
    }
  })
  // CHECKS: curvature class, 1/10 of h² on each side for units spread evenly; the sum over sides 2 · (1/10) · M h²/2
  it('evenly spread units: the published constant', () => {
    const t = Float64Array.from({ length: 20_000 }, (_, i) => (i + 0.5) / 20_000)
    close(worstBiasOf(t, weightsOf(t, 0.5, 'triangular')), (0.1 * 0.5 ** 2) / 2, 1e-4)
  })
})

describe('smoothness by rule of thumb', () => {
  it('is exact for a quartic, at an end or inside', () => {
    const x = Float64Array.from({ length: 60 }, (_, i) => (i - 29.5) / 30)
    const sampleOf = (curve: (t: number) => number) =>
      buildSample({
        x,
        treated: Uint8Array.from(x, (v) => (v > 0 ? 1 : 0)),
        unit: Int32Array.from(x.keys()),
        y: x.map((v) => (v > 0 ? curve(v) : 0)),
      })
    const from = 0.5 / 30
    const to = 29.5 / 30
    const boundOf = (curve: (t: number) => number) => {
      const rule = smoothnessByRule(sampleOf(curve))
      if (!rule.ok) throw new Error(rule.reason)
      return rule.bound
    }
    close(
      boundOf((t) => 3 * t * t - t),
      6,
      1e-9,
    )
    close(
      boundOf((t) => t ** 4),
      12 * to * to,
      1e-9,
    )
    close(
      boundOf((t) => 5 * t ** 2 - t ** 4),
      10 - 12 * from ** 2,
      1e-9,
    )
    // 12 (t − ½)² − 2: −2 in the middle, at most 1 at the ends
    close(
      boundOf((t) => (t - 0.5) ** 4 - t * t),
      2,
      1e-9,
    )
  })
  it('has a reason where a side has too few distances', () => {
    const made = biasAware(buildSample(entriesOf(200, 1, {}, 4)), options)
    expect(made).toEqual({
      ok: false,
      reason: 'smoothness by rule of thumb, untreated side: only 4 distinct distances, a fit of order 4 needs 6',
    })
  })
})

describe('interval', () => {
  const sample = buildSample(entriesOf(400, 11))

  it('is the plain estimate with its standard error, and the worst bias of its weights', () => {
    const h = { untreated: 0.5, treated: 0.7 }
    for (const kernel of ['triangular', 'epanechnikov', 'uniform'] as const) {
      for (const variance of ['hc0', 'hc2', 'hc3', 'neighbours'] as const) {
        const made = interval(sample, { fixedBandwidth: h, smoothness: 3, kernel, variance })
        const plain = jumpAt(sample, { h, b: h }, { ...options, kernel, variance })
        if (!plain.ok) throw new Error(plain.reason)
        close(made.estimate, plain.jump.plain.estimate)
        close(made.standardError, plain.jump.plain.standardError)
        const half = (name: 'untreated' | 'treated') => {
          const { t } = sample[name]
          const l = weightsOf(t, h[name], kernel)
          return Math.abs(l.reduce((sum, v, i) => sum + v * t[i] ** 2, 0)) / 2
        }
        close(made.worstBias, 3 * (half('untreated') + half('treated')))
        close(made.high - made.low, 2 * made.criticalValue * made.standardError)
        expect(made.unitsInBandwidth).toEqual(plain.jump.unitsInBandwidth)
        expect([made.bandwidth, made.bandwidthFrom, made.smoothnessFrom]).toEqual([h, 'given', 'given'])
      }
    }
  })
  it('without curvature is the usual normal interval, with very much ± the bias and a one-sided margin', () => {
    const h = { untreated: 0.5, treated: 0.5 }
    const none = interval(sample, { fixedBandwidth: h, smoothness: 0 })
    close(none.high - none.estimate, 1.959963984540054 * none.standardError)
    expect(none.worstBias).toBe(0)
    for (const level of [0.8, 0.95, 0.99]) {
      const quantile = { 0.8: 0.8416212335729143, 0.95: 1.6448536269514722, 0.99: 2.3263478740408408 }[level] as number
      for (const smoothness of [1e3, 1e9, 1e12]) {
        const much = interval(sample, { fixedBandwidth: h, smoothness, level })
        close(much.high - much.estimate, much.worstBias + quantile * much.standardError)
      }
    }
  })
  it.each([
    ['400 units', sample, {}],
    ['60 units', buildSample(entriesOf(60, 12)), {}],
    ['discrete, 8 values a side', buildSample(entriesOf(600, 13, {}, 8)), {}],
    ['discrete, uniform kernel', buildSample(entriesOf(600, 14, {}, 20)), { kernel: 'uniform' }],
    ['neighbours', sample, { variance: 'neighbours' }],
    ['level 0.9, given smoothness', sample, { level: 0.9, smoothness: 12 }],
  ] as [string, Sample, Partial<BiasAwareOptions>][])(
    'own bandwidth is the shortest of 4,000: %s',
    (_, on, changed) => {
      const made = interval(on, changed)
      const { smallest, largest } = bandwidthRange(on, 1)
      let shortest = Number.POSITIVE_INFINITY
      for (let i = 0; i <= 4000; i++) {
        const h = smallest + ((largest - smallest) * i) / 4000
        const one = biasAware(on, {
          ...options,
          ...changed,
          smoothness: made.smoothness,
          fixedBandwidth: { untreated: h, treated: h },
          multiples: [],
        })
        if (one.ok) shortest = Math.min(shortest, one.interval.high - one.interval.low)
      }
      expect((made.high - made.low) / shortest).toBeLessThan(1.001)
      expect(made.bandwidth.treated).toBe(made.bandwidth.untreated)
      expect(made.bandwidthFrom).toBe('shortest')
    },
  )
  it('scales with x and y', () => {
    const entries = entriesOf(400, 11)
    const made = interval(sample)
    const scaled = interval(
      buildSample({ ...entries, x: entries.x.map((x) => 1000 * x), y: entries.y.map((y) => 7 - 4 * y) }),
    )
    close(scaled.bandwidth.treated, 1000 * made.bandwidth.treated, 1e-9)
    close(scaled.smoothness, (4 * made.smoothness) / 1e6, 1e-9)
    close(scaled.estimate, -4 * made.estimate, 1e-9)
    close(scaled.low, -4 * made.high, 1e-9)
    close(scaled.high, -4 * made.low, 1e-9)
    close(scaled.worstBias, 4 * made.worstBias, 1e-9)
  })
  it('widens with the smoothness and narrows its bandwidth', () => {
    const made = interval(sample)
    expect(made.curve).toHaveLength(7)
    made.curve.forEach((one, i) => {
      close(one.smoothness, made.smoothness * 2 ** (i - 3))
      if (i === 0) return
      const before = made.curve[i - 1]
      expect(one.high - one.low).toBeGreaterThan(before.high - before.low)
      expect(one.bandwidth.treated).toBeLessThan(before.bandwidth.treated * 1.02)
    })
    const { smoothness, estimate, low, high } = made
    expect(made.curve[3]).toMatchObject({ smoothness, estimate, low, high })
  })
  it('has reasons', () => {
    expect(biasAware(sample, { ...options, order: 2 })).toEqual({
      ok: false,
      reason: 'the bias-aware interval is for order 1 only',
    })
    const flat = entriesOf(100, 2)
    expect(biasAware(buildSample({ ...flat, y: new Float64Array(100) }), options)).toEqual({
      ok: false,
      reason: 'the fit leaves no residual near the line',
    })
    const oneSide = entriesOf(100, 2, { treated: new Uint8Array(100) })
    expect(biasAware(buildSample(oneSide), { ...options, smoothness: 1 })).toMatchObject({
      ok: false,
      reason: 'treated side: no units',
    })
    expect(() => biasAware(sample, { ...options, smoothness: Number.NaN })).toThrow(RangeError)
  })
  it('many units on the line itself', () => {
    const entries = entriesOf(300, 3)
    const x = entries.x.map((value, i) => (i % 4 === 0 ? 0 : value))
    const at = { ...entries, x, treated: Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0)) }
    expect(interval(buildSample(at)).bandwidth.treated).toBeGreaterThan(0)
  })
})

describe('pooled', () => {
  const lines = 6
  const random = seededRandom(21)
  const base = entriesOf(900, 22)
  const group = Int32Array.from(base.x, () => random.integer(lines))
  const shifted = base.y.map((y, i) => y + 5 * Math.sin(group[i]))

  it('without fixed effects is the interval of the sample', () => {
    const sample = buildSample({ ...base, group })
    expect(poolBiasAware(sample, lines, { ...options, fixedEffects: false })).toEqual(biasAware(sample, options))
  })
  it('with them, the levels of lines change nothing, and the estimate is the pooled plain one there', () => {
    const make = (y: Float64Array, more: Partial<BiasAwareOptions> = {}) => {
      const sample = buildSample({ ...base, y, group, cluster: Int32Array.from(base.x, (_, i) => i % 9) })
      const made = poolBiasAware(sample, lines, { ...options, ...more, fixedEffects: true })
      if (!made.ok) throw new Error(made.reason)
      return { made: made.interval, sample }
    }
    for (const variance of ['hc2', 'clusters', 'few-clusters'] as const) {
      const { made, sample } = make(shifted, { variance })
      const plain = make(base.y, { variance }).made
      close(made.estimate, plain.estimate, 1e-6)
      close(made.low, plain.low, 1e-6)
      close(made.high, plain.high, 1e-6)
      const { untreated, treated } = made.bandwidth
      const pooled = poolLines(sample, lines, {
        ...options,
        variance,
        bandwidth: { kind: 'fixed', untreated, treated },
        sides: 'common',
        clustered: variance !== 'hc2',
        fixedEffects: true,
      })
      if (!pooled.ok) throw new Error(pooled.reason)
      close(made.estimate, pooled.jump.plain.estimate, 1e-9)
      close(made.standardError, pooled.jump.plain.standardError, 1e-9)
    }
  })
  it('its worst bias is what a curve common to all lines does to the regression with a level for each line', () => {
    // m = ½ M x² on the treated side only: the bias of the fit without noise, where w keeps its sign
    const sign = (x: number) => (x >= 0 ? 1 : -1)
    const curved = base.x.map((x, i) => 0.5 * 3 * x * x * sign(x) + Math.cos(group[i]))
    const sample = buildSample({ ...base, y: curved.map((y, i) => y + 1e-9 * Math.sin(i * i)), group })
    const made = poolBiasAware(sample, lines, {
      ...options,
      smoothness: 3,
      fixedBandwidth: { untreated: 0.6, treated: 0.6 },
      fixedEffects: true,
    })
    if (!made.ok) throw new Error(made.reason)
    close(made.interval.worstBias, Math.abs(made.interval.estimate), 0.02)
    expect(made.interval.worstBias).toBeGreaterThanOrEqual(Math.abs(made.interval.estimate) - 1e-6)
  })
  it('where lines lie at different distances, from the weights that units have in that regression, one by one', () => {
    const few = entriesOf(80, 31)
    // lines of units far and near, on both sides
    const near = Int32Array.from(few.x, (x, i) => (Math.abs(x) < 0.35 ? 0 : 1) + (i % 5 === 0 ? 1 : 0))
    const h = { untreated: 0.8, treated: 0.8 }
    const pooledWith = (y: Float64Array) => {
      const sample = buildSample({ ...few, y, group: near })
      const made = poolLines(sample, 3, {
        ...options,
        variance: 'hc0',
        bandwidth: { kind: 'fixed', ...h },
        sides: 'common',
        clustered: false,
        fixedEffects: true,
      })
      if (!made.ok) throw new Error(made.reason)
      return made.jump.plain.estimate
    }
    const l = few.x.map((_, i) => pooledWith(Float64Array.from(few.x, (_, j) => (i === j ? 1 : 0))))
    const biasOf = (side: 0 | 1) => {
      const rows = Array.from(few.x.keys())
        .filter((i) => few.treated[i] === side && Math.abs(few.x[i]) < 0.8)
        .sort((i, j) => Math.abs(few.x[i]) - Math.abs(few.x[j]))
      const t = Float64Array.from(rows, (i) => Math.abs(few.x[i]))
      const own = Float64Array.from(rows, (i) => l[i])
      return integral(t, own, 20_000)
    }
    const made = poolBiasAware(buildSample({ ...few, group: near }), 3, {
      ...options,
      smoothness: 2,
      fixedBandwidth: h,
      fixedEffects: true,
    })
    if (!made.ok) throw new Error(made.reason)
    close(made.interval.worstBias, 2 * (biasOf(0) + biasOf(1)), 1e-4)
  })
})
