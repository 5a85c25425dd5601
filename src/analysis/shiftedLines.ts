/** Lines shifted into either side, where nothing changes: the study's estimate made again on each. */

import { type BorderSide, eligible, measureUnits, type ShiftedBorder, shiftedBorder } from '../borders/index.js'
import type { Placement } from '../placement.js'
import { numbersOf } from '../records/index.js'
import type { CheckResult, ShiftedEffect, ShiftedLines } from '../results.js'
import type { BorderLine, Study } from '../study/index.js'
import { adjustedFor } from './adjusted.js'
import { metresPerUnit } from './border.js'
import { entriesOf } from './entries.js'
import { hasReason, type OutcomeEstimates } from './estimating.js'
import { type AnalysisInputs, positionColumns } from './inputs.js'
import type { Placed } from './placing.js'
import { pooledOverLines } from './pooledAgain.js'

export const shiftedCheck = 'shifted lines'

/** Lines are shifted by these many pooled bandwidths where no distances are given. */
const usualBandwidths = [1, 1.5, 2]

type Unadjusted = Omit<ShiftedEffect, 'p_holm' | 'p_bh'>

/**
 * One check for each side and distance. Units are those the study placed on that side, by its own rules; which polygon
 * holds a unit tells whether it lies nearer or farther. Distances in metres; absent: 1, 1.5 and 2 times the pooled
 * bandwidth of the side, to two digits. Farther than `reach` no line is drawn.
 */
export function shiftedLines(
  study: Study,
  inputs: AnalysisInputs,
  placed: Placed,
  outcome: string,
  pooled: OutcomeEstimates['pooled'],
  metres?: readonly number[],
): { readonly checks: readonly CheckResult[]; readonly exhibit?: ShiftedLines } {
  const { line } = study
  const impossible = (says: string): CheckResult => ({ check: shiftedCheck, verdict: 'not possible', says })
  if (line.kind !== 'border' || !placed.border)
    return { checks: [impossible('the lines are no borders between zones')] }
  if (line.dose !== undefined)
    return { checks: [impossible('between doses a zone may lie on either side of different borders')] }
  if (hasReason(pooled)) return { checks: [impossible(`there is no pooled estimate: ${pooled.reason}`)] }
  const made: Unadjusted[] = []
  const notEstimated: { side: BorderSide; metres: number; reason: string }[] = []
  for (const side of ['untreated', 'treated'] as const) {
    const bandwidth = pooled.jump.bandwidths.h[side] * metresPerUnit[line.unit]
    for (const distance of metres ?? usualBandwidths.map((times) => Number((times * bandwidth).toPrecision(2)))) {
      const effect = shiftedEffect(study, line, inputs, placed, outcome, side, distance)
      if ('reason' in effect) notEstimated.push({ side, metres: distance, reason: effect.reason })
      else made.push(effect)
    }
  }
  const adjusted = adjustedFor(made.map(({ p }) => p))
  const shifted = made.map((effect, i): ShiftedEffect => ({ ...effect, ...adjusted[i] }))
  const checks = [
    ...shifted.map((effect) => checkOf(effect, study.estimation.level)),
    ...notEstimated.map(({ side, metres: distance, reason }) => ({
      ...impossible(reason),
      line: nameOf(side, distance),
    })),
  ]
  return { checks, exhibit: { shifted, not_estimated: notEstimated } }
}

function shiftedEffect(
  study: Study,
  line: BorderLine,
  inputs: AnalysisInputs,
  placed: Placed,
  outcome: string,
  side: BorderSide,
  metres: number,
): Unadjusted | { readonly reason: string } {
  const { border } = placed
  const perUnit = metresPerUnit[line.unit]
  if (!border) throw new Error('a border study is placed against a border')
  if (line.reach !== undefined && metres >= line.reach * perUnit) return { reason: 'no unit is used so far away' }
  const made = shiftedBorder(border, side, metres, line.piece * perUnit)
  if (!made.ok) return { reason: made.problems.map(({ found }) => found).join('; ') }
  const placement = placeOnShifted(study, line, inputs, placed, side, made.value)
  if (placement.unit.length === 0) return { reason: 'no unit lies near' }
  const moved = { ...placed, placement }
  const pooled = pooledOverLines(
    study,
    moved,
    entriesOf(study, inputs.table, moved, outcome),
    0,
    placement.lines.length,
  )
  if (hasReason(pooled)) return pooled
  const { estimate, standardError, low, high, p } = pooled.jump.corrected
  if (!(standardError > 0)) return { reason: 'its standard error is 0' }
  const { untreated, treated } = pooled.jump.unitsInBandwidth
  const units = untreated + treated
  const { errorMetres } = made.value
  const at = ((side === 'treated' ? 1 : -1) * metres) / perUnit
  return { side, metres, at, estimate, standard_error: standardError, low, high, p, units, error_metres: errorMetres }
}

/** The study's units of one side, where the map has them there, too, placed against the shifted line. */
function placeOnShifted(
  study: Study,
  line: BorderLine,
  { table }: AnalysisInputs,
  { placement, border, ground }: Placed,
  side: BorderSide,
  shifted: ShiftedBorder,
): Placement {
  const wanted = side === 'treated' ? 1 : 0
  const isThere = (row: number) => {
    const zone = ground?.zone[row] ?? -1
    return zone >= 0 && border?.treatedZone[zone] === wanted
  }
  const rows = placement.unit.filter((row, e) => placement.treated[e] === wanted && isThere(row))
  const [lon, lat] = positionColumns(study).map((name) => {
    const values = numbersOf(table, name)
    return Float64Array.from(rows, (row) => values[row])
  })
  const found = eligible(shifted.border, measureUnits(shifted.border, lon, lat), {
    metresPerUnit: metresPerUnit[line.unit],
    positionErrorMetres: line.positionError,
  }).placement
  return { ...found, unit: found.unit.map((i) => rows[i]) }
}

function nameOf(side: BorderSide, metres: number): string {
  return `${Number(metres.toPrecision(4))} m into ${side} land`
}

function checkOf(effect: ShiftedEffect, level: number): CheckResult {
  const { side, metres, estimate, standard_error, low, high, p, p_holm, p_bh, units } = effect
  const short = (value: number) => String(Number(value.toPrecision(3)))
  const isDoubt = p_holm <= 1 - level
  const says =
    `where nothing changes the estimate is ${short(estimate)} (${short(low)} to ${short(high)}; ${units} units)` +
    (isDoubt ? ', more than chance explains: the outcome bends or jumps there by itself' : '')
  return {
    check: shiftedCheck,
    line: nameOf(side, metres),
    statistic: estimate / standard_error,
    p,
    p_holm,
    p_bh,
    verdict: isDoubt ? 'doubt' : 'fine',
    says,
  }
}
