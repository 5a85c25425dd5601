/**
 * Is it credible? Every check of a study, what all outcomes share made once (METHODS section 11). Each is a row with a
 * verdict in plain words; p-values are adjusted for the number of tests of their kind.
 */
import { holm, moranNearLine } from '../checks/index.js'
import { numbersOf, type Table } from '../records/index.js'
import type { BalanceRow, CheckResult, DensityExhibit, OutcomeResult } from '../results.js'
import type { Study } from '../study/index.js'
import { balanceChecks } from './balance.js'
import { densityChecks } from './density.js'
import { entriesOfValues, type OutcomeEntries } from './entries.js'
import { hasReason, type MainEstimates, ofEligibility, pooledOnly } from './estimating.js'
import { heapingChecks } from './heaping.js'
import { type AnalysisInputs, type Progress, positionColumns } from './inputs.js'
import { ladderChecks } from './ladderChecks.js'
import { laddersOf } from './ladders.js'
import { type PlacedPlacebos, placeboBorders, placePlacebos } from './placeboBorders.js'
import type { Placed } from './placing.js'
import { shiftedLines } from './shiftedLines.js'
import { standardsSheet } from './standards.js'
import { type WindowFound, windowChecks, windowOf } from './windowTest.js'
import { shown } from './words.js'

/** What the checks of all outcomes share. */
export interface SharedChecks {
  /** Rows that are the same for every outcome. */
  readonly rows: readonly CheckResult[]
  readonly balance: readonly BalanceRow[]
  readonly density: DensityExhibit | undefined
  readonly placebos: PlacedPlacebos | undefined
  /** Of `checks: full`. */
  readonly window: WindowFound | undefined
}

/** Undefined where the study asks for no checks. */
export function sharedChecks(
  study: Study,
  inputs: AnalysisInputs,
  placed: Placed,
  progress?: Progress,
): SharedChecks | undefined {
  if (study.checks === 'none') return undefined
  progress?.('checking', 0, 1)
  const density = densityChecks(study, placed)
  const balance = balanceChecks(study, inputs, placed)
  return {
    rows: [...density.checks, ...heapingChecks(study, inputs.table, placed), ...balance.checks],
    balance: balance.rows,
    density: density.exhibit,
    window: study.checks === 'full' ? windowOf(study, inputs.table, placed) : undefined,
    placebos: study.line.kind === 'border' ? placePlacebos(study, inputs, placed, progress) : undefined,
  }
}

type Checked = Pick<OutcomeResult, 'checks' | 'ladders' | 'placebo_borders' | 'shifted_lines' | 'standards'>

/** `result`: the outcome as far as it is estimated. */
export function outcomeChecks(
  shared: SharedChecks,
  study: Study,
  inputs: AnalysisInputs,
  placed: Placed,
  { entries, made, result }: { entries: OutcomeEntries; made: MainEstimates; result: OutcomeResult },
): Checked {
  const { outcome } = result
  const isBorder = study.line.kind === 'border'
  const eligible = ofEligibility(made.pooled)
  const ladders = laddersOf(made.basis, eligible, {
    donut: study.estimation.donut,
    isFull: study.checks === 'full',
    hasPlacebos: !isBorder,
  })
  const placebos = shared.placebos && placeboBorders(study, inputs, shared.placebos, outcome, eligible)
  const shifted = isBorder ? shiftedLines(study, inputs, placed, outcome, eligible) : undefined
  const checks = [
    ...shared.rows,
    ...missingOutcome(study, inputs.table, placed, outcome, entries),
    ...(ladders && !hasReason(eligible)
      ? ladderChecks(ladders, eligible.jump.corrected, study.estimation.level, holm)
      : []),
    ...(shared.window
      ? windowChecks(
          study,
          inputs.table,
          shared.window,
          outcome,
          hasReason(eligible) ? undefined : eligible.jump.corrected.estimate,
        )
      : []),
    ...withoutEachLine(result),
    ...(placebos?.checks ?? []),
    ...(shifted?.checks ?? []),
    ...(isBorder ? likeNeighbours(study, inputs.table, made) : []),
  ]
  const facts = { placed: placed.units, missing: entries.missing, distinct: fewestDistinct(made) }
  return {
    checks,
    ...(ladders ? { ladders } : {}),
    ...(placebos?.exhibit ? { placebo_borders: placebos.exhibit } : {}),
    ...(shifted?.exhibit ? { shifted_lines: shifted.exhibit } : {}),
    standards: standardsSheet(study, { ...result, checks }, facts),
  }
}

function fewestDistinct({ pooled }: MainEstimates): number | undefined {
  if (hasReason(pooled)) return undefined
  return Math.min(pooled.jump.distinct.untreated, pooled.jump.distinct.treated)
}

/** Does the target hang on one line? */
function withoutEachLine({ target, leave_one_out: rows }: OutcomeResult): CheckResult[] {
  const check = 'leave one line out'
  if (!rows || rows.length === 0 || 'not_estimated' in target) return []
  const far = (estimate: number) => Math.abs(estimate - target.estimate)
  const most = rows.reduce((a, b) => (far(b.estimate) > far(a.estimate) ? b : a))
  const estimates = rows.map(({ estimate }) => estimate)
  const range = `without any one line the target runs from ${shown(Math.min(...estimates))} to ${shown(Math.max(...estimates))}`
  const holds = !(most.estimate < target.low || most.estimate > target.high)
  const words = holds ? 'inside' : 'outside'
  const says = `${range}; ${most.line} moves it most, to ${shown(most.estimate)}, ${words} its own interval ${shown(target.low)} to ${shown(target.high)}`
  return [{ check, verdict: holds ? 'fine' : 'doubt', says }]
}

/** Does the share of units that lack the outcome jump at the line? */
function missingOutcome(
  study: Study,
  table: Table,
  placed: Placed,
  outcome: string,
  { missing }: OutcomeEntries,
): CheckResult[] {
  const check = 'missing outcome'
  if (missing === 0) return [{ check, verdict: 'fine', says: 'no unit placed lacks the outcome' }]
  const values = numbersOf(table, outcome).map((value) => (Number.isFinite(value) ? 0 : 1))
  const made = pooledOnly(study, placed, entriesOfValues(study, table, placed, values))
  if (hasReason(made)) return [{ check, verdict: 'not possible', says: made.reason }]
  const { estimate, standardError, low, high, p } = made.jump.corrected
  const jumps = p < 1 - study.estimation.level
  const says = `the share of units without the outcome ${jumps ? 'jumps' : 'moves'} by ${shown(estimate)} (${shown(low)} to ${shown(high)})`
  return [{ check, statistic: estimate / standardError, p, verdict: jumps ? 'doubt' : 'fine', says }]
}

/** Neighbours whose residuals are alike make units count for less than they seem to. */
function likeNeighbours(study: Study, table: Table, { pooled, basis }: MainEstimates): CheckResult[] {
  const check = 'spatial correlation'
  if (hasReason(pooled)) return [{ check, verdict: 'not possible', says: pooled.reason }]
  const [lon, lat] = positionColumns(study).map((name) => numbersOf(table, name))
  const { spatial, variance } = basis.options
  const neighbourhood = spatial ? { withinMetres: spatial.cutoffMetres } : { nearest: 8 }
  const found = moranNearLine(pooled.sample, pooled.jump, lon, lat, neighbourhood)
  if (!found.ok) return [{ check, verdict: 'not possible', says: found.reason }]
  const isAlike = found.p < 1 - study.estimation.level
  const allowsForIt = variance === 'spatial' || variance === 'clusters' || variance === 'few-clusters'
  const meaning = !isAlike
    ? 'no more alike than chance'
    : allowsForIt
      ? `neighbours are alike, which the variance (${variance}) allows for`
      : `neighbours are alike, which the variance (${variance}) does not allow for: name clusters or a spatial cutoff`
  return [
    {
      check,
      statistic: found.i,
      p: found.p,
      verdict: isAlike && !allowsForIt ? 'doubt' : 'fine',
      says: `Moran's I of the residuals near the line is ${shown(found.i)}, ${shown(found.expected)} by chance alone: ${meaning}`,
    },
  ]
}
