/** Predetermined columns must not jump: each on its own, and all together by their joint covariance. */

import { jointTest } from '../checks/index.js'
import { covarianceMatrix, type JumpFit } from '../jump/index.js'
import { numbersOf } from '../records/index.js'
import type { CheckResult } from '../results.js'
import type { Study } from '../study/index.js'
import { adjustedFor } from './adjusted.js'
import { entriesOfValues } from './entries.js'
import { hasReason, type OrReason, pooledOnly } from './estimating.js'
import type { AnalysisInputs } from './inputs.js'
import type { Placed } from './placing.js'
import { shown } from './words.js'

interface Column {
  readonly name: string
  readonly made: OrReason<{ readonly jump: JumpFit }>
}

export function balanceChecks(study: Study, { table }: AnalysisInputs, placed: Placed): CheckResult[] {
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
  return [
    ...rows,
    ...joint(
      fits.map(({ jump }) => jump),
      placed,
      alpha,
    ),
  ]
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
