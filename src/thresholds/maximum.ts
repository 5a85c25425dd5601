/** Critical values for many estimates at once: quantiles of the largest |t|. */
import { choleskyInPlace, normalQuantile, type Random } from '../math/index.js'
import { type LineEffects, variancesOf } from './effects.js'
import { correlationOf } from './wald.js'

/** Up to so many estimates the critical value is drawn; beyond, it is Šidák's. */
export const MOST_ESTIMATES_DRAWN = 2000

/**
 * The `level` quantile of the largest |t| over all estimates under N(0, corr(Ω)), from `draws` seeded draws: estimate ± this
 * times its standard error, for every one of them, holds for all at once with that probability. Šidák's bound is exact for
 * independent estimates and is taken there, and wherever it is the smaller; never below the quantile of one estimate.
 */
export function largestQuantile(effects: LineEffects, level: number, random: Random, draws: number): number {
  const count = effects.ids.length
  if (!(count > 0)) throw new RangeError('no estimate to take the largest of')
  const bound = sidakQuantile(level, count)
  if (effects.isDiagonal || count > MOST_ESTIMATES_DRAWN) return bound
  const standardErrors = variancesOf(effects).map(Math.sqrt)
  const factor = factorOfCorrelation(effects.covariance, standardErrors)
  const drawn = quantileOfDraws(level, draws, largestDraw(factor, count, random))
  return Math.max(Math.min(bound, drawn), normalQuantile((1 + level) / 2))
}

/** Draws the largest |t|. Rows of the factor begin with zeros where estimates share nothing: those are passed over. */
function largestDraw(factor: Float64Array, count: number, random: Random): () => number {
  const first = new Int32Array(count)
  for (let a = 0; a < count; a++) while (first[a] < a && factor[a * count + first[a]] === 0) first[a]++
  const normal = new Float64Array(count)
  return () => {
    let largest = 0
    for (let a = 0; a < count; a++) {
      normal[a] = random.normal()
      let value = 0
      for (let k = first[a]; k <= a; k++) value += factor[a * count + k] * normal[k]
      if (Math.abs(value) > largest) largest = Math.abs(value)
    }
    return largest
  }
}

/** The value that `level` of the draws do not exceed. */
export function quantileOfDraws(level: number, draws: number, draw: () => number): number {
  const values = new Float64Array(draws)
  for (let i = 0; i < draws; i++) values[i] = draw()
  values.sort()
  return values[Math.min(draws, Math.ceil(level * (draws + 1))) - 1]
}

/** Two-sided quantile at which `count` independent estimates all hold with probability `level` (Šidák 1967). */
export function sidakQuantile(level: number, count: number): number {
  const tail = -Math.expm1(Math.log(level) / count) / 2
  return -normalQuantile(tail)
}

/**
 * Lower Cholesky factor of the correlation matrix. A singular one gets the least ridge, a power of ten from 1e-12, that
 * lets it be factored: the draws are then wider by a share of that size, far below their own error.
 */
export function factorOfCorrelation(covariance: Float64Array, standardErrors: Float64Array): Float64Array {
  const count = standardErrors.length
  for (let ridge = 0; ridge < 1; ridge = ridge === 0 ? 1e-12 : ridge * 10) {
    const factor = correlationOf(covariance, standardErrors)
    for (let a = 0; a < count; a++) factor[a * count + a] = 1 + ridge
    if (choleskyInPlace(factor, count) > 0) return factor
  }
  throw new Error('the covariance of the estimates is not positive semidefinite')
}
