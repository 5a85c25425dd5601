/** About a dozen plain lines for the terminal. */
import type { CheckResult, Jump, Results } from '../results.js'
import { intervalText } from './lineTable.js'
import { count, fixed, pWords, sharedPlaces, significant } from './numbers.js'

const mostOutcomes = 4

/** Lines of text, without line ends; `folder` is the results folder as the user would type it. */
export function summaryLines(results: Results, folder: string): string[] {
  const { placement } = results
  const aside = Object.entries(placement.set_aside)
  const shown = results.outcomes.slice(0, mostOutcomes)
  return [
    results.title,
    `${count(placement.read)} rows read, ${count(placement.kept)} kept, ${count(placement.placed)} placed against ${count(results.lines.length)} ${results.lines.length === 1 ? 'line' : 'lines'}`,
    ...(aside.length > 0
      ? [`set aside: ${aside.map(([reason, units]) => `${count(units)} ${reason}`).join(', ')}`]
      : []),
    ...(results.geometry ? [geometryWords(results.geometry)] : []),
    ...shown.flatMap(outcomeLines),
    ...(results.outcomes.length > mostOutcomes
      ? [`and ${count(results.outcomes.length - mostOutcomes)} more outcomes in the report`]
      : []),
    `${results.seconds.toFixed(1)} s; report: ${folder}/report.html`,
  ]
}

/** Whether an earlier placement served, and if not, why. */
export function geometryWords({ from, reused, because }: NonNullable<Results['geometry']>): string {
  return reused ? `geometry taken from ${from}` : `geometry measured anew, not taken from ${from}: ${because}`
}

function outcomeLines(outcome: Results['outcomes'][number]): string[] {
  const { pooled, target, comparison } = outcome
  const jump: Jump | undefined = 'not_estimated' in pooled ? undefined : pooled
  const aim = 'not_estimated' in target ? undefined : target
  const places = sharedPlaces(
    [jump?.corrected.standard_error, aim?.standard_error],
    [jump?.corrected.estimate, aim?.estimate],
  )
  const estimated = outcome.lines.filter((line) => !('not_estimated' in line)).length
  const text = (estimate: { estimate: number; low: number; high: number; p: number }) =>
    `${fixed(estimate.estimate, places)} (${intervalText(estimate, places)}), ${pWords(estimate.p)}`
  const biasAwareText = (found: NonNullable<Jump['bias_aware']>, because: string | undefined) =>
    `${fixed(found.estimate, places)} (${intervalText(found, places)}), bias-aware${because === undefined ? '' : `: ${because}`}`
  return [
    outcome.outcome,
    jump
      ? `  pooled  ${jump.quoted === 'bias-aware' && jump.bias_aware ? biasAwareText(jump.bias_aware, jump.quoted_because) : text(jump.corrected)}`
      : `  pooled  not estimated: ${'not_estimated' in pooled ? pooled.not_estimated : ''}`,
    ...(aim ? [`  target  ${text(aim)}`] : []),
    ...(jump
      ? [
          `  units   ${count(jump.units_in_bandwidth.untreated)} untreated, ${count(jump.units_in_bandwidth.treated)} treated within ${[...new Set([jump.bandwidth.untreated, jump.bandwidth.treated].map(significant))].join(' / ')}`,
        ]
      : []),
    `  lines   ${count(estimated)} of ${count(outcome.lines.length)} estimated${comparison ? `; equal effects ${pWords((comparison.welch ?? comparison.wald).p)}, I² ${fixed(comparison.i_squared, 0)}%` : ''}`,
    ...(outcome.checks.length > 0 ? [`  checks  ${verdictWords(outcome.checks)}`] : []),
  ]
}

/** `21 fine, 2 in doubt (donut, heaping), 1 not possible`. */
function verdictWords(checks: readonly CheckResult[]): string {
  const of = (verdict: CheckResult['verdict']) => checks.filter((check) => check.verdict === verdict)
  const names = (found: readonly CheckResult[]) => [...new Set(found.map(({ check }) => check))].join(', ')
  const [fine, doubt, fail, impossible] = (['fine', 'doubt', 'fail', 'not possible'] as const).map(of)
  return [
    `${count(fine.length)} fine`,
    ...(doubt.length > 0 ? [`${count(doubt.length)} in doubt (${names(doubt)})`] : []),
    ...(fail.length > 0 ? [`${count(fail.length)} failed (${names(fail)})`] : []),
    ...(impossible.length > 0 ? [`${count(impossible.length)} not possible`] : []),
  ].join(', ')
}
