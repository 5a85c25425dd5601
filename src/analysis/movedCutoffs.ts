/**
 * Cutoffs that move: the jump at a new cutoff less the jump at the same place before (difference in discontinuities;
 * Grembi, Nannicini & Troiano 2016), and the old cutoff after the move, where nothing should jump any more. METHODS
 * section 9. Units never reach past the cutoff of their own time.
 */
import { covarianceMatrix, type Entries, type Inference, infer, type JumpFit } from '../jump/index.js'
import { labelsOf, numbersOf, type Table } from '../records/index.js'
import type { Estimate, MovedCutoffs, NotEstimated } from '../results.js'
import type { Study } from '../study/index.js'
import { type LineEffects, placeAgainst, targetEffect } from '../thresholds/index.js'
import { estimateEntries, hasReason, type LineEstimate, type OrReason } from './estimating.js'
import type { AnalysisInputs } from './inputs.js'
import type { Placed } from './placing.js'
import { estimateResult } from './summaries.js'

interface Move {
  readonly line: string
  readonly periods: readonly [string, string]
  readonly from: number
  readonly to: number
  /** Rows of the time before, and of the time after. */
  readonly before: readonly number[]
  readonly after: readonly number[]
}

/** Undefined where the study names no period, or no cutoff moves. */
export function movedCutoffs(
  study: Study,
  inputs: AnalysisInputs,
  placed: Placed,
  outcome: string,
): MovedCutoffs | undefined {
  const moves = movesOf(study, inputs)
  if (moves.length === 0) return undefined
  const made = moves.map((move) => estimateMove(study, inputs.table, placed, outcome, move))
  const { level } = study.estimation
  const pooledOf = (pick: (one: MadeMove) => OrReason<JumpFit | Difference>) => {
    const usable = made.flatMap((one) => {
      const value = pick(one)
      return hasReason(value) ? [] : [{ line: one.move.line, value }]
    })
    return pool(usable, level, placed)
  }
  return {
    moves: made.map(({ move, after, before, old, difference }) => ({
      line: move.line,
      periods: move.periods,
      from: move.from,
      to: move.to,
      after: shownJump(after),
      before: shownJump(before),
      difference: hasReason(difference) ? { not_estimated: difference.reason } : estimateResult(difference.inference),
      old_cutoff: shownJump(old),
    })),
    pooled: {
      difference: pooledOf(({ difference }) => difference),
      old_cutoff: pooledOf(({ old }) => (hasReason(old) ? old : old.jump)),
    },
  }
}

function movesOf({ line }: Study, { table, schedule }: AnalysisInputs): Move[] {
  if (line.kind !== 'score' || line.cutoff.kind !== 'schedule' || !schedule) return []
  const { by, value, period } = line.cutoff
  if (period === undefined) return []
  const others = by.filter((name) => name !== period)
  const groupOf = (from: Table) => {
    const columns = others.map((name) => labelsOf(from, name))
    return (row: number) => columns.map(({ codes, labels }) => labels[codes[row]] ?? '').join(', ') || value
  }
  const cutoffs = numbersOf(schedule, value)
  const scheduled = groupOf(schedule)
  const times = labelsOf(schedule, period)
  const byGroup = new Map<string, { period: string; cutoff: number }[]>()
  for (let row = 0; row < schedule.rows; row++) {
    const group = scheduled(row)
    const one = { period: times.labels[times.codes[row]], cutoff: cutoffs[row] }
    byGroup.set(group, [...(byGroup.get(group) ?? []), one])
  }
  const rowsOf = rowsByKey(table, groupOf(table), period)
  return [...byGroup]
    .sort(([a], [b]) => (a < b ? -1 : 1))
    .flatMap(([group, list]) => {
      const inTime = [...list].sort((a, b) => compareTimes(a.period, b.period))
      return inTime.slice(1).flatMap((now, i): Move[] => {
        const then = inTime[i]
        if (then.cutoff === now.cutoff) return []
        const rows = (time: string) => rowsOf.get(`${group}\0${time}`) ?? []
        return [
          {
            line: `${group}: ${then.period} to ${now.period}`,
            periods: [then.period, now.period],
            from: then.cutoff,
            to: now.cutoff,
            before: rows(then.period),
            after: rows(now.period),
          },
        ]
      })
    })
}

function compareTimes(a: string, b: string): number {
  const [first, second] = [Number(a), Number(b)]
  return Number.isNaN(first - second) ? (a < b ? -1 : 1) : first - second
}

function rowsByKey(table: Table, groupOf: (row: number) => string, period: string): Map<string, number[]> {
  const times = labelsOf(table, period)
  const rows = new Map<string, number[]>()
  for (let row = 0; row < table.rows; row++) {
    if (times.codes[row] < 0) continue
    const key = `${groupOf(row)}\0${times.labels[times.codes[row]]}`
    const list = rows.get(key)
    if (list) list.push(row)
    else rows.set(key, [row])
  }
  return rows
}

interface Difference {
  readonly inference: Inference
  readonly after: JumpFit
  readonly before: JumpFit
}

interface MadeMove {
  readonly move: Move
  readonly after: OrReason<LineEstimate>
  readonly before: OrReason<LineEstimate>
  readonly old: OrReason<LineEstimate>
  readonly difference: OrReason<Difference>
}

function estimateMove(study: Study, table: Table, placed: Placed, outcome: string, move: Move): MadeMove {
  if (study.line.kind !== 'score') throw new Error('only cutoffs on a score move')
  const score = numbersOf(table, study.line.score)
  const y = numbersOf(table, outcome)
  const { from, to } = move
  const ofLine = (rows: readonly number[], cutoff: number) =>
    entriesAt(
      study,
      table,
      placed,
      rows.filter((row) => Number.isFinite(score[row]) && Number.isFinite(y[row])),
      cutoff,
      y,
    )
  const beyond = (rows: readonly number[], own: number, other: number) =>
    rows.filter((row) => (other > own ? score[row] > own : score[row] < own))
  const after = estimateEntries(study, placed, ofLine(move.after, to))
  const width = hasReason(after) ? undefined : after.jump.bandwidths
  const again = (entries: Entries): OrReason<LineEstimate> =>
    width ? estimateEntries(study, placed, entries, width) : { reason: 'the new cutoff has no estimate' }
  const before = again(ofLine(beyond(move.before, from, to), to))
  const old = again(ofLine(beyond(move.after, to, from), from))
  return { move, after, before, old, difference: differenceOf(study, placed, after, before) }
}

function entriesAt(
  study: Study,
  table: Table,
  placed: Placed,
  rows: readonly number[],
  cutoff: number,
  y: Float64Array,
): Entries {
  if (study.line.kind !== 'score') throw new Error('only cutoffs on a score move')
  const score = numbersOf(table, study.line.score)
  const weight = study.records.weight === undefined ? undefined : numbersOf(table, study.records.weight)
  const { cluster } = placed
  const kept = rows.filter((row) => (!weight || weight[row] > 0) && (!cluster || cluster[row] >= 0))
  const pick = (values: Float64Array) => Float64Array.from(kept, (row) => values[row])
  const { x, treated } = placeAgainst(pick(score), cutoff, study.line.treated)
  return {
    x,
    treated,
    unit: Int32Array.from(kept),
    y: pick(y),
    ...(weight ? { w: pick(weight) } : {}),
    ...(cluster ? { cluster: Int32Array.from(kept, (row) => cluster[row]) } : {}),
  }
}

/** Corrected, after less before; clusters that span both are accounted for. */
function differenceOf(
  { estimation }: Study,
  placed: Placed,
  after: OrReason<LineEstimate>,
  before: OrReason<LineEstimate>,
): OrReason<Difference> {
  if (hasReason(after)) return after
  if (hasReason(before)) return { reason: `before the move: ${before.reason}` }
  const { matrix } = covarianceMatrix([after.jump.influence, before.jump.influence], placed.spatial)
  const estimate = after.jump.corrected.estimate - before.jump.corrected.estimate
  const variance = Math.max(0, matrix[0] + matrix[3] - 2 * matrix[1])
  const least = Math.min(after.jump.corrected.degreesOfFreedom, before.jump.corrected.degreesOfFreedom)
  return {
    inference: infer(estimate, variance, least, estimation.level),
    after: after.jump,
    before: before.jump,
  }
}

function shownJump(made: OrReason<LineEstimate>): Estimate | NotEstimated {
  return hasReason(made) ? { not_estimated: made.reason } : estimateResult(made.jump.corrected)
}

/** By precision, with the covariance that shared units and clusters give the moves. */
function pool(
  usable: readonly { readonly line: string; readonly value: JumpFit | Difference }[],
  level: number,
  placed: Placed,
): MovedCutoffs['pooled']['difference'] {
  if (usable.length === 0) return { not_estimated: 'no move has an estimate' }
  const parts = usable.map(({ value }) =>
    'after' in value
      ? {
          estimate: value.inference.estimate,
          signs: [1, -1],
          influences: [value.after.influence, value.before.influence],
        }
      : { estimate: value.corrected.estimate, signs: [1], influences: [value.influence] },
  )
  const all = parts.flatMap(({ influences }) => influences)
  const { matrix } = covarianceMatrix(all, placed.spatial)
  const start = parts.map((_, i) => parts.slice(0, i).reduce((sum, { influences }) => sum + influences.length, 0))
  const covariance = new Float64Array(parts.length ** 2)
  parts.forEach((a, i) => {
    parts.forEach((b, j) => {
      a.signs.forEach((signA, k) => {
        b.signs.forEach((signB, l) => {
          covariance[i * parts.length + j] += signA * signB * matrix[(start[i] + k) * all.length + start[j] + l]
        })
      })
    })
  })
  const effects: LineEffects = {
    ids: usable.map(({ line }) => line),
    estimate: Float64Array.from(parts, ({ estimate }) => estimate),
    covariance,
    isDiagonal: false,
  }
  const target = targetEffect(effects, { kind: 'precision' }, level)
  if (!target.ok) return { not_estimated: target.reason }
  const { estimate, standardError, low, high, p } = target
  return { estimate, standard_error: standardError, low, high, p }
}
