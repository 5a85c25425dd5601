/** What the lines say beyond their mean: each left out in turn, their slope in an attribute, the effect per unit of dose. */
import type { Line } from '../placement.js'
import type { Comparison, OutcomeResult } from '../results.js'
import { effectSlope, leaveOneOut, perUnitOfDose } from '../thresholds/index.js'
import type { MainWithEffects } from './estimating.js'

type Across = Pick<OutcomeResult, 'leave_one_out' | 'per_dose'>

/** `lines`: of the placement. */
export function acrossLines(
  { effects, target, compared }: MainWithEffects,
  lines: readonly Line[],
  level: number,
): Across {
  if (!target.ok || effects.ids.length < 2) return {}
  const without = leaveOneOut(effects, target.weights, level)
  const doses = compared.map((place) => lines[place].dose)
  const hasDoses = doses.every((dose) => dose !== undefined)
  const perDose = hasDoses && perUnitOfDose(effects, target.weights, Float64Array.from(doses as number[]), level)
  return {
    leave_one_out: without.map(({ line, estimate, standardError, low, high }) => ({
      line,
      estimate,
      standard_error: standardError,
      low,
      high,
    })),
    ...(perDose
      ? {
          per_dose: {
            estimate: perDose.estimate,
            standard_error: perDose.standardError,
            low: perDose.low,
            high: perDose.high,
            p: perDose.p,
          },
        }
      : {}),
  }
}

/** `attribute`: by line of the placement. */
export function slopeOf(
  { effects, compared }: MainWithEffects,
  attribute: { readonly name: string; readonly values: Float64Array } | undefined,
  level: number,
): Comparison['slope'] {
  if (!attribute) return undefined
  const { name, values } = attribute
  const made = effectSlope(
    effects,
    Float64Array.from(compared, (place) => values[place]),
    level,
  )
  if (!made.ok) return { attribute: name, not_estimated: made.reason }
  const { lines, intercept, estimate, standardError, low, high, p, knappHartung, tauSquared } = made.slope
  const { standardError: scaled, ...knapp } = knappHartung
  return {
    attribute: name,
    lines,
    intercept,
    estimate,
    standard_error: standardError,
    low,
    high,
    p,
    knapp_hartung: { ...knapp, standard_error: scaled },
    tau_squared: tauSquared,
  }
}
