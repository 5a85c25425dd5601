/**
 * Do effects change with the cutoff, or with another attribute of the lines? A straight line through the lines' effects
 * with a variance of true effects around it.
 * Source: Raudenbush 2009, in Cooper, Hedges & Valentine (restricted likelihood of the mixed-effects model; from memory);
 * Knapp & Hartung 2003. Weights 1/(v + τ²). Covariances between lines enter the variance, A(Ω̂ + τ²I)A', and what is
 * expected of the squared residuals, but not the weights: an Ω̂ of few clusters is no matrix to invert (our choice). Where
 * lines share nothing, τ² is that of the restricted likelihood.
 */
import { normalQuantile, rootBetween, studentQuantile, studentTwoSidedP } from '../math/index.js'
import { type LineEffects, variancesOf } from './effects.js'
import type { Interval } from './randomEffects.js'

export interface EffectSlope extends Interval {
  /** Lines with the attribute. */
  readonly lines: number
  readonly intercept: number
  readonly estimate: number
  /** With its interval and p by the normal reference. */
  readonly standardError: number
  readonly p: number
  /** Scaled by the residuals, with t on two degrees of freedom fewer than lines. */
  readonly knappHartung: Interval & { readonly standardError: number; readonly p: number }
  /** Of true effects around the line. */
  readonly tauSquared: number
}

export type SlopeOutcome =
  | { readonly ok: true; readonly slope: EffectSlope }
  | { readonly ok: false; readonly reason: string }

const gridPoints = 48

interface Lines {
  readonly y: readonly number[]
  readonly v: readonly number[]
  readonly x: readonly number[]
  /** Covariances between lines, row-major with 0 on the diagonal; absent where they share nothing. */
  readonly shared?: Float64Array
}

/** `attribute`: by line; NaN leaves a line out. */
export function effectSlope(effects: LineEffects, attribute: Float64Array, level: number): SlopeOutcome {
  const kept = effects.ids.map((_, i) => i).filter((i) => Number.isFinite(attribute[i]))
  const distinct = new Set(kept.map((i) => attribute[i])).size
  if (kept.length < 3 || distinct < 2)
    return { ok: false, reason: 'fewer than three lines, or all alike in the attribute' }
  const all = variancesOf(effects)
  const lines: Lines = {
    y: kept.map((i) => effects.estimate[i]),
    v: kept.map((i) => all[i]),
    x: kept.map((i) => attribute[i]),
    ...(effects.isDiagonal ? {} : { shared: sharedBy(effects, kept) }),
  }
  const tauSquared = restrictedTau(lines)
  const fit = fitAt(lines, tauSquared)
  const { slope: estimate, intercept, w, xx, residual } = fit
  const freedom = kept.length - 2
  const extra = extraOf(lines, fit)
  const variance = 1 / xx + extra.slope
  const expected = freedom + extra.spread
  if (!(variance > 0 && expected > 0)) return { ok: false, reason: 'the slope has no variance' }
  const standardError = Math.sqrt(variance)
  const scaled = standardError * Math.sqrt(sum(residual.map((r, i) => w[i] * r * r)) / expected)
  const within = (error: number, degreesOfFreedom: number, quantile: number) => ({
    standardError: error,
    low: estimate - quantile * error,
    high: estimate + quantile * error,
    p: error > 0 ? studentTwoSidedP(estimate / error, degreesOfFreedom) : estimate === 0 ? 1 : 0,
  })
  return {
    ok: true,
    slope: {
      lines: kept.length,
      intercept,
      estimate,
      ...within(standardError, Number.POSITIVE_INFINITY, normalQuantile((1 + level) / 2)),
      knappHartung: within(scaled, freedom, studentQuantile((1 + level) / 2, freedom)),
      tauSquared,
    },
  }
}

function sharedBy({ ids, covariance }: LineEffects, kept: readonly number[]): Float64Array {
  const count = kept.length
  const shared = new Float64Array(count * count)
  for (let a = 0; a < count; a++) {
    for (let b = 0; b < count; b++) if (a !== b) shared[a * count + b] = covariance[kept[a] * ids.length + kept[b]]
  }
  return shared
}

type Fit = ReturnType<typeof fitAt>

function fitAt({ y, v, x }: Lines, tauSquared: number) {
  const w = v.map((value) => 1 / (value + tauSquared))
  const weight = sum(w)
  const meanX = sum(x.map((value, i) => w[i] * value)) / weight
  const meanY = sum(y.map((value, i) => w[i] * value)) / weight
  const centred = x.map((value) => value - meanX)
  const xx = sum(centred.map((value, i) => w[i] * value ** 2))
  const slope = sum(centred.map((value, i) => w[i] * value * (y[i] - meanY))) / xx
  const residual = y.map((value, i) => value - meanY - slope * centred[i])
  return { w, weight, centred, xx, slope, intercept: meanY - slope * meanX, residual }
}

/**
 * What covariances between lines add: to the variance of the slope, and to the expectations of r'Wr (`spread`) and r'W²r
 * (`squared`), r = Qy the residuals, Q = I − H with H_ab = w_b(1/Σw + x_a x_b/Σwx²): Σ over a ≠ b of (Q'W^k Q)_ab Ω_ab.
 */
function extraOf({ shared }: Lines, { w, weight, centred, xx }: Fit) {
  if (!shared) return { slope: 0, spread: 0, squared: 0 }
  const count = w.length
  const weights = Float64Array.from(w)
  const weighted = weights.map((value, i) => value * centred[i])
  // sums of Ω_ab times products of w and wx, and of w² and w²x
  let [ones, once, twice, squares, squaresTwice] = [0, 0, 0, 0, 0]
  for (let a = 0; a < count; a++) {
    let [byW, byWx] = [0, 0]
    const row = a * count
    for (let b = 0; b < count; b++) {
      byW += shared[row + b] * weights[b]
      byWx += shared[row + b] * weighted[b]
    }
    ones += weights[a] * byW
    once += weighted[a] * byW
    twice += weighted[a] * byWx
    squares += weights[a] ** 2 * byW
    squaresTwice += weights[a] * weighted[a] * byWx
  }
  const [m0, m1, m2] = [0, 1, 2].map((k) => sum(w.map((value, i) => value ** 2 * centred[i] ** k)))
  const both = (m0 * ones) / weight ** 2 + (2 * m1 * once) / (weight * xx) + (m2 * twice) / xx ** 2
  return {
    slope: twice / xx ** 2,
    spread: -ones / weight - twice / xx,
    squared: both - 2 * (squares / weight + squaresTwice / xx),
  }
}

/** Σ w² r² less its expectation; where lines share nothing, twice the slope of the restricted log likelihood in τ². */
function excessAt(lines: Lines, tauSquared: number): number {
  const fit = fitAt(lines, tauSquared)
  const { w, weight, centred, xx, residual } = fit
  const spread = sum(residual.map((r, i) => (w[i] * r) ** 2))
  const trace =
    weight - sum(w.map((value) => value * value)) / weight - sum(w.map((value, i) => (value * centred[i]) ** 2)) / xx
  return spread - trace - extraOf(lines, fit).squared
}

/** The last change from rise to fall on a geometric grid; 0 where it falls from there on. */
function restrictedTau(lines: Lines): number {
  const { y, v } = lines
  const slopeAt = (tauSquared: number) => excessAt(lines, tauSquared)
  const range = Math.max(...y) - Math.min(...y)
  const bound = 1.01 * Math.max(Math.max(...v), range * range)
  const first = Math.min(Math.min(...v), bound) * 1e-3
  let [low, before, best] = [0, slopeAt(0), 0]
  for (let k = 0; k <= gridPoints; k++) {
    const high = first * (bound / first) ** (k / gridPoints)
    const now = slopeAt(high)
    if (before > 0 && !(now > 0)) best = rootBetween(slopeAt, low, high, 0)
    low = high
    before = now
  }
  return best
}

function sum(values: readonly number[]): number {
  return values.reduce((total, value) => total + value, 0)
}
