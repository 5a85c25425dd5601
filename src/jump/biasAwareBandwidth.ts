/**
 * The bandwidth of the shortest bias-aware interval, in [a_min, a_max] of METHODS section 5.
 * Source: Armstrong & Kolesár 2018, 2020, who choose it by a variance estimated beforehand, as here. Chosen by the standard
 * error estimated at each bandwidth, the interval would be made where that error comes out too small by chance: its coverage is
 * then 1 to 2 points short (test/long/honest.test.ts).
 * Expected variance: V(h) = D·Σ_sides σ̂²_s Σ l², σ̂²_s the mean squared neighbour residual of the side's units within the pilot
 * bandwidth a0. D is 1, or with clusters or a spatial variance the ratio of that variance to hc0's at a0.
 */
import { foldedNormalQuantile, lowestOn, normalQuantile } from '../math/index.js'
import { bandwidthRange, pilotBandwidth } from './bandwidth.js'
import { plainParts, unitBiasOf } from './biasAwareParts.js'
import type { JumpOptions } from './estimate.js'
import { countWithin } from './kernel.js'
import { type LinearPart, linearEstimate } from './linearEstimate.js'
import { neighbourResidualsOf } from './neighbours.js'
import type { BySide, Sample } from './sample.js'

/** Steps of the grid of bandwidths, but for very wide ranges. */
const gridRatio = 1.15
const mostGridPoints = 48

interface Expected {
  readonly standardError: number
  readonly unitBias: number
}

/** Finds the bandwidth, for both sides, at a smoothness, or says why none serves; what was tried is kept for the next. */
export function bandwidthSearch(
  sample: Sample,
  options: JumpOptions,
): (smoothness: number, tolerance: number) => BySide<number> | string {
  const made = new Map<number, Expected | string>()
  const { smallest, largest } = bandwidthRange(sample, 1)
  const pilot = pilotBandwidth(sample, options.kernel, { smallest, largest })
  const spread = sidesSpread(sample, pilot, options)
  const expectedAt = (h: number): Expected | string => {
    const known = made.get(h)
    if (known !== undefined) return known
    const expected = expect(sample, h, options, spread)
    made.set(h, expected)
    return expected
  }
  return (smoothness, tolerance) => {
    if (!(largest > 0)) return 'all units lie on the line'
    const low = smallest > 0 ? Math.min(smallest, largest) : nearestOffLine(sample)
    const length = (h: number) => {
      const expected = expectedAt(h)
      if (typeof expected === 'string') return Number.POSITIVE_INFINITY
      return halfLength(smoothness * expected.unitBias, expected.standardError, options.level)
    }
    const points = Math.min(mostGridPoints, 2 + Math.ceil(Math.log(largest / low) / Math.log(gridRatio)))
    const h = lowestOn(length, low, largest, points, tolerance)
    return h === undefined ? (expectedAt(largest) as string) : { untreated: h, treated: h }
  }
}

function expect(sample: Sample, h: number, { kernel }: JumpOptions, spread: BySide<number>): Expected | string {
  const parts = plainParts(sample, { untreated: h, treated: h }, kernel)
  if (typeof parts === 'string') return parts
  let variance = 0
  for (const { name, weights } of parts) {
    let squares = 0
    for (let i = 0; i < weights.length; i++) squares += weights[i] * weights[i]
    variance += spread[name] * squares
  }
  if (!(variance > 0)) return 'the fit leaves no residual near the line'
  const weights = parts.map((part) => part.weights)
  return { standardError: Math.sqrt(variance), unitBias: unitBiasOf(parts, weights) }
}

/** D σ̂² of each side. */
function sidesSpread(sample: Sample, pilot: number, options: JumpOptions): BySide<number> {
  const residuals = neighbourResidualsOf(sample)
  const inflation = inflationAt(sample, pilot, options)
  const spreadOf = (name: 'untreated' | 'treated') => {
    const { t } = sample[name]
    const near = countWithin(t, pilot, options.kernel)
    const count = near > 0 ? near : t.length
    let squares = 0
    for (let i = 0; i < count; i++) squares += residuals[name][i] * residuals[name][i]
    return count > 0 ? (inflation * squares) / count : 0
  }
  return { untreated: spreadOf('untreated'), treated: spreadOf('treated') }
}

/** D; 1 where the pilot bandwidth has no estimate. `few-clusters` takes the plain clustered variance here, which costs far less. */
function inflationAt(sample: Sample, pilot: number, options: JumpOptions): number {
  const variance = options.variance === 'few-clusters' ? 'clusters' : options.variance
  if (variance !== 'clusters' && variance !== 'spatial') return 1
  if (!(pilot > 0)) return 1
  const parts = plainParts(sample, { untreated: pilot, treated: pilot }, options.kernel)
  if (typeof parts === 'string') return 1
  const linear: LinearPart[] = parts.map((part) => ({ ...part, neighbours: undefined }))
  const made = linearEstimate(linear, { ...options, variance }, sample.repeats)
  const apart = linearEstimate(linear, { ...options, variance: 'hc0' }, false)
  if (typeof made === 'string' || typeof apart === 'string') return 1
  const ratio = (made.inference.standardError / apart.inference.standardError) ** 2
  return ratio > 0 ? ratio : 1
}

/** cv(B/se)·se under the normal reference. */
function halfLength(worstBias: number, standardError: number, level: number): number {
  const ratio = worstBias / standardError
  if (ratio > 1e6) return worstBias + normalQuantile(level) * standardError
  return foldedNormalQuantile(level, ratio) * standardError
}

/** The smallest distance above 0. */
function nearestOffLine({ untreated, treated }: Sample): number {
  const first = [untreated, treated].map(({ t }) => t.find((distance) => distance > 0) ?? Number.POSITIVE_INFINITY)
  return Math.min(...first)
}
