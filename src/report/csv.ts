/** lines.csv, pooled.csv, checks.csv: full doubles under the names of results.json, joined by underscores. */
import type { Estimate, Jump } from '../results.js'
import { csvField } from './escape.js'
import { isSmall } from './numbers.js'
import { estimatedLines, isEstimated, type OutcomeView, reasonText, type View } from './view.js'

export type Value = string | number | null | undefined
type Fields = readonly (readonly [column: string, value: Value])[]

export function linesCsv(view: View): string {
  return csvText(
    lineRecord(view, undefined, undefined).map(([column]) => column),
    view.outcomes.flatMap((outcome) =>
      outcome.result.lines.map((_, index) => lineRecord(view, outcome, index).map(([, value]) => value)),
    ),
  )
}

function lineRecord(view: View, outcome: OutcomeView | undefined, index: number | undefined): Fields {
  const row = index === undefined ? undefined : outcome?.result.lines[index]
  const jump = row && isEstimated<Jump & { line: string }>(row) ? row : undefined
  const line = row && view.lineOf.get(row.line)
  const { pooled, target, comparison } = outcome?.result ?? {}
  const shrunken = row && comparison?.shrunken.find((effect) => effect.line === row.line)
  const counts = [line?.units, jump?.units_in_bandwidth]
  const small = counts.some(
    (units) => isSmall(units?.untreated, view.smallestCell) || isSmall(units?.treated, view.smallestCell),
  )
  return [
    ['outcome', outcome?.result.outcome],
    ['line', row?.line],
    ['label', line?.label],
    ['cutoff', line?.cutoff],
    ['zone_untreated', line?.zones?.[0]],
    ['zone_treated', line?.zones?.[1]],
    ['piece', line?.piece],
    ['length_m', line?.length_m],
    ['units_untreated', openCount(view, line?.units.untreated)],
    ['units_treated', openCount(view, line?.units.treated)],
    ...jumpRecord(view, jump),
    ['pooled_weight', row && pooled && isEstimated(pooled) ? pooled.weights[row.line] : undefined],
    ['target_weight', row && target && isEstimated(target) ? target.weights[row.line] : undefined],
    ['shrunken_estimate', shrunken?.estimate],
    ['shrunken_low', shrunken?.low],
    ['shrunken_high', shrunken?.high],
    ['notes', jump?.notes?.map((note) => reasonText(view, note)).join('; ')],
    ['not_estimated', row && 'not_estimated' in row ? reasonText(view, row.not_estimated) : undefined],
    ['counts_withheld_under', small ? view.smallestCell : undefined],
  ]
}

function jumpRecord(view: View, jump: Jump | undefined): Fields {
  return [
    ['units_in_bandwidth_untreated', openCount(view, jump?.units_in_bandwidth.untreated)],
    ['units_in_bandwidth_treated', openCount(view, jump?.units_in_bandwidth.treated)],
    ['bandwidth_untreated', jump?.bandwidth.untreated],
    ['bandwidth_treated', jump?.bandwidth.treated],
    ['bias_bandwidth_untreated', jump?.bias_bandwidth.untreated],
    ['bias_bandwidth_treated', jump?.bias_bandwidth.treated],
    ['order', jump?.order],
    ['kernel', jump?.kernel],
    ['variance', jump?.variance],
    ['clusters', jump?.clusters],
    ['at_line_untreated', jump?.at_line.untreated],
    ['at_line_treated', jump?.at_line.treated],
    ...estimateRecord('plain', jump?.plain),
    ...estimateRecord('corrected', jump?.corrected),
    ['bias_aware_estimate', jump?.bias_aware?.estimate],
    ['bias_aware_low', jump?.bias_aware?.low],
    ['bias_aware_high', jump?.bias_aware?.high],
    ['quoted', jump?.quoted],
  ]
}

function estimateRecord(name: string, estimate: Estimate | undefined): Fields {
  return [
    [`${name}_estimate`, estimate?.estimate],
    [`${name}_standard_error`, estimate?.standard_error],
    [`${name}_degrees_of_freedom`, estimate?.degrees_of_freedom],
    [`${name}_low`, estimate?.low],
    [`${name}_high`, estimate?.high],
    [`${name}_p`, estimate?.p],
  ]
}

export function pooledCsv(view: View): string {
  return csvText(
    pooledRecord(view, undefined).map(([column]) => column),
    view.outcomes.map((outcome) => pooledRecord(view, outcome).map(([, value]) => value)),
  )
}

function pooledRecord(view: View, outcome: OutcomeView | undefined): Fields {
  const { pooled, target, comparison } = outcome?.result ?? {}
  const jump = pooled && isEstimated(pooled) ? pooled : undefined
  const aim = target && isEstimated(target) ? target : undefined
  const why = (jumpOrReason: object | undefined) =>
    jumpOrReason && 'not_estimated' in jumpOrReason ? reasonText(view, String(jumpOrReason.not_estimated)) : undefined
  return [
    ['outcome', outcome?.result.outcome],
    ['lines', outcome?.result.lines.length],
    ['lines_estimated', outcome && estimatedLines(outcome.result).length],
    ...jumpRecord(view, jump),
    ['pooled_not_estimated', why(pooled)],
    ['target_kind', aim?.kind],
    ['target_estimate', aim?.estimate],
    ['target_standard_error', aim?.standard_error],
    ['target_low', aim?.low],
    ['target_high', aim?.high],
    ['target_p', aim?.p],
    ['target_not_estimated', why(target)],
    ['wald_statistic', comparison?.wald.statistic],
    ['wald_df', comparison?.wald.df],
    ['wald_p', comparison?.wald.p],
    ['welch_f', comparison?.welch?.statistic],
    ['welch_df', comparison?.welch?.df[1]],
    ['welch_p', comparison?.welch?.p],
    ['q', comparison?.q],
    ['i_squared', comparison?.i_squared],
    ['tau_squared_dl', comparison?.tau_squared.dl],
    ['tau_squared_reml', comparison?.tau_squared.reml],
    ['tau_squared_pm', comparison?.tau_squared.pm],
    ['random_effects_estimate', comparison?.random_effects.estimate],
    ['random_effects_standard_error', comparison?.random_effects.standard_error],
    ['random_effects_low', comparison?.random_effects.low],
    ['random_effects_high', comparison?.random_effects.high],
    ['prediction_low', comparison?.prediction?.low],
    ['prediction_high', comparison?.prediction?.high],
    ['comparison_reason', outcome?.result.comparison_reason],
  ]
}

export function checksCsv(view: View): string {
  return csvText(
    ['outcome', 'check', 'line', 'statistic', 'p', 'p_holm', 'p_bh', 'verdict', 'says'],
    view.outcomes.flatMap(({ result }) =>
      result.checks.map((check) => [
        result.outcome,
        check.check,
        check.line,
        check.statistic,
        check.p,
        check.p_holm,
        check.p_bh,
        check.verdict,
        check.says,
      ]),
    ),
  )
}

/** The count, or nothing where it is withheld; the column `counts_withheld_under` says so. */
export function openCount(view: View, units: number | undefined): number | undefined {
  return isSmall(units, view.smallestCell) ? undefined : units
}

/** A head and rows of CSV, each field the shortest text that reads back as the same value. */
export function csvText(columns: readonly string[], rows: readonly (readonly Value[])[]): string {
  return `${[columns, ...rows].map((row) => row.map(csvField).join(',')).join('\n')}\n`
}
