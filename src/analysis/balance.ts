/** Predetermined columns must not jump: each on its own, and all together by their joint covariance. */
import { jointTest } from '../checks/index.js'
import { covarianceMatrix, type JumpFit, type Side } from '../jump/index.js'
import { numbersOf } from '../records/index.js'
import type { BalanceRow, CheckResult, LineBalance } from '../results.js'
import type { Study } from '../study/index.js'
import { type Adjusted, adjustedFor } from './adjusted.js'
import { entriesOfLine, entriesOfValues } from './entries.js'
import { estimateEntries, hasReason, type LineEstimate, type OrReason, pooledOnly } from './estimating.js'
import type { AnalysisInputs } from './inputs.js'
import type { Placed } from './placing.js'
import { shown } from './words.js'

interface Column {
  readonly name: string
  readonly made: OrReason<LineEstimate>
}

/** Rows for the sheet of checks, and the jumps themselves; empty where the study names no predetermined column. */
export function balanceChecks(
  study: Study,
  { table }: AnalysisInputs,
  placed: Placed,
): { readonly checks: readonly CheckResult[]; readonly rows: readonly BalanceRow[] } {
  const columns = study.predetermined.map((name): Column => {
    const entries = entriesOfValues(study, table, placed, numbersOf(table, name))
    return { name, made: pooledOnly(study, placed, entries) }
  })
  const alpha = 1 - study.estimation.level
  const fits = columns.flatMap(({ name, made }) => (hasReason(made) ? [] : [{ name, jump: made.jump }]))
  const adjusted = adjustedFor(fits.map(({ jump }) => jump.corrected.p))
  const rows = columns.map(({ name, made }): CheckResult => {
    const check = `balance of ${name}`
    if (hasReason(made)) return { check, verdict: 'not possible', says: made.reason }
    const { estimate, standardError, low, high, p } = made.jump.corrected
    const both = adjusted[fits.findIndex((fit) => fit.name === name)]
    const jumps = both.p_holm < alpha
    const says = `${jumps ? 'jumps' : 'moves'} by ${shown(estimate)} (${shown(low)} to ${shown(high)})`
    return { check, statistic: estimate / standardError, p, ...both, verdict: jumps ? 'doubt' : 'fine', says }
  })
  const all = fits.map(({ jump }) => jump)
  return {
    checks: [...rows, ...joint(all, placed, alpha)],
    rows: columns.map(({ name, made }): BalanceRow => {
      if (hasReason(made)) return { column: name, not_estimated: made.reason }
      return { column: name, ...jumpOf(made, adjusted[fits.findIndex((fit) => fit.name === name)]) }
    }),
  }
}

function jumpOf({ jump, sample }: LineEstimate, adjusted: Adjusted) {
  const { estimate, standardError, low, high, p } = jump.corrected
  const deviation = spreadWithin(sample.untreated, jump.unitsInBandwidth.untreated)
  return {
    estimate,
    standard_error: standardError,
    low,
    high,
    p,
    ...adjusted,
    bandwidth: jump.bandwidths.h,
    units: jump.unitsInBandwidth,
    standard_deviation: deviation,
    ...(deviation > 0
      ? { standardised: { estimate: estimate / deviation, low: low / deviation, high: high / deviation } }
      : {}),
  }
}

/** Standard deviation of the first units of a side, weighted where they have weights. */
function spreadWithin({ y, w }: Side, count: number): number {
  let [total, mean, squares] = [0, 0, 0]
  for (let i = 0; i < count; i++) {
    const weight = w === null ? 1 : w[i]
    total += weight
    mean += weight * y[i]
  }
  mean /= total
  for (let i = 0; i < count; i++) squares += (w === null ? 1 : w[i]) * (y[i] - mean) ** 2
  return count > 1 ? Math.sqrt((squares / total) * (count / (count - 1))) : 0
}

/** Hotelling's test of all jumps being 0, with the covariance that shared units and clusters give them. */
function joint(jumps: readonly JumpFit[], placed: Placed, alpha: number): CheckResult[] {
  const check = 'balance, joint'
  const count = jumps.length
  if (count < 2) return []
  const { matrix } = covarianceMatrix(
    jumps.map(({ influence }) => influence),
    placed.spatial,
  )
  const effect = Float64Array.from(jumps, ({ corrected }) => corrected.estimate)
  const joint = jointTest(
    effect,
    matrix,
    jumps.map(({ corrected }) => corrected.degreesOfFreedom),
  )
  if (!joint.ok) return [{ check, verdict: 'not possible', says: joint.reason }]
  const { square, f, degreesOfFreedom, p } = joint
  const says = `${count} columns together: ${p < alpha ? 'they jump by more than chance' : 'no more than chance'} (F = ${shown(f)} on ${count} and ${shown(degreesOfFreedom[1])} degrees of freedom)`
  return [{ check, statistic: square, p, verdict: p < alpha ? 'doubt' : 'fine', says }]
}

/** Beyond this many estimates the lines go without. */
const mostAtLines = 2000

/** The jump of each predetermined column at each line, each at its own bandwidth; undefined where there are none or too many. */
export function balanceAtLines(
  study: Study,
  { table }: AnalysisInputs,
  placed: Placed,
): readonly (readonly LineBalance[])[] | undefined {
  const { lines } = placed.placement
  const columns = study.predetermined
  if (study.checks === 'none' || columns.length === 0 || lines.length < 2) return undefined
  if (lines.length * columns.length > mostAtLines) return undefined
  const byColumn = columns.map((column) => {
    const entries = entriesOfValues(study, table, placed, numbersOf(table, column))
    return lines.map((_, i): LineBalance => {
      const made = estimateEntries(study, placed, entriesOfLine(entries, i))
      if (hasReason(made)) return { column, not_estimated: made.reason }
      const { estimate, standardError, p } = made.jump.corrected
      return { column, estimate, standard_error: standardError, p }
    })
  })
  return lines.map((_, i) => byColumn.map((rows) => rows[i]))
}
