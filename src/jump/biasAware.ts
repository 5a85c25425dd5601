/**
 * Bias-aware intervals: honest for every curve whose second derivative is bounded on each side, discrete scores included.
 * Source: Armstrong & Kolesár 2018, 2020; Kolesár & Rothe 2018; METHODS section 6.
 * τ̂ ± cv(B/se)·se: τ̂ the plain local linear estimate, B its worst bias (biasAwareWorst.ts), se from METHODS section 4, cv(t)
 * the quantile of |T + t| with T from the reference distribution: N(0, 1), or Student's t with the degrees of freedom of τ̂.
 * The bandwidth, one for both sides, is that of the shortest interval (biasAwareBandwidth.ts).
 */
import { foldedStudentQuantile, studentQuantile } from '../math/index.js'
import { bandwidthSearch } from './biasAwareBandwidth.js'
import { plainParts, unitBiasOf } from './biasAwareParts.js'
import { smoothnessByRule } from './biasAwareSmoothness.js'
import { jointFit } from './clustersJoint.js'
import type { JumpOptions } from './estimate.js'
import { countWithin, type Kernel } from './kernel.js'
import { linearEstimate } from './linearEstimate.js'
import { neighbourResidualsOf } from './neighbours.js'
import { type BySide, distinctWithin, type Sample } from './sample.js'

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
  /** Infinity under the normal reference. */
  readonly degreesOfFreedom: number
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

const ownTolerance = 1e-3
const curveTolerance = 1e-2
const eighthToEightfold = [1 / 8, 1 / 4, 1 / 2, 1, 2, 4, 8]

/** A score this coarse near the line leaves the corrected interval little to go by. */
const fewestDistinct = 10

/** Whether fewer than 10 distinct distances lie within h on a side: then the bias-aware interval is the one to offer. */
export function fewDistinct(sample: Sample, h: BySide<number>, kernel: Kernel): boolean {
  return (['untreated', 'treated'] as const).some((name) => {
    const { t } = sample[name]
    return distinctWithin(t, countWithin(t, h[name], kernel), fewestDistinct) < fewestDistinct
  })
}

/**
 * The interval of a sample, or a reason. With `sampleAt`, smoothness and bandwidth are chosen on `sample`, and the interval is
 * made on the sample at that bandwidth; its worst bias is then that of the regression with a level for each line
 * (`hasLineLevels`), for curves that all lines have in common.
 */
export function biasAware(sample: Sample, options: BiasAwareOptions, sampleAt?: SampleAt): BiasAwareEstimated {
  if (options.order !== 1) return { ok: false, reason: 'the bias-aware interval is for order 1 only' }
  for (const name of ['untreated', 'treated'] as const) {
    if (sample[name].t.length === 0) return { ok: false, reason: `${name} side: no units` }
  }
  const rule: ReturnType<typeof smoothnessByRule> =
    options.smoothness === 'rule' ? smoothnessByRule(sample) : { ok: true, bound: options.smoothness }
  if (!rule.ok) return rule
  if (!(rule.bound >= 0)) throw new RangeError(`the smoothness must be 0 or more, got ${rule.bound}`)
  const { fixedBandwidth } = options
  const find = fixedBandwidth ? () => fixedBandwidth : bandwidthSearch(sample, options)
  const intervalOf = (smoothness: number, tolerance: number): BiasAwareInterval | string => {
    const bandwidth = find(smoothness, tolerance)
    if (typeof bandwidth === 'string') return bandwidth
    const at = sampleAt ? sampleAt(bandwidth) : { ok: true as const, sample }
    if (!at.ok) return at.reason
    const plain = plainAt(at.sample, bandwidth, options)
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
      bandwidthFrom: fixedBandwidth ? 'given' : 'shortest',
      unitsInBandwidth: { untreated: within('untreated'), treated: within('treated') },
      curve: curve.filter((one) => typeof one !== 'string'),
    },
  }
}

/** Of the plain estimate at a bandwidth; the worst bias is for |m''| ≤ 1. */
interface PlainEstimate {
  readonly estimate: number
  readonly standardError: number
  readonly degreesOfFreedom: number
  readonly unitBias: number
}

function plainAt(sample: Sample, h: BySide<number>, options: JumpOptions): PlainEstimate | string {
  const parts = plainParts(sample, h, options.kernel)
  if (typeof parts === 'string') return parts
  const neighbours = options.variance === 'neighbours' ? neighbourResidualsOf(sample) : undefined
  const made = linearEstimate(
    parts.map((part) => ({ ...part, neighbours: neighbours?.[part.name] })),
    options,
    sample.repeats,
  )
  if (typeof made === 'string') return made
  if (!(made.inference.standardError > 0)) return 'the fit leaves no residual near the line'
  const joint = options.hasLineLevels ? jointFit(parts, true) : undefined
  if (typeof joint === 'string') return joint
  const weights = joint?.weights ?? parts.map((part) => part.weights)
  return { ...made.inference, unitBias: unitBiasOf(parts, weights) }
}

function intervalFrom(plain: PlainEstimate, smoothness: number, level: number): Omit<BiasAwareInterval, 'bandwidth'> {
  const { estimate, standardError, degreesOfFreedom, unitBias } = plain
  const worstBias = smoothness * unitBias
  const ratio = worstBias / standardError
  // far out the quantile is the shift and the one-sided quantile, to every digit
  const criticalValue =
    ratio > 1e6
      ? ratio + studentQuantile(level, degreesOfFreedom)
      : foldedStudentQuantile(level, ratio, degreesOfFreedom)
  const half = criticalValue * standardError
  return {
    smoothness,
    estimate,
    standardError,
    degreesOfFreedom,
    worstBias,
    criticalValue,
    low: estimate - half,
    high: estimate + half,
  }
}
