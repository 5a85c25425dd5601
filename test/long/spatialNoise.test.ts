/**
 * Smooth noise on the ground and no effect at all: how often does a 5% test find one? A straight border of 30 pieces of a
 * kilometre, units on both sides, a field of random waves, nearly Gaussian (Rahimi & Recht 2007, NIPS 20), as noise in
 * common and a quarter of its variance as noise of their own. Units stay where they are; the noise is drawn anew. Pooled with
 * piece effects at one bandwidth; the variances differ, the estimate does not.
 *
 * The cutoff that serves is the range of the noise. Bartlett weights fall from the first metre on, so noise that neighbours
 * have in common, which an estimate with weights of both signs leaves out, is taken back in part: a shorter cutoff gives too
 * large a variance for smooth noise. A longer one gives less, because residuals are free of piece effects. Noise that reaches
 * 1 km ties neighbouring pieces together, so that clusters by piece are not independent; noise that reaches 2 km is so smooth
 * over the bandwidth that it hardly moves the estimate, and every variance but the short cutoffs' serves.
 */
import { describe, expect, it } from 'vitest'
import {
  buildSample,
  covarianceMatrix,
  type Influence,
  infer,
  type JumpFit,
  type SpatialPlaces,
  spatialPlaces,
  type Variance,
} from '../../src/jump/index.js'
import { type Random, streamOf } from '../../src/math/index.js'
import { poolLines } from '../../src/thresholds/index.js'

const draws = 1000
/** Draws whose variances are summed in one search for pairs. */
const batch = 25
const pieces = 30
const units = 8000
const bandwidthMetres = 1500
const waves = 60
const cutoffsMetres = [500, 1000, 2000]
/** Correlations are below 5% beyond 2.45 scales: noise that reaches about 1 km, and 2 km. */
const noises = [
  { scaleMetres: 400, reachMetres: 1000 },
  { scaleMetres: 800, reachMetres: 2000 },
]
const metresPerDegree = 111_170
const metresPerDegreeEast = metresPerDegree * Math.cos((47 * Math.PI) / 180)

const place = streamOf(20, 0)
const east = Float64Array.from({ length: units }, () => 1000 * pieces * place.next())
const x = Float64Array.from({ length: units }, () => bandwidthMetres * (2 * place.next() - 1))
const group = Int32Array.from(east, (at) => Math.floor(at / 1000))
const lon = east.map((at) => 8 + at / metresPerDegreeEast)
const lat = x.map((at) => 47 + at / metresPerDegree)

/** The field's correlation is exp(−(d/scale)²/2). */
function outcomes(random: Random, scaleMetres: number): Float64Array {
  const y = x.map(() => 0.5 * random.normal())
  for (let wave = 0; wave < waves; wave++) {
    const [toEast, toNorth] = [random.normal() / scaleMetres, random.normal() / scaleMetres]
    const phase = 2 * Math.PI * random.next()
    for (let i = 0; i < units; i++) y[i] += Math.sqrt(2 / waves) * Math.cos(toEast * east[i] + toNorth * x[i] + phase)
  }
  return y
}

function pooled(y: Float64Array, variance: Variance, spatial?: SpatialPlaces): JumpFit {
  const entries = {
    x,
    y,
    group,
    treated: Uint8Array.from(x, (value) => (value > 0 ? 1 : 0)),
    unit: Int32Array.from(x, (_, i) => i),
    ...(variance === 'clusters' ? { cluster: group } : {}),
  }
  const made = poolLines(buildSample(entries), pieces, {
    order: 1,
    kernel: 'triangular',
    variance,
    reference: 't',
    level: 0.95,
    bandwidth: { kind: 'fixed', untreated: bandwidthMetres, treated: bandwidthMetres },
    sides: 'common',
    clustered: variance === 'clusters',
    fixedEffects: true,
    ...(spatial ? { spatial } : {}),
  })
  if (!made.ok) throw new Error(made.reason)
  return made.jump
}

/** Percent of draws rejected, and the mean standard error over the spread of the estimates, by variance. */
function rates(scaleMetres: number, stream: number): Map<string, { rejected: number; ratio: number }> {
  const places = cutoffsMetres.map((cutoff) => spatialPlaces(lon, lat, cutoff))
  const tally = new Map<string, { rejected: number; errors: number }>()
  const estimates: number[] = []
  const note = (name: string, { p, standardError }: { p: number; standardError: number }) => {
    const { rejected, errors } = tally.get(name) ?? { rejected: 0, errors: 0 }
    tally.set(name, { rejected: rejected + Number(p < 0.05), errors: errors + standardError })
  }
  for (let first = 0; first < draws; first += batch) {
    const influences: Influence[] = []
    const own: JumpFit[] = []
    for (let k = first; k < first + batch; k++) {
      const y = outcomes(streamOf(stream, k), scaleMetres)
      note('neighbours', pooled(y, 'neighbours').corrected)
      note('clusters by piece', pooled(y, 'clusters').corrected)
      // ψ of hc0 are those of the spatial variance
      own.push(pooled(y, 'hc0'))
      influences.push(own[own.length - 1].influence)
      estimates.push(own[own.length - 1].corrected.estimate)
    }
    places.forEach((at, c) => {
      const { matrix } = covarianceMatrix(influences, at)
      own.forEach(({ corrected: { estimate, degreesOfFreedom } }, k) => {
        note(`spatial, ${cutoffsMetres[c]} m`, infer(estimate, matrix[k * batch + k], degreesOfFreedom, 0.95))
      })
    })
  }
  const mean = estimates.reduce((sum, value) => sum + value, 0) / draws
  const spread = Math.sqrt(estimates.reduce((sum, value) => sum + (value - mean) ** 2, 0) / (draws - 1))
  return new Map(
    [...tally].map(([name, { rejected, errors }]) => [
      name,
      { rejected: (100 * rejected) / draws, ratio: errors / draws / spread },
    ]),
  )
}

describe('smooth noise without an effect', () => {
  it('has the spatial variance of the influence values that are summed here', () => {
    const y = outcomes(streamOf(21, 0), 400)
    const places = spatialPlaces(lon, lat, 1000)
    const { matrix } = covarianceMatrix([pooled(y, 'hc0').influence], places)
    expect(matrix[0] / pooled(y, 'spatial', places).corrected.standardError ** 2).toBeCloseTo(1, 12)
  })

  it('is taken for one about as often as the level says, by a spatial variance that reaches as far', () => {
    const found = noises.map((noise, i) => ({ ...noise, by: rates(noise.scaleMetres, 22 + i) }))
    console.table(
      found.flatMap(({ reachMetres, by }) =>
        [...by].map(([variance, { rejected, ratio }]) => ({
          'noise reaches, m': reachMetres,
          variance,
          'rejected, %': rejected,
          'standard error / spread': Number(ratio.toFixed(3)),
        })),
      ),
    )
    const rejected = (noise: number, variance: string) => found[noise].by.get(variance)?.rejected as number
    const expectLevel = (noise: number, variance: string) => {
      expect(rejected(noise, variance), variance).toBeGreaterThanOrEqual(3)
      expect(rejected(noise, variance), variance).toBeLessThanOrEqual(8)
    }
    expectLevel(0, 'spatial, 1000 m')
    expectLevel(1, 'clusters by piece')
    expect(rejected(1, 'spatial, 2000 m')).toBeLessThanOrEqual(8)
    expect(rejected(0, 'neighbours')).toBeGreaterThan(15)
    expect(rejected(0, 'clusters by piece')).toBeLessThan(rejected(0, 'neighbours'))
  })
})
