/** The mean of the lines' effects with each line left out in turn, and the effect per unit of dose. */
import { normalQuantile, studentQuantile, studentTwoSidedP } from '../math/index.js'
import { type LineEffects, variancesOf } from './effects.js'
import { weightedAt } from './heterogeneity.js'

export interface WithoutLine {
  readonly line: string
  readonly estimate: number
  readonly standardError: number
  readonly low: number
  readonly high: number
}

/**
 * `weights`: by line, summing to 1; those of the others are scaled up. One product of the covariance and the
 * weights, O(L) where lines share nothing. A line with all the weight is left out.
 */
export function leaveOneOut(effects: LineEffects, weights: Float64Array, level: number): WithoutLine[] {
  const { ids, estimate, covariance, isDiagonal } = effects
  const count = ids.length
  if (count < 2) return []
  const quantile = normalQuantile((1 + level) / 2)
  const withAll = new Float64Array(count)
  let [mean, variance] = [0, 0]
  for (let a = 0; a < count; a++) {
    if (isDiagonal) withAll[a] = covariance[a * count + a] * weights[a]
    else for (let b = 0; b < count; b++) withAll[a] += covariance[a * count + b] * weights[b]
    mean += weights[a] * estimate[a]
    variance += weights[a] * withAll[a]
  }
  return ids.flatMap((line, a): WithoutLine[] => {
    const left = 1 - weights[a]
    if (!(left > 1e-12)) return []
    const without = (mean - weights[a] * estimate[a]) / left
    const own = weights[a] * weights[a] * covariance[a * count + a]
    const standardError = Math.sqrt(Math.max(0, variance - 2 * weights[a] * withAll[a] + own)) / left
    const reach = quantile * standardError
    return [{ line, estimate: without, standardError, low: without - reach, high: without + reach }]
  })
}

/**
 * The random-effects mean of the other lines with its Knapp–Hartung interval, τ² held at that of all lines. O(L); none with
 * fewer than three lines.
 */
export function meanWithoutEachLine(effects: LineEffects, tauSquared: number, level: number): WithoutLine[] {
  const { ids, estimate } = effects
  const freedom = ids.length - 2
  if (freedom < 1) return []
  const variance = variancesOf(effects)
  const { mean, weight, spread } = weightedAt(tauSquared, estimate, variance)
  const quantile = studentQuantile((1 + level) / 2, freedom)
  return ids.map((line, a) => {
    const own = 1 / (variance[a] + tauSquared)
    const left = weight - own
    const off = estimate[a] - mean
    const without = mean - (own * off) / left
    const others = Math.max(0, spread - (own * weight * off * off) / left)
    const standardError = Math.sqrt(others / (freedom * left))
    const reach = quantile * standardError
    return { line, estimate: without, standardError, low: without - reach, high: without + reach }
  })
}

/**
 * Effect per unit of dose over lines of unlike dose: Σ ω D τ̂ / Σ ω D², with the covariance of the lines; normal reference
 * (METHODS section 9). Undefined where no line with weight has a dose but 0.
 */
export function perUnitOfDose(
  { estimate, covariance }: LineEffects,
  weights: Float64Array,
  doses: Float64Array,
  level: number,
): (Omit<WithoutLine, 'line'> & { readonly p: number }) | undefined {
  const count = estimate.length
  let divisor = 0
  for (let a = 0; a < count; a++) divisor += weights[a] * doses[a] * doses[a]
  if (!(divisor > 0)) return undefined
  const share = Float64Array.from(doses, (dose, a) => (weights[a] * dose) / divisor)
  let [value, variance] = [0, 0]
  for (let a = 0; a < count; a++) {
    value += share[a] * estimate[a]
    for (let b = 0; b < count; b++) variance += share[a] * share[b] * covariance[a * count + b]
  }
  const standardError = Math.sqrt(variance)
  const reach = normalQuantile((1 + level) / 2) * standardError
  const p = studentTwoSidedP(value / standardError, Number.POSITIVE_INFINITY)
  return { estimate: value, standardError, low: value - reach, high: value + reach, p }
}
