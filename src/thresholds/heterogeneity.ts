/**
 * How much true effects differ between lines: Cochran's Q, I², and the variance τ² of true effects three ways.
 * These classical measures use each line's variance alone; covariances between lines enter the Wald test, the
 * contrasts and the targets. estimate, variance: by line, two or more, finite, variances positive.
 */
import { rootBetween } from '../math/index.js'

export interface TauSquared {
  /** DerSimonian & Laird 1986: by moments, from Q. */
  readonly dl: number
  /** Restricted maximum likelihood (Raudenbush 2009; from memory). */
  readonly reml: number
  /** Paule & Mandel 1982: the value at which the generalised Q equals L - 1. */
  readonly pm: number
}

export interface Heterogeneity {
  readonly q: number
  /** Share of the variation between estimates beyond their own error, in percent: (Q - (L - 1))/Q, not below 0. */
  readonly iSquared: number
  /** In squared outcome units, none below 0. */
  readonly tauSquared: TauSquared
}

export function heterogeneityOf(estimate: Float64Array, variance: Float64Array): Heterogeneity {
  const q = weightedAt(0, estimate, variance).spread
  const excess = q - (estimate.length - 1)
  return {
    q,
    iSquared: excess > 0 ? (100 * excess) / q : 0,
    tauSquared: {
      dl: tauSquaredByMoments(excess, variance),
      reml: tauSquaredByRestrictedLikelihood(estimate, variance),
      pm: tauSquaredByGeneralisedQ(estimate, variance),
    },
  }
}

export interface WeightedMean {
  readonly mean: number
  /** Σ w */
  readonly weight: number
  /** Σ w² */
  readonly squaredWeight: number
  /** Σ w (y - mean)² */
  readonly spread: number
  /** Σ w² (y - mean)² */
  readonly squaredSpread: number
  /** Σ ln w */
  readonly logWeight: number
}

/** The weighted mean and its sums, with weights w = 1/(v + τ²). */
export function weightedAt(tauSquared: number, estimate: Float64Array, variance: Float64Array): WeightedMean {
  const count = estimate.length
  const origin = estimate[0]
  let weight = 0
  let squaredWeight = 0
  let logWeight = 0
  let weighted = 0
  for (let a = 0; a < count; a++) {
    const w = 1 / (variance[a] + tauSquared)
    weight += w
    squaredWeight += w * w
    logWeight += Math.log(w)
    weighted += w * (estimate[a] - origin)
  }
  const mean = origin + weighted / weight
  let spread = 0
  let squaredSpread = 0
  for (let a = 0; a < count; a++) {
    const w = 1 / (variance[a] + tauSquared)
    const square = w * (estimate[a] - mean) ** 2
    spread += square
    squaredSpread += w * square
  }
  return { mean, weight, squaredWeight, spread, squaredSpread, logWeight }
}

/** excess: Q - (L - 1). */
function tauSquaredByMoments(excess: number, variance: Float64Array): number {
  let weight = 0
  let squaredWeight = 0
  for (let a = 0; a < variance.length; a++) {
    weight += 1 / variance[a]
    squaredWeight += 1 / variance[a] ** 2
  }
  return Math.max(0, excess / (weight - squaredWeight / weight))
}

/** The generalised Q falls in τ², and is below L - 1 at the squared range of the estimates. */
function tauSquaredByGeneralisedQ(estimate: Float64Array, variance: Float64Array): number {
  const expected = estimate.length - 1
  const excess = (tauSquared: number) => weightedAt(tauSquared, estimate, variance).spread - expected
  if (!(excess(0) > 0)) return 0
  return rootBetween(excess, 0, rangeOf(estimate) ** 2, 0)
}

/** Points between 0 and the bound at which the slope of the restricted likelihood is looked at, to find all its rises. */
const GRID = 48

/**
 * The τ² of highest restricted likelihood. Its slope can change sign more than once, so every change from rise to fall on
 * a geometric grid is polished and the best kept, with 0 among the candidates where the likelihood falls from there.
 * Beyond the larger of the largest variance and three quarters of the squared range it only falls.
 */
function tauSquaredByRestrictedLikelihood(estimate: Float64Array, variance: Float64Array): number {
  const slope = (tauSquared: number): number => {
    const at = weightedAt(tauSquared, estimate, variance)
    return at.squaredSpread - (at.weight - at.squaredWeight / at.weight)
  }
  const likelihood = (tauSquared: number): number => {
    const at = weightedAt(tauSquared, estimate, variance)
    return at.logWeight - Math.log(at.weight) - at.spread
  }
  const bound = 1.01 * Math.max(largestOf(variance), 0.75 * rangeOf(estimate) ** 2)
  const first = Math.min(smallestOf(variance), bound) * 1e-3
  let best = 0
  let bestLikelihood = likelihood(0)
  let low = 0
  let lowSlope = slope(0)
  for (let k = 0; k <= GRID; k++) {
    const high = first * (bound / first) ** (k / GRID)
    const highSlope = slope(high)
    if (lowSlope > 0 && !(highSlope > 0)) {
      const candidate = rootBetween(slope, low, high, 0)
      const candidateLikelihood = likelihood(candidate)
      if (candidateLikelihood > bestLikelihood) {
        best = candidate
        bestLikelihood = candidateLikelihood
      }
    }
    low = high
    lowSlope = highSlope
  }
  return best
}

function rangeOf(values: Float64Array): number {
  return largestOf(values) - smallestOf(values)
}

function largestOf(values: Float64Array): number {
  return values.reduce((largest, value) => Math.max(largest, value))
}

function smallestOf(values: Float64Array): number {
  return values.reduce((smallest, value) => Math.min(smallest, value))
}
