/**
 * Do effects change with the cutoff, or with another attribute of the lines? A straight line through the lines' effects
 * with a variance of true effects around it.
 * Source: Raudenbush 2009, in Cooper, Hedges & Valentine (restricted likelihood of the mixed-effects model; from memory).
 * Classical weights 1/(v + τ²) and standard errors, normal reference; covariances between lines are not used.
 */
import { normalQuantile, rootBetween, studentTwoSidedP } from '../math/index.js'
import { type LineEffects, variancesOf } from './effects.js'

export interface EffectSlope {
  /** Lines with the attribute. */
  readonly lines: number
  readonly intercept: number
  readonly estimate: number
  readonly standardError: number
  readonly low: number
  readonly high: number
  readonly p: number
  /** Of true effects around the line. */
  readonly tauSquared: number
}

export type SlopeOutcome =
  | { readonly ok: true; readonly slope: EffectSlope }
  | { readonly ok: false; readonly reason: string }

const gridPoints = 48

/** `attribute`: by line; NaN leaves a line out. */
export function effectSlope(effects: LineEffects, attribute: Float64Array, level: number): SlopeOutcome {
  const kept = effects.ids.map((_, i) => i).filter((i) => Number.isFinite(attribute[i]))
  const distinct = new Set(kept.map((i) => attribute[i])).size
  if (kept.length < 3 || distinct < 2)
    return { ok: false, reason: 'fewer than three lines, or all alike in the attribute' }
  const all = variancesOf(effects)
  const y = kept.map((i) => effects.estimate[i])
  const v = kept.map((i) => all[i])
  const x = kept.map((i) => attribute[i])
  const tauSquared = restrictedTau(y, v, x)
  const { intercept, slope, slopeVariance } = fitAt(y, v, x, tauSquared)
  const standardError = Math.sqrt(slopeVariance)
  const reach = normalQuantile((1 + level) / 2) * standardError
  return {
    ok: true,
    slope: {
      lines: kept.length,
      intercept,
      estimate: slope,
      standardError,
      low: slope - reach,
      high: slope + reach,
      p: studentTwoSidedP(slope / standardError, Number.POSITIVE_INFINITY),
      tauSquared,
    },
  }
}

function fitAt(y: readonly number[], v: readonly number[], x: readonly number[], tauSquared: number) {
  const w = v.map((value) => 1 / (value + tauSquared))
  const weight = sum(w)
  const meanX = sum(x.map((value, i) => w[i] * value)) / weight
  const meanY = sum(y.map((value, i) => w[i] * value)) / weight
  const xx = sum(x.map((value, i) => w[i] * (value - meanX) ** 2))
  const slope = sum(x.map((value, i) => w[i] * (value - meanX) * (y[i] - meanY))) / xx
  const intercept = meanY - slope * meanX
  return { w, weight, meanX, xx, slope, intercept, slopeVariance: 1 / xx }
}

/** Twice the slope of the restricted log likelihood in τ²: Σ w² r² − tr P. */
function likelihoodSlope(y: readonly number[], v: readonly number[], x: readonly number[], tauSquared: number): number {
  const { w, weight, meanX, xx, slope, intercept } = fitAt(y, v, x, tauSquared)
  const fitted = sum(y.map((value, i) => (w[i] * (value - intercept - slope * x[i])) ** 2))
  const trace =
    weight -
    sum(w.map((value) => value * value)) / weight -
    sum(w.map((value, i) => (value * (x[i] - meanX)) ** 2)) / xx
  return fitted - trace
}

/** The last change from rise to fall on a geometric grid; 0 where the likelihood falls from there on. */
function restrictedTau(y: readonly number[], v: readonly number[], x: readonly number[]): number {
  const slopeAt = (tauSquared: number) => likelihoodSlope(y, v, x, tauSquared)
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
