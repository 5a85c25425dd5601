/** The mean of true effects, what to expect at a new line, and each line's effect drawn towards the mean (METHODS section 9). */
import { normalQuantile, studentQuantile } from '../math/index.js'
import { weightedAt } from './heterogeneity.js'

export interface Interval {
  readonly low: number
  readonly high: number
}

export interface RandomEffectsMean extends Interval {
  readonly estimate: number
  readonly standardError: number
  /** For the effect at a new line like these. */
  readonly prediction: Interval
}

/**
 * The mean with weights 1/(v + τ²) and the standard error of Knapp & Hartung 2003 as published (not held above the
 * classical one): sqrt(Σ w (y - mean)² / ((L - 1) Σ w)), with t on L - 1 degrees of freedom.
 * The prediction interval uses the same t and sqrt(τ² + standard error²).
 * estimate, variance: by line, two or more; tauSquared >= 0.
 */
export function randomEffectsMean(
  estimate: Float64Array,
  variance: Float64Array,
  tauSquared: number,
  level: number,
): RandomEffectsMean {
  const df = estimate.length - 1
  const { mean, weight, spread } = weightedAt(tauSquared, estimate, variance)
  const standardError = Math.sqrt(spread / (df * weight))
  const quantile = studentQuantile((1 + level) / 2, df)
  const predictive = quantile * Math.sqrt(tauSquared + standardError ** 2)
  return {
    estimate: mean,
    standardError,
    low: mean - quantile * standardError,
    high: mean + quantile * standardError,
    prediction: { low: mean - predictive, high: mean + predictive },
  }
}

/**
 * Empirical-Bayes effect of each line: the share τ²/(τ² + v) of its own estimate and the rest of the mean. Its variance is
 * τ²v/(τ² + v) for the line, plus the share of the mean squared times the mean's variance (Morris 1983; from memory);
 * normal reference, τ² taken as known.
 */
export function shrunkenEffects(
  estimate: Float64Array,
  variance: Float64Array,
  tauSquared: number,
  mean: { readonly estimate: number; readonly standardError: number },
  level: number,
): (Interval & { readonly estimate: number })[] {
  const quantile = normalQuantile((1 + level) / 2)
  return Array.from(estimate, (own, a) => {
    const shareOfMean = variance[a] / (tauSquared + variance[a])
    const shrunken = own + shareOfMean * (mean.estimate - own)
    const reach = quantile * Math.sqrt(tauSquared * shareOfMean + (shareOfMean * mean.standardError) ** 2)
    return { estimate: shrunken, low: shrunken - reach, high: shrunken + reach }
  })
}
