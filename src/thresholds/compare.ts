/** Lines compared by their effects: equal or not, how much they differ, and which differ (METHODS section 9). */
import type { Random } from '../math/index.js'
import { contrastsOf } from './contrasts.js'
import { checkLevel, type LineEffects, reasonAgainst, variancesOf } from './effects.js'
import { heterogeneityOf } from './heterogeneity.js'
import { meanWithoutEachLine } from './leaveOneOut.js'
import { type Interval, randomEffectsMean, shrunkenEffects } from './randomEffects.js'
import { waldOfEquality } from './wald.js'
import { welchOfEquality } from './welch.js'

/** The comparison under the names that results.json gives it. */
export interface ComparisonResult {
  readonly wald: { readonly statistic: number; readonly df: number; readonly p: number }
  /** Of lines that share no unit or cluster. */
  readonly welch?: { readonly statistic: number; readonly df: readonly [number, number]; readonly p: number }
  /** Cochran's Q. */
  readonly q: number
  /** Percent. */
  readonly i_squared: number
  readonly tau_squared: { readonly dl: number; readonly reml: number; readonly pm: number }
  /** With the restricted-likelihood τ² and the Knapp–Hartung standard error. */
  readonly random_effects: { readonly estimate: number; readonly standard_error: number } & Interval
  /** The same of the other lines, τ² held at that of all; empty with fewer than three lines. */
  readonly random_effects_without: readonly ({
    readonly line: string
    readonly estimate: number
    readonly standard_error: number
  } & Interval)[]
  readonly prediction: Interval
  readonly shrunken: readonly ({ readonly line: string; readonly estimate: number } & Interval)[]
  /** Ascending in p, at most 1,000; intervals are simultaneous over all `contrasts_of`. */
  readonly contrasts: readonly ({
    readonly lines: readonly [string, string]
    readonly estimate: number
    readonly standard_error: number
    readonly p: number
    readonly p_holm: number
    readonly p_bh: number
  } & Interval)[]
  readonly contrasts_of: number
}

export interface CompareOptions {
  /** Of all intervals, between 0 and 1. */
  readonly level: number
  readonly random: Random
  /** For the simultaneous intervals; 20,000 by default. */
  readonly draws?: number
}

export type CompareOutcome =
  | { readonly ok: true; readonly comparison: ComparisonResult }
  | { readonly ok: false; readonly reason: string }

/** Compares two lines or more; fewer, or a line without an estimate or standard error, give a reason. */
export function compareLines(effects: LineEffects, options: CompareOptions): CompareOutcome {
  const { level, random, draws = 20_000 } = options
  checkLevel(level)
  if (!(Number.isInteger(draws) && draws > 0))
    throw new RangeError(`the number of draws must be positive, not ${draws}`)
  const unfit = reasonAgainst(effects)
  if (unfit !== undefined) return { ok: false, reason: unfit }
  if (effects.ids.length === 1) return { ok: false, reason: 'one line only' }
  const { ids, estimate } = effects
  const variance = variancesOf(effects)
  const { q, iSquared, tauSquared } = heterogeneityOf(estimate, variance)
  const mean = randomEffectsMean(estimate, variance, tauSquared.reml, level)
  const shrunken = shrunkenEffects(estimate, variance, tauSquared.reml, mean, level)
  const contrasts = contrastsOf(effects, level, random, draws)
  return {
    ok: true,
    comparison: {
      wald: waldOfEquality(effects),
      ...(effects.isDiagonal && effects.degreesOfFreedom
        ? { welch: welchOfEquality(estimate, variance, effects.degreesOfFreedom) }
        : {}),
      q,
      i_squared: iSquared,
      tau_squared: tauSquared,
      random_effects: {
        estimate: mean.estimate,
        standard_error: mean.standardError,
        low: mean.low,
        high: mean.high,
      },
      random_effects_without: meanWithoutEachLine(effects, tauSquared.reml, level).map(
        ({ standardError, ...without }) => ({ ...without, standard_error: standardError }),
      ),
      prediction: mean.prediction,
      shrunken: shrunken.map((effect, a) => ({ line: ids[a], ...effect })),
      contrasts: contrasts.listed.map(({ lines, standardError, pHolm, pBh, estimate, low, high, p }) => ({
        lines: [ids[lines[0]], ids[lines[1]]],
        estimate,
        standard_error: standardError,
        low,
        high,
        p,
        p_holm: pHolm,
        p_bh: pBh,
      })),
      contrasts_of: contrasts.of,
    },
  }
}
