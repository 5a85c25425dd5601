/** Borders that change nothing: the effect at each border between zones of equal status, and the real one among them. */
import { type Border, measureUnits, placeboBorder } from '../borders/index.js'
import { type EffectFound, fewestPlacebos, judgePlacebos, rankAmongPlacebos } from '../checks/index.js'
import type { Inference } from '../jump/index.js'
import { problemText } from '../problem.js'
import { numbersOf } from '../records/index.js'
import type { CheckResult, PlaceboBorders } from '../results.js'
import type { Study } from '../study/index.js'
import { metresPerUnit } from './border.js'
import { entriesOf } from './entries.js'
import { hasReason, type OrReason, type OutcomeEstimates } from './estimating.js'
import { type AnalysisInputs, type Progress, positionColumns } from './inputs.js'
import { type Placed, placeStudy } from './placing.js'
import { pooledOverLines } from './pooledAgain.js'

export const placeboCheck = 'borders that change nothing'

type PlaceboEffect = PlaceboBorders['placebos'][number]

/** Rows placed against the borders that change nothing, or why there are none. */
export type PlacedPlacebos =
  | { readonly ok: true; readonly placed: Placed }
  | { readonly ok: false; readonly reason: string }

/**
 * The study's rows placed against the borders that change nothing, by the study's own rules; once for all outcomes.
 * `placed`: the study's own placement.
 */
export function placePlacebos(
  study: Study,
  inputs: AnalysisInputs,
  placed: Placed,
  progress?: Progress,
): PlacedPlacebos {
  const { line } = study
  if (line.kind !== 'border' || !placed.border) return { ok: false, reason: 'the lines are no borders between zones' }
  const found = placeboBorder(placed.border.zones, {
    treated: line.treated,
    dose: line.dose,
    outside: line.outside,
    snapMetres: line.snap,
    pieceMetres: line.piece * metresPerUnit[line.unit],
  })
  if (!found) return { ok: false, reason: 'no two zones of equal status share a border' }
  if (!found.ok) return { ok: false, reason: found.problems.map(problemText).join('; ') }
  const again = placeStudy(study, { ...inputs, ground: groundOn(found.value, study, inputs, progress) })
  return again.ok
    ? { ok: true, placed: again.value }
    : { ok: false, reason: again.problems.map(problemText).join('; ') }
}

function groundOn(border: Border, study: Study, { table }: AnalysisInputs, progress?: Progress) {
  const [lon, lat] = positionColumns(study).map((name) => numbersOf(table, name))
  const stage = 'placing against borders that change nothing'
  return { border, measured: measureUnits(border, lon, lat, (done) => progress?.(stage, done, table.rows)) }
}

/** One outcome: an effect for each pair of zones, by the study's own options, and the pooled one ranked among them. */
export function placeboBorders(
  study: Study,
  inputs: AnalysisInputs,
  placebos: PlacedPlacebos,
  outcome: string,
  pooled: OutcomeEstimates['pooled'],
): { readonly checks: readonly CheckResult[]; readonly exhibit?: PlaceboBorders } {
  const impossible = (says: string) => ({ check: placeboCheck, verdict: 'not possible' as const, says })
  if (!placebos.ok) return { checks: [impossible(placebos.reason)] }
  const effects: PlaceboEffect[] = []
  const notEstimated: { pair: readonly [string, string]; reason: string }[] = []
  const entries = entriesOf(study, inputs.table, placebos.placed, outcome)
  for (const { pair, from, to } of pairsOf(placebos.placed)) {
    const made = pooledOverLines(study, placebos.placed, entries, from, to)
    const effect = hasReason(made) ? made : effectOf(pair, made.jump.corrected, made.jump.unitsInBandwidth)
    if (hasReason(effect)) notEstimated.push({ pair, reason: effect.reason })
    else effects.push(effect)
  }
  const exhibit = { placebos: effects, not_estimated: notEstimated }
  if (hasReason(pooled)) return { checks: [impossible(`there is no pooled estimate: ${pooled.reason}`)], exhibit }
  const { level } = study.estimation
  const real = pooled.jump.corrected
  if (!(real.standardError > 0)) return { checks: [impossible('the pooled estimate has no standard error')], exhibit }
  const found = effects.map(
    ({ estimate, standard_error, p }): EffectFound => ({ estimate, standardError: standard_error, p }),
  )
  const ranked = rankAmongPlacebos(real, found, level)
  const { verdict, says } = judgePlacebos(ranked, real, level)
  if (found.length < fewestPlacebos) return { checks: [{ check: placeboCheck, verdict, says }], exhibit }
  const { byT, byEstimate, of } = ranked
  return {
    checks: [{ check: placeboCheck, statistic: byT.rank, p: byT.p, verdict, says }],
    exhibit: {
      ...exhibit,
      rank: byT.rank,
      of,
      p: byT.p,
      rank_by_estimate: byEstimate.rank,
      p_by_estimate: byEstimate.p,
    },
  }
}

function effectOf(
  pair: readonly [string, string],
  { estimate, standardError, low, high, p }: Inference,
  units: { readonly untreated: number; readonly treated: number },
): OrReason<PlaceboEffect> {
  if (!(standardError > 0)) return { reason: 'its standard error is 0' }
  return { pair, estimate, standard_error: standardError, low, high, p, units: units.untreated + units.treated }
}

/** Pairs of zones and their lines, from one place to before another; a pair's lines stand together. */
function pairsOf({ placement: { lines } }: Placed) {
  const pairs: { pair: readonly [string, string]; from: number; to: number }[] = []
  lines.forEach(({ zones }, i) => {
    const pair = zones as readonly [string, string]
    const last = pairs[pairs.length - 1]
    if (last && last.pair[0] === pair[0] && last.pair[1] === pair[1]) last.to = i + 1
    else pairs.push({ pair, from: i, to: i + 1 })
  })
  return pairs
}
