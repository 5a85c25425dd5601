/**
 * Partial take-up: the jump of the outcome over that of take-up, at the same bandwidths.
 * Source: Feir, Lemieux & Marmer 2016, J. Business & Economic Statistics; METHODS section 7.
 * τ = τ_y/τ_d with influence (ψ_y − τ ψ_d)/τ_d; numerator and denominator are corrected for bias before they are divided. The
 * Anderson–Rubin set needs no first stage: {t : |τ_y − t τ_d| ≤ z·se(τ_y − t τ_d)}, from the corrected jumps.
 */
import { normalQuantile, studentQuantile } from '../math/index.js'
import type { JumpFit } from './estimate.js'
import { type Inference, infer } from './inference.js'
import { covarianceMatrix, type Influence, influenceByKey, varianceOf } from './influence.js'
import { negativeVariance } from './spatial.js'
import type { SpatialPlaces } from './spatialPairs.js'

export interface TakeUpOptions {
  readonly level: number
  readonly spatial?: SpatialPlaces
}

export interface TakeUpRatio {
  /** Effects per unit of take-up. */
  readonly plain: Inference
  readonly corrected: Inference
  /** Of the corrected ratio. */
  readonly influence: Influence
  /** Corrected jump of take-up. */
  readonly firstStage: Inference
  /** (jump/standard error)²; Infinity where all take up what they are assigned to. */
  readonly f: number
  /** Ascending; ends are infinite where the set is unbounded; none where it is empty. */
  readonly andersonRubin: readonly (readonly [number, number])[]
}

/**
 * The two jumps must come from the same units at the same bandwidths. A reason where take-up does not jump at all, or
 * where a spatial or two-way clustered variance of the ratio is negative.
 */
export function takeUpRatio(outcome: JumpFit, takeUp: JumpFit, options: TakeUpOptions): TakeUpRatio | string {
  const { level, spatial } = options
  const plain = ratioOf(outcome.plain, outcome.plainInfluence, takeUp.plain, takeUp.plainInfluence, options)
  const corrected = ratioOf(outcome.corrected, outcome.influence, takeUp.corrected, takeUp.influence, options)
  if (typeof plain === 'string') return plain
  if (typeof corrected === 'string') return corrected
  const { matrix } = covarianceMatrix([outcome.influence, takeUp.influence], spatial)
  const { degreesOfFreedom } = outcome.corrected
  const tail = 1 - (1 - level) / 2
  const quantile =
    degreesOfFreedom === Number.POSITIVE_INFINITY ? normalQuantile(tail) : studentQuantile(tail, degreesOfFreedom)
  return {
    plain: plain.inference,
    corrected: corrected.inference,
    influence: corrected.influence,
    firstStage: takeUp.corrected,
    f: (takeUp.corrected.estimate / takeUp.corrected.standardError) ** 2,
    andersonRubin: andersonRubinSet(
      outcome.corrected.estimate,
      takeUp.corrected.estimate,
      { yy: matrix[0], yd: matrix[1], dd: matrix[3] },
      quantile,
    ),
  }
}

function ratioOf(
  y: Inference,
  psiY: Influence,
  d: Inference,
  psiD: Influence,
  { level, spatial }: TakeUpOptions,
): { readonly inference: Inference; readonly influence: Influence } | string {
  const ratio = y.estimate / d.estimate
  if (!Number.isFinite(ratio)) return 'take-up does not jump at all'
  const influence = combined(psiY, 1 / d.estimate, psiD, -ratio / d.estimate)
  const variance = varianceOf(influence, spatial)
  const scale = (y.standardError / d.estimate) ** 2 + ((ratio * d.standardError) / d.estimate) ** 2
  // an outcome that is take-up times a number leaves a variance of rounding, of either sign
  if (!(variance >= -1e-12 * scale)) {
    return spatial ? negativeVariance(spatial) : 'the variance of the ratio, clustered two ways, is negative'
  }
  return { inference: infer(ratio, Math.max(0, variance), y.degreesOfFreedom, level), influence }
}

/** byY ψ_y + byD ψ_d; where clusters cross, of each kind too. */
function combined(y: Influence, byY: number, d: Influence, byD: number): Influence {
  const sum = influenceByKey([y.key, d.key], [y.psi.map((psi) => byY * psi), d.psi.map((psi) => byD * psi)])
  if (!y.crossed || !d.crossed) return sum
  const first = combined(y.crossed.first, byY, d.crossed.first, byD)
  const second = combined(y.crossed.second, byY, d.crossed.second, byD)
  return { ...sum, crossed: { first, second } }
}

/**
 * Where (τ_y − tτ_d)² − z²(V_yy − 2tV_yd + t²V_dd) = at² + 2bt + c ≤ 0. The matrix has no negative variance, so the ratio itself
 * is in the set wherever take-up jumps; an outcome that is take-up times a number leaves that point alone, or all numbers.
 */
export function andersonRubinSet(
  jumpY: number,
  jumpD: number,
  { yy, yd, dd }: { readonly yy: number; readonly yd: number; readonly dd: number },
  quantile: number,
): (readonly [number, number])[] {
  const z2 = quantile * quantile
  const a = jumpD * jumpD - z2 * dd
  const b = z2 * yd - jumpY * jumpD
  const c = jumpY * jumpY - z2 * yy
  const [low, high] = [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY]
  if (a === 0) {
    if (b === 0) return c <= 0 ? [[low, high]] : []
    return b > 0 ? [[low, -c / (2 * b)]] : [[-c / (2 * b), high]]
  }
  // b² − ac without its squares of jumps, which cancel
  const plus = [jumpY * jumpY * dd, jumpD * jumpD * yy, z2 * yd * yd]
  const minus = [2 * jumpY * jumpD * yd, z2 * yy * dd]
  const sum = plus[0] + plus[1] + plus[2] - minus[0] - minus[1]
  const rounding = 1e-13 * (plus[0] + plus[1] + plus[2] + Math.abs(minus[0]) + minus[1])
  const isDouble = Math.abs(sum) <= rounding
  if (a < 0 && (isDouble || sum < 0)) return [[low, high]]
  if (isDouble) return [[-b / a, -b / a]]
  if (sum < 0) return []
  // the root of larger size first, so that nothing cancels
  const q = -(b + (b >= 0 ? 1 : -1) * Math.sqrt(z2 * sum))
  const roots = [q / a, c / q]
  const [first, last] = [Math.min(...roots), Math.max(...roots)]
  return a > 0
    ? [[first, last]]
    : [
        [low, first],
        [last, high],
      ]
}
