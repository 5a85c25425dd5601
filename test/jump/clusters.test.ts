import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import {
  buildSample,
  covarianceMatrix,
  crossClusters,
  type Entries,
  type JumpFit,
  type JumpOptions,
  jumpAt,
  type Kernel,
} from '../../src/jump/index.js'
import { seededRandom } from '../../src/math/index.js'
import { poolLines } from '../../src/thresholds/index.js'

function read<T>(name: string): T {
  return JSON.parse(readFileSync(new URL(`../golden/jump/${name}`, import.meta.url), 'utf8')) as T
}

interface Few {
  x: number[]
  y: number[]
  w: number[]
  line: number[]
  clusterCodes: Record<string, number[]>
  cases: {
    order: number
    kernel: Kernel
    weighted: boolean
    by: string
    fixed: boolean
    untreated: number
    treated: number
    estimate: number
    variance: number
    freedom: number
    clusters: number
  }[]
}

const few = read<Few>('few-clusters.json')
const close = (value: number, known: number, tolerance = 1e-9) =>
  expect(Math.abs(value - known)).toBeLessThanOrEqual(tolerance * Math.abs(known))

function fewEntries(by: string, weighted: boolean): Entries {
  return {
    x: Float64Array.from(few.x),
    treated: Uint8Array.from(few.x, (x) => (x >= 0 ? 1 : 0)),
    unit: Int32Array.from(few.x.keys()),
    y: Float64Array.from(few.y),
    w: weighted ? Float64Array.from(few.w) : undefined,
    cluster: Int32Array.from(few.clusterCodes[by]),
    group: Int32Array.from(few.line),
  }
}

const base = { variance: 'few-clusters', reference: 't', level: 0.95 } as const

/** The jump at fixed bandwidths, pooled with or without line fixed effects. */
function fewJump(one: Few['cases'][number], order: number, entries = fewEntries(one.by, one.weighted)): JumpFit {
  const pooled = poolLines(buildSample(entries), 10, {
    ...base,
    order,
    kernel: one.kernel,
    bandwidth: { kind: 'fixed', untreated: one.untreated, treated: one.treated, bias: 0.9 },
    sides: 'common',
    clustered: true,
    fixedEffects: one.fixed,
  })
  if (!pooled.ok) throw new Error(pooled.reason)
  return pooled.jump
}

// The largest differences met are about 1e-12; 1e-9 leaves room for other compilers of R's matrix algebra.
describe('few clusters, against clubSandwich', () => {
  for (const one of few.cases) {
    const { order, kernel, weighted, by, fixed, estimate, variance, freedom, clusters } = one
    it(`${fixed ? 'line levels, ' : ''}clusters ${by}, ${kernel}, order ${order}${weighted ? ', weighted' : ''}`, () => {
      const { corrected, influence, ...jump } = fewJump(one, order - 1)
      const results = order === 2 ? [corrected] : [corrected, fewJump(one, order).plain]
      for (const result of results) {
        close(result.estimate, estimate)
        close(result.standardError ** 2, variance)
        close(result.degreesOfFreedom, freedom)
      }
      close(covarianceMatrix([influence]).matrix[0], variance)
      expect(jump.clusters).toBe(clusters)
      expect(jump.bandwidths.b).toEqual(jump.bandwidths.h)
    })
  }
})

interface TwoWay {
  h: number
  b: number
  x: number[]
  y: number[]
  w: number[]
  line: number[]
  first: number[]
  second: number[]
  plain: [number, number]
  corrected: [number, number]
  lines: [number, number, number]
}

describe('clusters of two kinds, against dense matrices in base R', () => {
  const known = read<TwoWay>('two-way-clusters.json')
  const { cluster, crossed } = crossClusters(Int32Array.from(known.first), Int32Array.from(known.second))
  const options: JumpOptions = {
    order: 1,
    kernel: 'triangular',
    variance: 'clusters',
    reference: 't',
    level: 0.95,
    crossed,
  }
  const entriesOf = (rows: number[], codes: Int32Array): Entries => ({
    x: Float64Array.from(rows, (i) => known.x[i]),
    treated: Uint8Array.from(rows, (i) => (known.x[i] >= 0 ? 1 : 0)),
    unit: Int32Array.from(rows),
    y: Float64Array.from(rows, (i) => known.y[i]),
    w: Float64Array.from(rows, (i) => known.w[i]),
    cluster: Int32Array.from(rows, (i) => codes[i]),
  })
  const jumpOf = (rows: number[], codes = cluster, changed = options): JumpFit => {
    const { h, b } = known
    const bandwidths = { h: { untreated: h, treated: h }, b: { untreated: b, treated: b } }
    const estimated = jumpAt(buildSample(entriesOf(rows, codes)), bandwidths, changed)
    if (!estimated.ok) throw new Error(estimated.reason)
    return estimated.jump
  }
  const rows = Array.from(known.x.keys())

  it('one line', () => {
    const jump = jumpOf(rows)
    close(jump.plain.estimate, known.plain[0])
    close(jump.plain.standardError ** 2, known.plain[1])
    close(jump.corrected.estimate, known.corrected[0])
    close(jump.corrected.standardError ** 2, known.corrected[1])
    expect(jump.clusters).toBe(6)
    expect(jump.corrected.degreesOfFreedom).toBe(5)
    expect(jump.effectiveClusters).toBeGreaterThan(1)
    expect(jump.effectiveClusters).toBeLessThanOrEqual(6)
  })
  it('covariance of two lines that share clusters', () => {
    const influences = [0, 1].map((line) => jumpOf(rows.filter((i) => known.line[i] === line)).influence)
    const { matrix, isDiagonal } = covarianceMatrix(influences)
    close(matrix[0], known.lines[0])
    close(matrix[1], known.lines[1])
    close(matrix[2], known.lines[1])
    close(matrix[3], known.lines[2])
    expect(isDiagonal).toBe(false)
    const { crossed: _, ...single } = influences[1]
    expect(() => covarianceMatrix([influences[0], single])).toThrow(/some of the estimates only/)
  })
  it('two kinds that are one are one-way clusters', () => {
    const first = Int32Array.from(known.first)
    const same = crossClusters(first, first)
    const twice = jumpOf(rows, same.cluster, { ...options, crossed: same.crossed })
    const once = jumpOf(rows, first, { ...options, crossed: undefined })
    close(twice.corrected.standardError, once.corrected.standardError)
    close(twice.effectiveClusters as number, once.effectiveClusters as number)
    expect(twice.clusters).toBe(once.clusters)
  })
  it('a kind with one cluster, and a variance below 0, have reasons', () => {
    const one = crossClusters(Int32Array.from(known.first), new Int32Array(rows.length))
    expect(() => jumpOf(rows, one.cluster, { ...options, crossed: one.crossed })).toThrow(/only 1 cluster/)
    // residuals whose sums over rows and over columns of a 2 × 2 table are near 0 while each cell's is large
    const n = 80
    const random = seededRandom(4)
    const cell = Array.from({ length: n }, (_, i) => i % 4)
    const x = Float64Array.from({ length: n }, (_, i) => (i < n / 2 ? -1 : 1) * (0.02 + ((i % (n / 2)) - (i % 4)) / 50))
    const two = crossClusters(
      Int32Array.from(cell, (c) => c >> 1),
      Int32Array.from(cell, (c) => c & 1),
    )
    const sample = buildSample({
      x,
      treated: Uint8Array.from(x, (value) => (value > 0 ? 1 : 0)),
      unit: Int32Array.from(cell.keys()),
      y: Float64Array.from(
        cell,
        (c, i) => (c === 0 || c === 3 ? 1 : -1) * (x[i] > 0 ? 1 : -1) + 0.001 * random.normal(),
      ),
      cluster: two.cluster,
    })
    const h = { untreated: 1, treated: 1 }
    expect(jumpAt(sample, { h, b: h }, { ...options, crossed: two.crossed })).toEqual({
      ok: false,
      reason: 'the variance clustered two ways is negative; cluster by one of the two',
    })
  })
})

describe('effective number of clusters (Carter, Schnepel & Steigerwald 2017)', () => {
  const jumpOf = (cluster: Int32Array, x: Float64Array, variance: 'clusters' | 'few-clusters') => {
    const random = seededRandom(6)
    const sample = buildSample({
      x,
      treated: Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0)),
      unit: Int32Array.from(x.keys()),
      y: Float64Array.from(x, () => random.normal()),
      cluster,
    })
    const h = { untreated: 2, treated: 2 }
    const options = { order: 0, kernel: 'uniform', variance, reference: 't', level: 0.95 } as const
    const estimated = jumpAt(sample, { h, b: h }, options)
    if (!estimated.ok) throw new Error(estimated.reason)
    return estimated.jump.effectiveClusters as number
  }
  // The corrected estimate of order 0 has the weights of a line on each side; at ±1 and ±2 alone, each side has Σ l² = 5/m…
  it('all alike: their number', () => {
    const x = Float64Array.from({ length: 48 }, (_, i) => (i % 2 === 0 ? -1 : 1) * (1 + (Math.floor(i / 2) % 3)) * 0.5)
    const cluster = Int32Array.from({ length: 48 }, (_, i) => Math.floor(i / 6))
    for (const variance of ['clusters', 'few-clusters'] as const) close(jumpOf(cluster, x, variance), 8, 1e-12)
  })
  it('one that holds half of either side counts for most: (Σγ)²/Σγ² by hand', () => {
    // by side, 4 stacks of ±0.5, ±1, ±1.5: cluster 0 has two of them, 1 and 2 have one each; γ ∝ 4, 1, 1
    const x = Float64Array.from({ length: 24 }, (_, i) => (i % 2 === 0 ? -1 : 1) * (1 + (Math.floor(i / 2) % 3)) * 0.5)
    const stack = Array.from({ length: 24 }, (_, i) => Math.floor(i / 6))
    const cluster = Int32Array.from(stack, (s) => Math.max(0, s - 1))
    for (const variance of ['clusters', 'few-clusters'] as const) close(jumpOf(cluster, x, variance), 2, 1e-12)
  })
})

describe('few clusters, many units', () => {
  const make = (n: number, lines: number, clusterOf: (i: number, line: number) => number) => {
    const random = seededRandom(8)
    const line = Int32Array.from({ length: n }, () => random.integer(lines))
    const x = Float64Array.from({ length: n }, () => 2 * random.next() - 1)
    return buildSample({
      x,
      treated: Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0)),
      unit: Int32Array.from(x.keys()),
      y: Float64Array.from(x, (value, i) => Math.sin(line[i]) + value + random.normal()),
      cluster: Int32Array.from(line, (c, i) => clusterOf(i, c)),
      group: line,
    })
  }
  const pooled = (sample: ReturnType<typeof make>, lines: number, variance: 'few-clusters' | 'clusters') => {
    const made = poolLines(sample, lines, {
      ...base,
      variance,
      order: 1,
      kernel: 'triangular',
      bandwidth: { kind: 'fixed', untreated: 0.8, treated: 0.8 },
      sides: 'common',
      clustered: true,
      fixedEffects: true,
    })
    if (!made.ok) throw new Error(made.reason)
    return made.jump
  }
  // Clusters of equal size whose units lie alike: ν is near G − 1 (with noise equal everywhere the variance has G − 1 squares).
  it.each([
    ['5 clusters of 4,000 units of 1,500 lines', 1500, (i: number) => i % 5, 4],
    ['2 clusters of 10,000 units, 1 line', 1, (i: number) => i % 2, 1],
    ['200 clusters of whole lines', 200, (_: number, line: number) => line, 199],
  ])('%s: about one degree of freedom less than clusters', (_, lines, clusterOf, freedom) => {
    const sample = make(20_000, lines, clusterOf)
    const reduced = pooled(sample, lines, 'few-clusters')
    close(reduced.plain.estimate, pooled(sample, lines, 'clusters').plain.estimate, 1e-10)
    expect(reduced.corrected.degreesOfFreedom / freedom).toBeGreaterThan(0.9)
    expect(reduced.corrected.degreesOfFreedom / freedom).toBeLessThan(1.05)
    expect(reduced.effectiveClusters).toBeLessThanOrEqual(freedom + 1)
  })
})
