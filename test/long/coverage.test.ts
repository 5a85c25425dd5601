/**
 * Coverage of 95% intervals beyond the published designs (designs.test.ts) and the worst cases of bias-aware ones (honest.test.ts):
 * partial take-up, a score with eight values a side, many lines with clusters in common, and the weights of normalise-and-pool.
 * Each share over n draws has the standard error √(0.05·0.95/n): 0.0049 at 2,000, 0.0069 at 1,000.
 */
import { describe, expect, it } from 'vitest'
import {
  bandwidthsFor,
  biasAware,
  buildSample,
  covarianceMatrix,
  jumpAt,
  type Sample,
  takeUpRatio,
  withOutcomes,
} from '../../src/jump/index.js'
import { type Random, streamOf } from '../../src/math/index.js'
import { poolLines, targetEffect } from '../../src/thresholds/index.js'

const options = { order: 1, kernel: 'triangular', variance: 'hc2', reference: 't', level: 0.95 } as const
const rule = { kind: 'rule', rule: 'mse' } as const
const choice = { order: 1, kernel: 'triangular', sides: 'common', clustered: false } as const
const covers = ({ low, high }: { low: number; high: number }, truth: number) => low <= truth && truth <= high
const sideOf = (x: Float64Array) => Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0))
const numbers = (n: number, one: () => number) => Float64Array.from({ length: n }, one)

function sure<T extends { ok: boolean }>(made: T): Extract<T, { ok: true }> {
  if (!made.ok) throw new Error(JSON.stringify(made))
  return made as Extract<T, { ok: true }>
}

const rows: Record<string, string>[] = []
const tell = (design: string, shares: Record<string, number>) => {
  rows.push({ design, ...Object.fromEntries(Object.entries(shares).map(([name, value]) => [name, value.toFixed(3)])) })
}

describe('partial take-up, effect 2 per unit of it', () => {
  const study = (random: Random, units: number, jump: number) => {
    const x = numbers(units, () => 2 * random.next() - 1)
    const shock = numbers(units, () => random.normal())
    const d = x.map((value, i) =>
      0.25 + (value >= 0 ? jump : 0) + 0.1 * value + 0.2 * shock[i] > random.next() ? 1 : 0,
    )
    const y = d.map((taken, i) => 1 + x[i] + 0.5 * x[i] * x[i] + 2 * taken + shock[i])
    const sample = buildSample({ x, treated: sideOf(x), unit: Int32Array.from(x.keys()), y })
    const pick = (unit: Int32Array) => Float64Array.from(unit, (row) => d[row])
    const other = withOutcomes(sample, pick(sample.untreated.unit), pick(sample.treated.unit))
    const { bandwidths } = sure(bandwidthsFor(sample, rule, choice))
    const [outcome, takeUp] = [sample, other].map((one) => sure(jumpAt(one, bandwidths, options)).jump)
    const ratio = takeUpRatio(outcome, takeUp, { level: 0.95 })
    if (typeof ratio === 'string') throw new Error(ratio)
    return ratio
  }
  for (const [name, units, jump] of [
    ['strong', 2000, 0.6],
    ['weak', 600, 0.36],
  ] as const) {
    it(`${name} first stage`, () => {
      const draws = 1500
      let [set, ratio, shown, unbounded] = [0, 0, 0, 0]
      const fs: number[] = []
      for (let k = 0; k < draws; k++) {
        const made = study(streamOf(71, k), units, jump)
        fs.push(made.f)
        if (made.andersonRubin.some(([low, high]) => covers({ low, high }, 2))) set++
        if (made.andersonRubin.flat().some((end) => !Number.isFinite(end))) unbounded++
        if (made.f < 4) continue
        shown++
        if (covers(made.corrected, 2)) ratio++
      }
      const middle = fs.sort((a, b) => a - b)[draws / 2]
      tell(`take-up, ${name}, median F ${middle.toFixed(1)}`, {
        'Anderson–Rubin': set / draws,
        'its ratio where not withheld': ratio / shown,
        'share withheld': 1 - shown / draws,
        'share unbounded': unbounded / draws,
      })
      expect(set / draws).toBeGreaterThanOrEqual(0.91)
      expect(set / draws).toBeLessThanOrEqual(0.97)
      if (name === 'strong') {
        expect(ratio / shown).toBeGreaterThanOrEqual(0.91)
        expect(ratio / shown).toBeLessThanOrEqual(0.975)
      } else {
        expect(middle).toBeGreaterThan(2.5)
        expect(middle).toBeLessThan(6)
      }
    })
  }
})

describe('a score with eight values a side, jump 0.5', () => {
  // curvature 1 on the untreated side, −1 on the treated one
  for (const n of [500, 2000]) {
    it(`${n} units`, () => {
      const draws = 1000
      let [aware, ruled, corrected] = [0, 0, 0]
      for (let k = 0; k < draws; k++) {
        const random = streamOf(81, k)
        const x = numbers(n, () => (Math.floor(16 * random.next()) - 8 + 0.5) / 8)
        const y = x.map((v) => (v >= 0 ? 0.5 - 0.5 * v * v : 0.5 * v * v) + v + 0.5 * random.normal())
        const sample = buildSample({ x, treated: sideOf(x), unit: Int32Array.from(x.keys()), y })
        const given = sure(biasAware(sample, { ...options, smoothness: 1, multiples: [] })).interval
        const thumb = sure(biasAware(sample, { ...options, smoothness: 'rule', multiples: [] })).interval
        const { bandwidths } = sure(bandwidthsFor(sample, rule, choice))
        // the middle of the first steps is where the curves are compared: the jump at 0 is 0.5
        if (covers(given, 0.5)) aware++
        if (covers(thumb, 0.5)) ruled++
        const { jump } = sure(jumpAt(sample, bandwidths, options))
        expect(jump.distinct.treated).toBeLessThan(10)
        if (covers(jump.corrected, 0.5)) corrected++
      }
      tell(`eight values a side, n ${n}`, {
        'bias-aware, M known': aware / draws,
        'bias-aware, M by rule': ruled / draws,
        corrected: corrected / draws,
      })
      expect(aware / draws).toBeGreaterThanOrEqual(0.945 - 3 * 0.007)
      expect(ruled / draws).toBeGreaterThanOrEqual(0.93)
    })
  }
})

/** The report warns where a standard error rests on fewer than 40 clusters: 60 serve every line here. */
describe('30 lines pooled, 60 clusters that serve several lines, effect 0.5 at each', () => {
  const lines = 30
  const study = (random: Random) => {
    const shock = numbers(60, () => 0.5 * random.normal())
    const level = numbers(lines, () => random.normal())
    const x: number[] = []
    const group: number[] = []
    const cluster: number[] = []
    const y: number[] = []
    for (let line = 0; line < lines; line++) {
      for (let i = 0; i < 160; i++) {
        const at = 2 * random.next() - 1
        const own = random.integer(60)
        x.push(at)
        group.push(line)
        cluster.push(own)
        y.push(level[line] + at + (at >= 0 ? 0.5 + shock[own] * 0.4 : 0) + shock[own] + 0.6 * random.normal())
      }
    }
    return buildSample({
      x: Float64Array.from(x),
      treated: Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0)),
      unit: Int32Array.from(x.keys()),
      y: Float64Array.from(y),
      cluster: Int32Array.from(cluster),
      group: Int32Array.from(group),
    })
  }
  const ofLine = ({ untreated, treated }: Sample, line: number) => {
    const sides = [untreated, treated].map((side) => ({
      side,
      at: side.group ? [...side.group.keys()].filter((i) => side.group?.[i] === line) : [],
    }))
    const all = sides.flatMap(({ side, at }, s) => at.map((i) => ({ side, i, s })))
    return buildSample({
      x: Float64Array.from(all, ({ side, i, s }) => (s === 1 ? side.t[i] : -side.t[i])),
      treated: Uint8Array.from(all, ({ s }) => s),
      unit: Int32Array.from(all, ({ side, i }) => side.unit[i]),
      y: Float64Array.from(all, ({ side, i }) => side.y[i]),
      cluster: Int32Array.from(all, ({ side, i }) => (side.cluster as Int32Array)[i]),
    })
  }
  it('by each way to put them together', () => {
    const draws = 1000
    const found: Record<string, number> = { 'with line effects': 0, 'without them': 0, 'target units': 0 }
    for (let k = 0; k < draws; k++) {
      const sample = study(streamOf(91, k))
      const common = { ...options, variance: 'clusters', bandwidth: rule, sides: 'common', clustered: true } as const
      const withEffects = sure(poolLines(sample, lines, { ...common, fixedEffects: true }))
      if (covers(withEffects.jump.corrected, 0.5)) found['with line effects'] += 1 / draws
      const without = sure(poolLines(sample, lines, { ...common, fixedEffects: false }))
      if (covers(without.jump.corrected, 0.5)) found['without them'] += 1 / draws
      // each line at one bandwidth, with residuals of single units and shared clusters by their influence values
      const h = { untreated: 0.8, treated: 0.8 }
      const jumps = Array.from({ length: lines }, (_, line) =>
        sure(jumpAt(ofLine(sample, line), { h, b: h }, { ...options, variance: 'clusters' })),
      )
      const { matrix, isDiagonal } = covarianceMatrix(jumps.map(({ jump }) => jump.influence))
      const effects = {
        ids: jumps.map((_, line) => `${line}`),
        estimate: Float64Array.from(jumps, ({ jump }) => jump.corrected.estimate),
        covariance: matrix,
        isDiagonal,
      }
      const units = Float64Array.from(
        jumps,
        ({ jump: { unitsInBandwidth: within } }) => within.untreated + within.treated,
      )
      const target = targetEffect(effects, { kind: 'units', units }, 0.95)
      if ('reason' in target) throw new Error(target.reason)
      if (covers(target as never, 0.5)) found['target units'] += 1 / draws
    }
    tell('30 lines, 60 shared clusters', found)
    for (const share of Object.values(found)) {
      expect(share).toBeGreaterThanOrEqual(0.91)
      expect(share).toBeLessThanOrEqual(0.975)
    }
  })
})

/** Cattaneo, Keele, Titiunik & Vazquez-Bare 2016: shares .5, .3, .2; densities at the cutoffs .01, 1/60, .025; by calculation. */
describe('normalise and pool', () => {
  it('weighs lines by density at the line times share', () => {
    const random = streamOf(101, 0)
    const n = 600_000
    const of = [
      { share: 0.5, low: 0, high: 100, cutoff: 20, effect: 1 },
      { share: 0.3, low: 20, high: 80, cutoff: 50, effect: 2 },
      { share: 0.2, low: 60, high: 100, cutoff: 80, effect: 4 },
    ]
    const group = Int32Array.from({ length: n }, (_, i) => (i < 0.5 * n ? 0 : i < 0.8 * n ? 1 : 2))
    const x = Float64Array.from(group, (line) => {
      const { low, high, cutoff } = of[line]
      return low + (high - low) * random.next() - cutoff
    })
    const y = Float64Array.from(x, (value, i) => (value >= 0 ? of[group[i]].effect : 0) + 0.5 * random.normal())
    const sample = buildSample({ x, treated: sideOf(x), unit: Int32Array.from(x.keys()), y, group })
    const bandwidth = { kind: 'fixed', untreated: 10, treated: 10 } as const
    const pooled = sure(
      poolLines(sample, 3, { ...options, bandwidth, sides: 'common', clustered: false, fixedEffects: false }),
    )
    const { estimate, standardError } = pooled.jump.plain
    tell('normalise and pool', { pooled: estimate, 'standard error': standardError, 'by calculation': 7 / 3 })
    for (const weight of pooled.weights) expect(Math.abs(weight - 1 / 3)).toBeLessThan(0.005)
    expect(Math.abs(estimate - 7 / 3)).toBeLessThan(3.5 * standardError)
    expect(Math.abs(estimate - 1.9)).toBeGreaterThan(10 * standardError)
  })
})

it('prints the table', () => {
  console.table(rows)
})
