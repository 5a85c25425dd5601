/** Smallest detectable effects and units needed, from pilot records or from assumptions alone (METHODS section 12). */
import {
  type Assumptions,
  boundaryConstant,
  detectableInStandardErrors,
  plannedStandardError,
  powerAt,
  timesTheUnits,
} from '../checks/index.js'
import type { Checked } from '../problem.js'
import type { Plan, PlanRow } from '../results.js'
import type { PlanAlone, PlanAssumptions, PlanPart, Study } from '../study/index.js'
import { entriesOf } from './entries.js'
import { estimateMain, hasReason, type LineEstimate, type OrReason } from './estimating.js'
import type { AnalysisInputs, Progress } from './inputs.js'
import { placeStudy } from './placing.js'
import { sharesOfLines } from './shares.js'

/** The power curve is drawn to this many smallest detectable effects, in equal steps. */
const curveTo = 2
const curveSteps = 16

/** From pilot records: standard errors are those of the corrected estimates at the study's own options. */
export function planFromRecords(study: Study, inputs: AnalysisInputs, progress?: Progress): Checked<Plan> {
  const placed = placeStudy(study, inputs, progress)
  if (!placed.ok) return placed
  const { lines } = placed.value.placement
  const shares = sharesOfLines(study, inputs, placed.value.placement)
  if (!shares.ok) return shares
  const rows = study.outcomes.flatMap((outcome) => {
    const made = estimateMain(
      study,
      placed.value,
      entriesOf(study, inputs.table, placed.value, outcome),
      shares.value?.values,
    )
    const alone = made.lines.map((line, i) => rowOf(study, outcome, lines[i].label, line))
    return lines.length > 1 ? [rowOf(study, outcome, 'pooled', made.pooled), ...alone] : alone
  })
  return { ok: true, value: { title: study.title, from: 'records', ...termsOf(study), rows } }
}

/** From assumptions alone, for one line and for all of them pooled. */
export function planFromAssumptions({ title, plan, estimation }: PlanAlone): Plan {
  const { assume } = plan
  const terms = termsOf({ plan, estimation })
  const one = plannedStandardError(assumptionsOf(assume, estimation))
  const alone = plannedRow(terms, 'one line', assume.units, one)
  const all = `${assume.lines} lines pooled`
  const rows =
    assume.lines > 1
      ? [plannedRow(terms, all, assume.units * assume.lines, one / Math.sqrt(assume.lines)), alone]
      : [alone]
  return { title, from: 'assumptions', ...terms, rows }
}

/** Within a bandwidth the constant is that of the corrected estimate with b = h, a fit of the next order. */
function assumptionsOf(assume: PlanAssumptions, { kernel, order }: PlanAlone['estimation']): Assumptions {
  return {
    ...assume,
    shape: assume.score,
    residualSd: assume.sd * Math.sqrt(1 - assume.rSquared),
    constant: boundaryConstant(kernel, order + 1),
  }
}

interface Terms extends Pick<Plan, 'power' | 'level' | 'effect'> {
  readonly multiple: number
}

function termsOf({ plan, estimation }: { plan: PlanPart; estimation: Study['estimation'] }): Terms {
  const { power, effect } = plan
  const { level } = estimation
  return {
    power,
    level,
    ...(effect === undefined ? {} : { effect }),
    multiple: detectableInStandardErrors(power, 1 - level),
  }
}

function rowOf(study: Study, outcome: string, line: string, estimate: OrReason<LineEstimate>): PlanRow {
  if (hasReason(estimate)) return { outcome, line, not_planned: estimate.reason }
  const { corrected, unitsInBandwidth } = estimate.jump
  const units = unitsInBandwidth.untreated + unitsInBandwidth.treated
  if (!(corrected.standardError > 0)) return { outcome, line, not_planned: 'the standard error is 0' }
  return { outcome, ...plannedRow(termsOf(study), line, units, corrected.standardError) }
}

function plannedRow({ multiple, level, effect }: Terms, line: string, units: number, standardError: number): PlanRow {
  const detectable = multiple * standardError
  return {
    line,
    units,
    standard_error: standardError,
    smallest_detectable: detectable,
    ...(effect === undefined
      ? {}
      : {
          power_at_effect: powerAt(effect, standardError, 1 - level),
          units_needed: Math.ceil(units * timesTheUnits(effect, standardError, multiple)),
        }),
    curve: Array.from({ length: curveSteps + 1 }, (_, i) => {
      const at = (curveTo * detectable * i) / curveSteps
      return { effect: at, power: powerAt(at, standardError, 1 - level) }
    }),
  }
}
