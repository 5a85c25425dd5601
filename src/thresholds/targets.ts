/** One number from many lines: a stated weighted mean of their effects (METHODS section 9; Bertanha 2020). */
import { normalQuantile, normalUpper } from '../math/index.js'
import { checkLevel, type LineEffects, reasonAgainst, variancesOf } from './effects.js'

export type TargetKind =
  /** units: number near each line, by line. */
  | { readonly kind: 'units'; readonly units: Float64Array }
  | { readonly kind: 'equal' }
  /** In proportion to 1/variance of each line's estimate. */
  | { readonly kind: 'precision' }
  /** shares: what the user gives for each line, not negative; need not sum to 1. */
  | { readonly kind: 'shares'; readonly name: string; readonly shares: Float64Array }

export type TargetEffect =
  | {
      readonly ok: true
      /** 'units', 'equal', 'precision', or the name of the shares. */
      readonly kind: string
      readonly estimate: number
      readonly standardError: number
      readonly low: number
      readonly high: number
      readonly p: number
      /** By line; they sum to 1. */
      readonly weights: Float64Array
    }
  | { readonly ok: false; readonly reason: string }

/** Σ ω_c τ̂_c with variance ω'Ω̂ω, the weights ω taken as given; two-sided p and interval by the normal reference. */
export function targetEffect(effects: LineEffects, target: TargetKind, level: number): TargetEffect {
  checkLevel(level)
  const unfit = reasonAgainst(effects)
  if (unfit !== undefined) return { ok: false, reason: unfit }
  const raw = rawWeights(effects, target)
  const kind = target.kind === 'shares' ? target.name : target.kind
  const count = effects.ids.length
  if (raw.length !== count) throw new RangeError(`${count} lines, ${raw.length} weights (${kind})`)
  let total = 0
  for (let a = 0; a < count; a++) {
    if (!(raw[a] >= 0 && raw[a] < Number.POSITIVE_INFINITY)) {
      const found = Number.isNaN(raw[a]) ? 'missing' : String(raw[a])
      return { ok: false, reason: `the weight (${kind}) of line ${effects.ids[a]} is ${found}` }
    }
    total += raw[a]
  }
  if (!(total > 0)) return { ok: false, reason: `the weights (${kind}) of the lines sum to zero` }
  const weights = raw.map((weight) => weight / total)
  let estimate = 0
  for (let a = 0; a < count; a++) estimate += weights[a] * effects.estimate[a]
  const variance = varianceOfSum(effects, weights)
  if (!(variance > 0)) return { ok: false, reason: 'the weighted mean of the lines has no variance' }
  const standardError = Math.sqrt(variance)
  const reach = normalQuantile((1 + level) / 2) * standardError
  const p = Math.min(1, 2 * normalUpper(Math.abs(estimate) / standardError))
  return { ok: true, kind, estimate, standardError, low: estimate - reach, high: estimate + reach, p, weights }
}

function rawWeights(effects: LineEffects, target: TargetKind): Float64Array {
  switch (target.kind) {
    case 'units':
      return target.units
    case 'equal':
      return new Float64Array(effects.ids.length).fill(1)
    case 'precision':
      return variancesOf(effects).map((variance) => 1 / variance)
    case 'shares':
      return target.shares
  }
}

/** ω'Ω̂ω */
function varianceOfSum(effects: LineEffects, weights: Float64Array): number {
  const count = weights.length
  let variance = 0
  for (let a = 0; a < count; a++) {
    variance += weights[a] ** 2 * effects.covariance[a * count + a]
    if (effects.isDiagonal) continue
    for (let b = 0; b < a; b++) variance += 2 * weights[a] * weights[b] * effects.covariance[a * count + b]
  }
  return variance
}
