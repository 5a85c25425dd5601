/**
 * Are all lines' effects equal, when each variance was itself estimated? Welch's test of k means.
 * Source: Welch 1951, Biometrika 38. Over many lines the chi-square test adds up the small excess that each line's own variance
 * leaves in its t²; this one allows for it by their degrees of freedom.
 */
import { fisherUpper } from '../math/index.js'

export interface WelchTest {
  /** F. */
  readonly statistic: number
  readonly df: readonly [number, number]
  readonly p: number
}

/** Of independent estimates, two or more; variances above 0; degrees of freedom above 0, Infinity where a variance is known. */
export function welchOfEquality(
  estimate: Float64Array,
  variance: Float64Array,
  degreesOfFreedom: Float64Array,
): WelchTest {
  const count = estimate.length
  if (count < 2 || variance.length !== count || degreesOfFreedom.length !== count)
    throw new RangeError(
      `${count} estimates, ${variance.length} variances, ${degreesOfFreedom.length} degrees of freedom`,
    )
  const all = variance.reduce((sum, value) => sum + 1 / value, 0)
  const mean = estimate.reduce((sum, value, a) => sum + value / variance[a], 0) / all
  const between = estimate.reduce((sum, value, a) => sum + (value - mean) ** 2 / variance[a], 0) / (count - 1)
  const unsure = variance.reduce((sum, value, a) => sum + (1 - 1 / value / all) ** 2 / degreesOfFreedom[a], 0)
  const statistic = between / (1 + (2 * (count - 2) * unsure) / (count * count - 1))
  const df = [count - 1, Math.min((count * count - 1) / (3 * unsure), 1e7)] as const
  return { statistic, df, p: fisherUpper(statistic, ...df) }
}
