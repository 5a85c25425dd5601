/** What the ladders say, as checks: does the estimate hold when one choice is changed, and does nothing jump elsewhere? */

import type { CheckResult, Interval, Ladders, Rung } from '../results.js'
import { adjustedFor } from './adjusted.js'
import { shown } from './words.js'

type Made = Extract<Rung, { estimate: number }>
type Holm = (p: readonly number[]) => readonly number[]

const isMade = <T extends Rung>(rung: T): rung is T & Made => !('not_estimated' in rung)

/** `study`: the pooled corrected estimate; `holm`: adjusted p-values in the order given. */
export function ladderChecks(
  ladders: Ladders,
  study: Interval & { readonly estimate: number },
  level: number,
  holm: Holm,
): CheckResult[] {
  return [
    steadiness('bandwidth', 'between 0.5 and 2 times the bandwidth', ladders.bandwidth, study, level, holm),
    steadiness('donut', 'with up to a fifth of the bandwidth left out at the line', ladders.donut, study, level, holm),
    steadiness('order and kernel', 'at other orders and kernels', ladders.order_kernel, study, level, holm),
    ...(ladders.placebo_lines.length > 0 ? placeboChecks(ladders.placebo_lines, level) : []),
  ]
}

/** Fine while no estimate differs from the study's by more than their shared units allow; the other sign fails. */
function steadiness(
  check: string,
  where: string,
  rungs: readonly Rung[],
  study: Interval & { readonly estimate: number },
  level: number,
  holm: Holm,
): CheckResult {
  const made = rungs.filter(isMade)
  if (made.length === 0) return { check, verdict: 'not possible', says: `no estimate could be made ${where}` }
  const estimates = made.map(({ estimate }) => estimate)
  const lost = rungs.length - made.length
  const missing = lost > 0 ? `; ${lost} of ${rungs.length} could not be estimated` : ''
  const range = `${where} the estimate runs from ${shown(Math.min(...estimates))} to ${shown(Math.max(...estimates))}${missing}`
  const against = made.filter(
    ({ estimate, low, high }) =>
      estimate * study.estimate < 0 && (low > 0 || high < 0) && (study.low > 0 || study.high < 0),
  )
  const p = made.map(({ p_difference: own }) => own ?? 1)
  const adjusted = holm(p)
  const smallest = { p: Math.min(...p), p_holm: Math.min(...adjusted) }
  if (against.length > 0) {
    const says = `${range}: ${against.length} of ${made.length} have the other sign and exclude 0`
    return { check, ...smallest, verdict: 'fail', says }
  }
  const differ = adjusted.filter((own) => own < 1 - level).length
  const says =
    differ === 0
      ? `${range}: none differs from the study's by more than chance`
      : `${range}: ${differ} of ${made.length} differ from the study's by more than chance`
  return { check, ...smallest, verdict: differ === 0 ? 'fine' : 'doubt', says }
}

/** One row for each line that is none, p-values adjusted for their number. */
function placeboChecks(rungs: Ladders['placebo_lines'], level: number): CheckResult[] {
  const made = rungs.filter(isMade)
  const adjusted = adjustedFor(made.map(({ p }) => p))
  return rungs.map((rung): CheckResult => {
    const check = 'placebo line'
    const place = `${rung.side} side, x = ${shown(rung.at)}`
    if (!isMade(rung)) return { check, verdict: 'not possible', says: `${place}: ${rung.not_estimated}` }
    const both = adjusted[made.indexOf(rung)]
    const jumps = both.p_holm < 1 - level
    const interval = `${shown(rung.estimate)} (${shown(rung.low)} to ${shown(rung.high)})`
    return {
      check,
      statistic: rung.estimate / rung.standard_error,
      p: rung.p,
      ...both,
      verdict: jumps ? 'doubt' : 'fine',
      says: `${place}, where nothing changes: ${interval}${jumps ? ', a jump that should not be there' : ''}`,
    }
  })
}
