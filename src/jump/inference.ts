/** Intervals and p-values of an estimate under its reference distribution; METHODS section 4. */
import { normalQuantile, studentQuantile, studentTwoSidedP } from '../math/index.js'

export interface Inference {
  readonly estimate: number
  readonly standardError: number
  /** Infinity under the normal reference. */
  readonly degreesOfFreedom: number
  readonly low: number
  readonly high: number
  /** Two-sided, of no effect. An estimate with standard error 0 has p = 0 unless it is 0 itself (p = 1). */
  readonly p: number
}

/** Two-sided interval of the given level from t with `degreesOfFreedom` (> 0; Infinity: normal). */
export function infer(estimate: number, variance: number, degreesOfFreedom: number, level: number): Inference {
  if (!(variance >= 0)) throw new RangeError(`variance must be 0 or more, got ${variance}`)
  const standardError = Math.sqrt(variance)
  const tail = 1 - (1 - level) / 2
  const quantile =
    degreesOfFreedom === Number.POSITIVE_INFINITY ? normalQuantile(tail) : studentQuantile(tail, degreesOfFreedom)
  const p = standardError > 0 ? studentTwoSidedP(estimate / standardError, degreesOfFreedom) : estimate === 0 ? 1 : 0
  return {
    estimate,
    standardError,
    degreesOfFreedom,
    low: estimate - quantile * standardError,
    high: estimate + quantile * standardError,
    p,
  }
}

/** ν = (Σ l_i²)²/Σ l_i⁴ (Satterthwaite 1946, equal variances). */
export function satterthwaite(weights: readonly Float64Array[]): number {
  let squares = 0
  let fourths = 0
  for (const side of weights) {
    for (const l of side) {
      const square = l * l
      squares += square
      fourths += square * square
    }
  }
  return (squares * squares) / fourths
}
