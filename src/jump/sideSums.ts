/**
 * One side's part of a jump whose two sides share nothing: what is enough to put any two sides together.
 * Source: METHODS sections 2 to 4. τ̂ = Σ l_i y_i over both sides, so the estimate, V = Σ l_i² e_i² and the sums of
 * ν = (Σ l_i²)²/Σ l_i⁴ are each the untreated side's part and the treated side's. With b = h the corrected estimate of
 * order p is the fit of order p + 1, so the sums of the orders p and p + 1 give both.
 */
import { type Inference, infer } from './inference.js'
import type { Kernel } from './kernel.js'
import { addWeights, coefficientOf, fitLocal, functional } from './localPolynomial.js'
import type { Side } from './sample.js'
import { scaledResiduals, type Variance } from './variance.js'

export interface SideSums {
  /** Fitted mean at the line less the sample's centre: Σ a_i y_i. */
  readonly level: number
  /** Σ a_i² σ̂²_i */
  readonly variance: number
  /** Σ a_i² and Σ a_i⁴ */
  readonly squares: number
  readonly fourths: number
}

export interface SideFit extends SideSums {
  /** Coefficients of t, t², … of the fitted curve, t = |x|. */
  readonly slopes: readonly number[]
}

export interface SideChoices {
  readonly order: number
  readonly kernel: Kernel
  readonly h: number
  /** One whose influences are the units' own: hc0 to hc3 or neighbours. */
  readonly variance: Variance
}

/** Of the fit within h; undefined where there is none. `neighbours` are the side's residuals, where the variance is of them. */
export function sideSums(
  side: Side,
  { order, kernel, h, variance }: SideChoices,
  neighbours?: Float64Array,
): SideFit | undefined {
  if (side.t.length === 0) return undefined
  const fitted = fitLocal(side, order, h, kernel)
  if (!fitted.ok) return undefined
  const { fit } = fitted
  const weights = new Float64Array(fit.count)
  addWeights(weights, side, fit, functional(fit, 0), 1)
  const residuals = neighbours ?? scaledResiduals(side, fit, fit.count, variance)
  const sums = { level: 0, variance: 0, squares: 0, fourths: 0 }
  for (let start = 0; start < fit.count; start += 4096) {
    const end = Math.min(fit.count, start + 4096)
    let [level, spread, squares, fourths] = [0, 0, 0, 0]
    for (let i = start; i < end; i++) {
      const square = weights[i] * weights[i]
      level += weights[i] * side.y[i]
      spread += square * residuals[i] * residuals[i]
      squares += square
      fourths += square * square
    }
    sums.level += level
    sums.variance += spread
    sums.squares += squares
    sums.fourths += fourths
  }
  const slopes = Array.from({ length: order }, (_, power) => coefficientOf(fit, power + 1))
  return { ...sums, slopes }
}

/** The jump, treated less untreated, of two sides. */
export function jumpOfSides(
  untreated: SideSums,
  treated: SideSums,
  { reference, level }: { readonly reference: 't' | 'normal'; readonly level: number },
): Inference {
  const squares = untreated.squares + treated.squares
  const freedom =
    reference === 't' ? (squares * squares) / (untreated.fourths + treated.fourths) : Number.POSITIVE_INFINITY
  return infer(treated.level - untreated.level, untreated.variance + treated.variance, freedom, level)
}
