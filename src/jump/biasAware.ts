/**
 * Bias-aware intervals: honest for every curve whose second derivative is bounded on each side, discrete scores included.
 * Source: Armstrong & Kolesár 2018, 2020; Kolesár & Rothe 2018; METHODS section 6.
 * τ̂ ± cv(B/se)·se: τ̂ the plain local linear estimate, B its worst bias (biasAwareWorst.ts), se from METHODS section 4, cv(t)
 * the quantile of |N(t, 1)|. The bandwidth, one for both sides, is the one that makes the interval shortest.
 */
import { foldedNormalQuantile, lowestOn, normalQuantile } from '../math/index.js'
import { bandwidthRange } from './bandwidth.js'
import { smoothnessByRule } from './biasAwareSmoothness.js'
import { worstBiasOf } from './biasAwareWorst.js'
import { jointFit } from './clustersJoint.js'
import type { JumpOptions } from './estimate.js'
import { countWithin } from './kernel.js'
import { type LinearPart, linearEstimate } from './linearEstimate.js'
import { addWeights, fitLocal, functional } from './localPolynomial.js'
import { neighbourResidualsOf } from './neighbours.js'
import type { BySide, Sample } from './sample.js'

export interface BiasAwareOptions extends JumpOptions {
  /** Bound M on |m''|, in units of y per x², or by rule of thumb. */
  readonly smoothness: 'rule' | number
  /** Absent: the shortest interval's. */
  readonly fixedBandwidth?: BySide<number>
  /** The curve is at these multiples of the smoothness; an eighth to eightfold by default. */
  readonly multiples?: readonly number[]
}

export interface BiasAwareInterval {
  readonly smoothness: number
  readonly bandwidth: BySide<number>
  readonly estimate: number
  readonly standardError: number
  readonly worstBias: number
  /** cv(B/se) */
  readonly criticalValue: number
  readonly low: number
  readonly high: number
}

export interface BiasAware extends BiasAwareInterval {
  readonly smoothnessFrom: 'rule' | 'given'
  readonly bandwidthFrom: 'shortest' | 'given'
  /** Units of positive kernel weight. */
  readonly unitsInBandwidth: BySide<number>
  /** The interval at multiples of the smoothness, each at its own bandwidth unless that is given. */
  readonly curve: readonly BiasAwareInterval[]
}

export type BiasAwareEstimated =
  | { readonly ok: true; readonly interval: BiasAware }
  | { readonly ok: false; readonly reason: string }

/** The sample to estimate on at a bandwidth: with line fixed effects, freed of those fitted there. */
export type SampleAt = (
  h: BySide<number>,
) => { readonly ok: true; readonly sample: Sample } | { readonly ok: false; readonly reason: string }

/** Steps of the grid of bandwidths, but for very wide ranges. */
const gridRatio = 1.15
const mostGridPoints = 48
const ownTolerance = 1e-3
const curveTolerance = 1e-2
const eighthToEightfold = [1 / 8, 1 / 4, 1 / 2, 1, 2, 4, 8]

/**
 * The interval of a sample, or a reason. With `sampleAt`, smoothness and bandwidth are chosen on `sample`, and the interval is
 * made on the sample at that bandwidth; its worst bias is then that of the regression with a level for each line
 * (`hasLineLevels`), for curves that all lines have in common.
 */
export function biasAware(sample: Sample, options: BiasAwareOptions, sampleAt?: SampleAt): BiasAwareEstimated {
  if (options.order !== 1) return { ok: false, reason: 'the bias-aware interval is for order 1 only' }
  const rule: ReturnType<typeof smoothnessByRule> =
    options.smoothness === 'rule' ? smoothnessByRule(sample) : { ok: true, bound: options.smoothness }
  if (!rule.ok) return rule
  if (!(rule.bound >= 0)) throw new RangeError(`the smoothness must be 0 or more, got ${rule.bound}`)
  const shortest = searcher(sample, options)
  const intervalOf = (smoothness: number, tolerance: number): BiasAwareInterval | string => {
    const bandwidth = options.fixedBandwidth ?? shortest(smoothness, tolerance)
    if (typeof bandwidth === 'string') return bandwidth
    const at = sampleAt ? sampleAt(bandwidth) : { ok: true as const, sample }
    if (!at.ok) return at.reason
    const plain = plainAt(at.sample, bandwidth, options, true)
    return typeof plain === 'string' ? plain : { ...intervalFrom(plain, smoothness, options.level), bandwidth }
  }
  const main = intervalOf(rule.bound, ownTolerance)
  if (typeof main === 'string') return { ok: false, reason: main }
  const curve = (options.multiples ?? eighthToEightfold).map((multiple) =>
    multiple === 1 ? main : intervalOf(rule.bound * multiple, curveTolerance),
  )
  const within = (name: 'untreated' | 'treated') => countWithin(sample[name].t, main.bandwidth[name], options.kernel)
  return {
    ok: true,
    interval: {
      ...main,
      smoothnessFrom: options.smoothness === 'rule' ? 'rule' : 'given',
      bandwidthFrom: options.fixedBandwidth ? 'given' : 'shortest',
      unitsInBandwidth: { untreated: within('untreated'), treated: within('treated') },
      curve: curve.filter((one) => typeof one !== 'string'),
    },
  }
}

interface PlainEstimate {
  readonly estimate: number
  readonly standardError: number
  /** Of |m''| ≤ 1. */
  readonly unitBias: number
}

/** The plain estimate at a bandwidth. `isFinal`: with the weights of the regression with line levels, where lines have them. */
function plainAt(
  sample: Sample,
  h: BySide<number>,
  options: JumpOptions,
  isFinal: boolean,
  neighbours = options.variance === 'neighbours' ? neighbourResidualsOf(sample) : undefined,
): PlainEstimate | string {
  const parts: LinearPart[] = []
  for (const name of ['untreated', 'treated'] as const) {
    const side = sample[name]
    if (side.t.length === 0) return `${name} side: no units`
    const fitted = fitLocal(side, 1, h[name], options.kernel)
    if (!fitted.ok) return `${name} side: ${fitted.reason}`
    const weights = new Float64Array(fitted.fit.count)
    addWeights(weights, side, fitted.fit, functional(fitted.fit, 0), name === 'treated' ? 1 : -1)
    parts.push({ side, fit: fitted.fit, weights, neighbours: neighbours?.[name] })
  }
  const made = linearEstimate(parts, { ...options, reference: 'normal' }, sample.repeats)
  if (typeof made === 'string') return made
  const { estimate, standardError } = made.inference
  if (!(standardError > 0)) return 'the fit leaves no residual near the line'
  const joint = isFinal && options.hasLineLevels ? jointFit(parts, true) : undefined
  if (typeof joint === 'string') return joint
  const weights = joint?.weights ?? parts.map((part) => part.weights)
  const unitBias = parts.reduce((sum, { side }, s) => sum + worstBiasOf(side.t, weights[s]), 0)
  return { estimate, standardError, unitBias }
}

/** cv(B/se)·se for B = 0 and up, safe where B is any number of se. */
function halfLength(worstBias: number, standardError: number, level: number): number {
  const ratio = worstBias / standardError
  // from here on the quantile is B/se + z to every digit
  if (ratio > 1e6) return worstBias + normalQuantile(level) * standardError
  return foldedNormalQuantile(level, ratio) * standardError
}

function intervalFrom({ estimate, standardError, unitBias }: PlainEstimate, smoothness: number, level: number) {
  const worstBias = smoothness * unitBias
  const half = halfLength(worstBias, standardError, level)
  return {
    smoothness,
    estimate,
    standardError,
    worstBias,
    criticalValue: half / standardError,
    low: estimate - half,
    high: estimate + half,
  }
}

/**
 * Finds the bandwidth of the shortest interval in [a_min, a_max] (METHODS section 5), or the reason why no bandwidth serves.
 * The length may have several minima: lowestOn. Estimates are kept from one smoothness to the next. `few-clusters` searches by
 * the plain clustered variance, which costs far less.
 */
function searcher(sample: Sample, options: BiasAwareOptions) {
  const variance = options.variance === 'few-clusters' ? 'clusters' : options.variance
  const neighbours = variance === 'neighbours' ? neighbourResidualsOf(sample) : undefined
  const made = new Map<number, PlainEstimate | string>()
  const estimateAt = (h: number): PlainEstimate | string => {
    const known = made.get(h)
    if (known !== undefined) return known
    const estimate = plainAt(sample, { untreated: h, treated: h }, { ...options, variance }, false, neighbours)
    made.set(h, estimate)
    return estimate
  }
  return (smoothness: number, tolerance: number): BySide<number> | string => {
    const { smallest, largest } = bandwidthRange(sample, options.order)
    if (!(largest > 0)) return 'all units lie on the line'
    const low = smallest > 0 ? Math.min(smallest, largest) : nearestOffLine(sample)
    const length = (h: number) => {
      const estimate = estimateAt(h)
      if (typeof estimate === 'string') return Number.POSITIVE_INFINITY
      return halfLength(smoothness * estimate.unitBias, estimate.standardError, options.level)
    }
    const points = Math.min(mostGridPoints, 2 + Math.ceil(Math.log(largest / low) / Math.log(gridRatio)))
    const h = lowestOn(length, low, largest, points, tolerance)
    return h === undefined ? (estimateAt(largest) as string) : { untreated: h, treated: h }
  }
}

/** The smallest distance above 0. */
function nearestOffLine({ untreated, treated }: Sample): number {
  const first = [untreated, treated].map(({ t }) => t.find((distance) => distance > 0) ?? Number.POSITIVE_INFINITY)
  return Math.min(...first)
}
