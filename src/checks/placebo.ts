/** A real effect among the effects found where nothing changes (METHODS section 11). */

/** An estimate with what its own standard error says of it. */
export interface EffectFound {
  readonly estimate: number
  /** Above 0. */
  readonly standardError: number
  /** Two-sided, of no effect. */
  readonly p: number
}

export interface PlaceRank {
  /** 1 where the real effect is the largest; a tie counts against it. */
  readonly rank: number
  /** (1 + number of placebo effects at least as large) / (number of placebo effects + 1). */
  readonly p: number
}

export interface PlaceboRank {
  /** Placebo effects and the real one. */
  readonly of: number
  /** By |t|; effects whose t has fewer degrees of freedom are put on one scale by their p. */
  readonly byT: PlaceRank
  readonly byEstimate: PlaceRank
  /** The smallest p that so few placebo effects can give. */
  readonly smallestP: number
  /** Placebo effects whose own p is at most 1 − level. */
  readonly falseAlarms: number
  /** Chance of so many or more, were each at 1 − level. */
  readonly falseAlarmsP: number
}

/** Fewer placebo effects than this say nothing (common practice, no source). */
export const fewestPlacebos = 5

/**
 * Ranks by size, not by sign: which side of a placebo line counts as treated is arbitrary.
 * Source: p of a rank with the real one counted in, (1 + b)/(1 + K): Davison & Hinkley 1997, Bootstrap Methods, section 4.2.
 * Throws RangeError where an effect is not finite, a standard error not above 0, a p or the level not within 0 and 1.
 */
export function rankAmongPlacebos(real: EffectFound, placebos: readonly EffectFound[], level: number): PlaceboRank {
  if (!(level > 0 && level < 1)) throw new RangeError(`level must lie between 0 and 1: got ${level}`)
  for (const { estimate, standardError, p } of [real, ...placebos]) {
    if (!(Math.abs(estimate) < Infinity)) throw new RangeError(`an effect must be finite: got ${estimate}`)
    if (!(standardError > 0 && standardError < Infinity))
      throw new RangeError(`a standard error must be above 0: got ${standardError}`)
    if (!(p >= 0 && p <= 1)) throw new RangeError(`a p must lie between 0 and 1: got ${p}`)
  }
  const of = placebos.length + 1
  const size = ({ estimate, standardError }: EffectFound) => Math.abs(estimate) / standardError
  const rankOf = (isAsLarge: (placebo: EffectFound) => boolean): PlaceRank => {
    const rank = 1 + placebos.filter(isAsLarge).length
    return { rank, p: rank / of }
  }
  const alpha = 1 - level
  const falseAlarms = placebos.filter(({ p }) => p <= alpha).length
  return {
    of,
    byT: rankOf((placebo) => placebo.p < real.p || (placebo.p === real.p && size(placebo) >= size(real))),
    byEstimate: rankOf(({ estimate }) => Math.abs(estimate) >= Math.abs(real.estimate)),
    smallestP: 1 / of,
    falseAlarms,
    falseAlarmsP: binomialUpper(falseAlarms, placebos.length, alpha),
  }
}

export interface PlaceboVerdict {
  readonly verdict: 'fine' | 'doubt' | 'not possible'
  readonly says: string
}

/**
 * Doubt where more placebo effects than chance explains look real by their own standard errors, or where the study
 * claims an effect at its level and borders that change nothing give as large a t: a rank p above 1 − level, or, with too
 * few placebo effects for such a p, any rank but the first.
 */
export function judgePlacebos(ranked: PlaceboRank, real: EffectFound, level: number): PlaceboVerdict {
  const { of, byT, byEstimate, smallestP, falseAlarms, falseAlarmsP } = ranked
  const count = of - 1
  const alpha = 1 - level
  const number = (value: number) => String(Number(value.toPrecision(2)))
  if (count < fewestPlacebos) {
    const lines = count === 1 ? '1 border that changes nothing has' : `${count} borders that change nothing have`
    return {
      verdict: 'not possible',
      says: `${lines} an estimate, under the ${fewestPlacebos} it takes; the smallest p they could give is ${number(smallestP)}`,
    }
  }
  const ranks =
    `among ${count} borders that change nothing the real effect ranks ${byT.rank} of ${of} by |t| (p = ${number(byT.p)}) ` +
    `and ${byEstimate.rank} of ${of} by |estimate| (p = ${number(byEstimate.p)})`
  const least = smallestP > alpha ? `; the smallest p so few lines could give is ${number(smallestP)}` : ''
  const alarms =
    `${falseAlarms} of their ${count} intervals leave out 0, ${number(alpha * count)} to be expected` +
    (falseAlarmsP <= alpha ? `, so intervals here are too narrow or zones differ (p = ${number(falseAlarmsP)})` : '')
  const claimsEffect = real.p <= alpha
  const standsOut = byT.p <= Math.max(alpha, smallestP)
  const isDoubt = falseAlarmsP <= alpha || (claimsEffect && !standsOut)
  const claims = claimsEffect ? '' : '; the study claims no effect at its level'
  return { verdict: isDoubt ? 'doubt' : 'fine', says: `${ranks}${least}; ${alarms}${claims}` }
}

/** Chance of `least` or more successes in `trials`, each with chance `p` in (0, 1): terms on the log scale. */
function binomialUpper(least: number, trials: number, p: number): number {
  let logTerm = trials * Math.log1p(-p)
  let upper = 0
  for (let k = 0; k <= trials; k++) {
    if (k >= least) upper += Math.exp(logTerm)
    logTerm += Math.log((trials - k) / (k + 1)) + Math.log(p) - Math.log1p(-p)
  }
  return Math.min(1, upper)
}
