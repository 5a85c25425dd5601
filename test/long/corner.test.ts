/**
 * A corner, by simulation (CHECKS, "A corner"): the distance-only fit is off by what the closed form says, the fit in two
 * coordinates covers the truth at its level. And the uniform band along a bent border with a smooth surface covers the
 * whole curve of effects at its level, with the bandwidth by the rule.
 */
import { describe, expect, it } from 'vitest'
import {
  bandwidthsFor,
  buildPlaneSample,
  buildSample,
  jumpAt,
  jumpAtPoint,
  type PlaneVariance,
  planeBandwidth,
} from '../../src/jump/index.js'
import { seededRandom, streamOf } from '../../src/math/index.js'
import { estimateAlong } from '../../src/thresholds/index.js'
import { cornerField, distanceOnlyBias, radiusMetres } from '../jump/cornerField.js'
import { armMetres, type Field, fieldOf } from '../thresholds/alongField.js'

const options = { order: 1, kernel: 'triangular', variance: 'hc2', reference: 't', level: 0.95 } as const
const h = { untreated: radiusMetres, treated: radiusMetres }

describe('a corner: 1,000 draws of 1,500 units within the bandwidth, noise 0.3 h', () => {
  distanceOnlyBias.forEach(([dOverH, bias], row) => {
    it(`${dOverH} bandwidths from it`, () => {
      const draws = 1000
      const found: number[] = []
      let distanceCovers = 0
      let planeCovers = 0
      let plainCovers = 0
      for (let k = 0; k < draws; k++) {
        const field = cornerField(dOverH, 1500, 0.3, 10_000 * (row + 1) + k)
        const x = field.eastMetres.map((e, i) => (field.treated[i] ? 1 : -1) * Math.hypot(e, field.northMetres[i]))
        const byDistance = jumpAt(buildSample({ ...field, x }), { h, b: h }, options)
        const inPlane = jumpAtPoint(buildPlaneSample(field), { h, b: h }, options)
        if (!byDistance.ok || !inPlane.ok) throw new Error('no estimate')
        const { plain } = byDistance.jump
        found.push(plain.estimate)
        if (plain.low <= 0 && 0 <= plain.high) distanceCovers++
        if (inPlane.jump.plain.low <= 0 && 0 <= inPlane.jump.plain.high) plainCovers++
        const { low, high } = inPlane.jump.corrected
        if (low <= 0 && 0 <= high) planeCovers++
      }
      const mean = found.reduce((sum, value) => sum + value / draws, 0)
      const variance = found.reduce((sum, value) => sum + (value - mean) ** 2 / (draws - 1), 0)
      const error = Math.sqrt(variance / draws)
      const [byDistance, plain, corrected] = [distanceCovers, plainCovers, planeCovers].map((count) => count / draws)
      console.log(
        `d/h ${dOverH}: distance-only off by ${mean.toFixed(4)} (closed form ${bias}, error ${error.toFixed(4)}), ` +
          `covers ${byDistance.toFixed(3)}; two coordinates cover ${plain.toFixed(3)} plain, ${corrected.toFixed(3)} corrected`,
      )
      // the closed form is given to 0.00005
      expect(Math.abs(mean - bias)).toBeLessThan(3 * error + 0.00005)
      // four standard errors of a coverage of 0.95 over 1,000 draws: 0.0276
      expect(corrected).toBeGreaterThan(0.9224)
      expect(corrected).toBeLessThan(0.9776)
    })
  })
})

const effect = (east: number, north: number) => 0.5 + 0.2 * Math.sin((east + north) / 2500)
const surface = (east: number, north: number) => Math.cos(east / 4000) + Math.sin(north / 3000 + 1)

describe('along a bent border, ten points, the bandwidth by the rule', () => {
  it('1,000 draws of independent noise, hc2', () => {
    const { point, band, average } = coverages(1000, 'hc2', (k) => fieldOf({ ...alike, stream: k }))
    expect(point).toBeGreaterThan(0.93)
    expect(point).toBeLessThan(0.97)
    expect(band).toBeGreaterThan(0.92)
    expect(band).toBeLessThan(0.98)
    expect(average).toBeGreaterThan(0.92)
    expect(average).toBeLessThan(0.98)
  })

  // Some 100 clusters lie within the bandwidth of a point and few of them near it: the bias-reduced variance errs to the safe
  // side there, and most in the tails that a uniform band reaches into. Taken apart, the plain clustered variance fails.
  it('400 draws of noise in common by squares of 250 m, few-clusters beside clusters and hc2', () => {
    const reduced = coverages(400, 'few-clusters', clusteredField)
    const plain = coverages(400, 'clusters', clusteredField)
    const alone = coverages(400, 'hc2', clusteredField)
    expect(reduced.point).toBeGreaterThan(0.93)
    expect(reduced.point).toBeLessThan(0.98)
    expect(reduced.band).toBeGreaterThan(0.93)
    expect(reduced.average).toBeGreaterThan(0.91)
    expect(plain.band).toBeLessThan(reduced.band)
    expect(alone.point).toBeLessThan(reduced.point)
  })
})

const alike = { n: 5000, pointsPerArm: 5, noise: 0.5, effect, surface }
const squareMetres = 250

function clusteredField(stream: number): Field {
  const field = fieldOf({ ...alike, noise: 0.4, stream })
  const across = (2 * armMetres) / squareMetres
  const square = (metres: number) => Math.floor((metres + armMetres) / squareMetres)
  const cluster = Int32Array.from(field.east, (e, i) => across * square(e) + square(field.north[i]))
  const random = streamOf(20260105, stream)
  const shock = Float64Array.from({ length: across * across }, () => 0.3 * random.normal())
  const y = field.units.y.map((value, i) => value + shock[cluster[i]])
  return { ...field, units: { ...field.units, y, cluster } }
}

function coverages(draws: number, variance: PlaneVariance, draw: (k: number) => Field) {
  const count = { point: 0, band: 0, average: 0 }
  let bandwidth = 0
  for (let k = 0; k < draws; k++) {
    const field = draw(k)
    const result = estimateRuled(field, variance, k)
    const truth = field.places.map(([e, n]) => effect(e, n))
    const inside = result.points.map((point, i) => {
      if (!point.ok) throw new Error(point.reason)
      const { low, high } = point.jump.corrected
      if (low <= truth[i] && truth[i] <= high) count.point += 1 / truth.length
      bandwidth += point.jump.bandwidths.h.treated / truth.length / draws
      return point.uniformLow <= truth[i] && truth[i] <= point.uniformHigh
    })
    if (inside.every(Boolean)) count.band++
    const { length } = result.average
    if (!length.ok) throw new Error(length.reason)
    const mean = truth.reduce((sum, value) => sum + value / truth.length, 0)
    if (length.low <= mean && mean <= length.high) count.average++
  }
  const [point, band, average] = [count.point, count.band, count.average].map((value) => value / draws)
  console.log(
    `${variance}: pointwise ${point.toFixed(3)}, uniform band ${band.toFixed(3)}, average by length ` +
      `${average.toFixed(3)}, mean bandwidth ${bandwidth.toFixed(0)} m`,
  )
  return { point, band, average }
}

/** Bandwidth by the rule: the pooled one against the distance to the border, carried over. */
function estimateRuled(field: Field, variance: PlaneVariance, stream: number) {
  const { east, north, units } = field
  const x = east.map((e, i) => signedMetres(e, north[i]))
  const clustered = variance !== 'hc2'
  const chosen = bandwidthsFor(
    buildSample({ ...units, x }),
    { kind: 'rule', rule: 'mse' },
    { order: 1, kernel: 'triangular', sides: 'common', clustered },
  )
  if (!chosen.ok) throw new Error(chosen.reason)
  const { bandwidth } = planeBandwidth(chosen.bandwidths.h.treated, 2 * armMetres, 1, 'triangular')
  const both = { untreated: bandwidth, treated: bandwidth }
  const bandwidths = { h: both, b: both }
  const random = seededRandom(stream)
  return estimateAlong(field.points, units, { ...options, variance, bandwidths, random, draws: 2000 })
}

/** To the bent border of the field, positive north-west of it. */
function signedMetres(east: number, north: number): number {
  if (east < 0 && north > 0) return Math.min(-east, north)
  if (east >= 0 && north <= 0) return -Math.hypot(east, north)
  return east >= 0 ? -east : north
}
