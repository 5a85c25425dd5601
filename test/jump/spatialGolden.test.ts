/**
 * The spatial variance of one line, pooled with fixed effects, between lines and along a border against dense matrices of
 * all pairs. Values made by base R (test/golden/jump/spatial.R), with geodesic distances by Vincenty's series. Tolerance
 * 1e-10 relative: both distances are good to a few nanometres in the 800 m of the cutoff; the worst agreement seen is
 * between 1e-12 and 1e-11.
 */
import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { buildSample, covarianceMatrix, type JumpFit, jumpAt, spatialPlaces } from '../../src/jump/index.js'
import { seededRandom } from '../../src/math/index.js'
import { estimateAlong, poolLines } from '../../src/thresholds/index.js'
import { nearIn } from '../thresholds/alongField.js'

const golden = JSON.parse(readFileSync(new URL('../golden/jump/spatial.json', import.meta.url), 'utf8'))

interface Known {
  readonly plain: number
  readonly corrected: number
  readonly plainVariance: number
  readonly correctedVariance: number
  readonly plainFreedom: number
  readonly correctedFreedom: number
}

interface Case extends Known {
  readonly order: number
  readonly kernel: 'triangular' | 'epanechnikov' | 'uniform'
  readonly weighted: boolean
  readonly h: number
  readonly b: number
}

const close = (got: number, wanted: number) =>
  expect(Math.abs(got - wanted)).toBeLessThanOrEqual(1e-10 * Math.abs(wanted))

function agrees({ plain, corrected }: Pick<JumpFit, 'plain' | 'corrected'>, known: Known) {
  close(plain.estimate, known.plain)
  close(corrected.estimate, known.corrected)
  close(plain.standardError ** 2, known.plainVariance)
  close(corrected.standardError ** 2, known.correctedVariance)
  close(plain.degreesOfFreedom, known.plainFreedom)
  close(corrected.degreesOfFreedom, known.correctedFreedom)
}

/** The units in an order of rows, all of them or those of one line. */
function ground(order: readonly number[], line?: number) {
  const pick = (values: number[]) => Float64Array.from(order, (i) => values[i])
  const rows = order.flatMap((i, row) => (line === undefined || golden.line[i] === line ? [row] : []))
  const keep = (values: number[]) => Float64Array.from(rows, (row) => values[order[row]])
  return {
    places: spatialPlaces(pick(golden.lon), pick(golden.lat), golden.cutoffMetres),
    entries: {
      x: keep(golden.x),
      treated: Uint8Array.from(keep(golden.x), (x) => (x >= 0 ? 1 : 0)),
      unit: Int32Array.from(rows),
      y: keep(golden.y),
      w: keep(golden.w),
      group: Int32Array.from(keep(golden.line)),
    },
  }
}

const forwards: number[] = golden.x.map((_: number, i: number) => i)
const orders = { 'as made': forwards, shuffled: forwards.map((i) => (i * 87) % forwards.length) }
const base = { variance: 'spatial', reference: 't', level: 0.95 } as const
const bothSides = (value: number) => ({ untreated: value, treated: value })
const name = ({ kernel, order, weighted }: Case) => `${kernel}, order ${order}${weighted ? ', weighted' : ''}`

describe('one line', () => {
  for (const known of golden.whole as Case[]) {
    it(name(known), () => {
      const { places, entries } = ground(forwards)
      const sample = buildSample(known.weighted ? entries : { ...entries, w: undefined })
      const { order, kernel, h, b } = known
      const made = jumpAt(sample, { h: bothSides(h), b: bothSides(b) }, { ...base, order, kernel, spatial: places })
      if (!made.ok) throw new Error(made.reason)
      agrees(made.jump, known)
    })
  }
})

describe('pooled with line fixed effects', () => {
  for (const known of golden.pooled as Case[]) {
    it(name(known), () => {
      const made = Object.values(orders).map((order) => pooledIn(order, known))
      agrees(made[0], known)
      expect({ ...made[1], influence: undefined, plainInfluence: undefined }).toEqual({
        ...made[0],
        influence: undefined,
        plainInfluence: undefined,
      })
    })
  }

  function pooledIn(rows: readonly number[], { order, kernel, h, weighted }: Case): JumpFit {
    const { places, entries } = ground(rows)
    const made = poolLines(buildSample(weighted ? entries : { ...entries, w: undefined }), 6, {
      ...base,
      order,
      kernel,
      bandwidth: { kind: 'fixed', ...bothSides(h) },
      sides: 'common',
      clustered: false,
      fixedEffects: true,
      spatial: places,
    })
    if (!made.ok) throw new Error(made.reason)
    return made.jump
  }
})

describe('between lines', () => {
  const matrixOf = (rows: readonly number[]) => {
    const { places } = ground(rows)
    const influences = [0, 1, 2, 3, 4, 5].map((line) => {
      const { h } = golden.lines
      const options = { ...base, order: 1, kernel: 'triangular', spatial: places } as const
      const sample = buildSample({ ...ground(rows, line).entries, w: undefined })
      const made = jumpAt(sample, { h: bothSides(h), b: bothSides(h) }, options)
      if (!made.ok) throw new Error(made.reason)
      close(made.jump.corrected.estimate, golden.lines.corrected[line])
      return made.jump.influence
    })
    return covarianceMatrix(influences, places).matrix
  }

  it('covariances are sums over neighbouring units', () => {
    const largest = Math.max(...golden.lines.covariance)
    matrixOf(orders['as made']).forEach((value, k) => {
      expect(Math.abs(value - golden.lines.covariance[k])).toBeLessThan(1e-10 * largest)
    })
  })

  it('not a bit of them depends on the order of rows', () => {
    expect(matrixOf(orders.shuffled)).toEqual(matrixOf(orders['as made']))
  })
})

describe('along a border', () => {
  const { h, b, places: eastings, lengths, points, average, averageVariance } = golden.along

  function alongIn(rows: readonly number[]) {
    const { places, entries } = ground(rows)
    const east = Float64Array.from(rows, (i) => golden.east[i])
    const spots = eastings.map((at: number) => [at, 0] as const)
    return estimateAlong(
      eastings.map((at: number, k: number) => ({ id: `${at} m`, lengthMetres: lengths[k] })),
      { ...entries, near: nearIn(spots, east, entries.x) },
      {
        ...base,
        order: 1,
        kernel: 'triangular',
        bandwidths: { h: bothSides(h), b: bothSides(b) },
        spatial: places,
        random: seededRandom(4),
        draws: 500,
        smallestSide: 10,
      },
    )
  }

  it('points and their average', () => {
    const made = alongIn(forwards)
    made.points.forEach((point, k) => {
      if (!point.ok) throw new Error(point.reason)
      agrees(point.jump, points[k])
    })
    const { length } = made.average
    if (!length.ok) throw new Error(length.reason)
    // the estimate is the difference of larger ones
    expect(length.estimate).toBeCloseTo(average, 9)
    close(length.standardError ** 2, averageVariance)
  })

  it('not a bit depends on the order of rows', () => {
    const bare = ({ average: means, criticalValue }: ReturnType<typeof alongIn>) => ({ means, criticalValue })
    expect(bare(alongIn(orders.shuffled))).toEqual(bare(alongIn(forwards)))
  })
})
