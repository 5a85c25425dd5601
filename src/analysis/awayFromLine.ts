/** Effects between a low and a high cutoff, for the lines that the study names. */
import { streamOf } from '../math/index.js'
import { numbersOf, type Table } from '../records/index.js'
import type { AwayFromLine } from '../results.js'
import type { Study } from '../study/index.js'
import { awayFromLine, type CurveUnits } from '../thresholds/index.js'
import { hasReason, type MainEstimates } from './estimating.js'
import type { Placed } from './placing.js'

const points = 9

/** Undefined where the study asks for none. Scores are turned so that they grow towards treatment, and back again. */
export function awayOf(
  study: Study,
  table: Table,
  placed: Placed,
  outcome: string,
  { pooled }: MainEstimates,
): AwayFromLine | undefined {
  const { away, line } = study
  if (!away || line.kind !== 'score') return undefined
  const { lines } = placed.placement
  const [low, high] = [away.low, away.high].map((name) =>
    lines.findIndex(({ id, label }) => id === name || label === name),
  )
  const named = { low: away.low, high: away.high }
  const refuse = (reason: string): AwayFromLine => ({ ...named, not_estimated: reason })
  if (low < 0 || high < 0) return refuse(`no line is named ${low < 0 ? away.low : away.high}`)
  const turn = line.treated === 'at-or-above' || line.treated === 'above' ? 1 : -1
  const [from, to] = [low, high].map((place) => turn * (lines[place].cutoff ?? Number.NaN))
  if (!(from < to)) return refuse('the low line must have the cutoff that treats more, and both one cutoff each')
  if (line.rescale !== 'none') return refuse('scores are rescaled')
  if (hasReason(pooled)) return refuse(`there is no pooled estimate to take the bandwidth from: ${pooled.reason}`)
  const { untreated, treated } = pooled.jump.bandwidths.h
  const bandwidth = away.bandwidth ?? Math.max(untreated, treated)
  const at = Array.from({ length: points }, (_, i) => from + ((to - from) * (i + 0.5)) / points)
  const made = awayFromLine(
    unitsOf(study, table, placed, outcome, low, from),
    unitsOf(study, table, placed, outcome, high, to),
    {
      low: from,
      high: to,
      bandwidth,
      kernel: study.estimation.kernel,
      at,
      level: study.estimation.level,
      random: streamOf(study.seed, 4),
    },
  )
  if (!made.ok) return refuse(made.reason)
  const { criticalValue, parallel } = made
  return {
    ...named,
    bandwidth,
    critical_value: criticalValue,
    points: made.points.map(({ score, estimate, standardError }) => ({
      score: turn * score,
      estimate,
      standard_error: standardError,
      uniform_low: estimate - criticalValue * standardError,
      uniform_high: estimate + criticalValue * standardError,
    })),
    ...(parallel ? { parallel } : { parallel: null, parallel_reason: 'too few untreated units below the low cutoff' }),
  }
}

function unitsOf(
  study: Study,
  table: Table,
  { placement, cluster }: Placed,
  outcome: string,
  line: number,
  cutoff: number,
): CurveUnits {
  const y = numbersOf(table, outcome)
  const weight = study.records.weight === undefined ? undefined : numbersOf(table, study.records.weight)
  const entries = [...placement.line.keys()].filter(
    (e) => placement.line[e] === line && Number.isFinite(y[placement.unit[e]]),
  )
  const rows = entries.map((e) => placement.unit[e])
  return {
    score: Float64Array.from(entries, (e) => cutoff + placement.x[e]),
    treated: Uint8Array.from(entries, (e) => placement.treated[e]),
    y: Float64Array.from(rows, (row) => y[row]),
    key: Int32Array.from(rows, (row) => (cluster ? cluster[row] : row)),
    ...(weight ? { w: Float64Array.from(rows, (row) => weight[row]) } : {}),
  }
}
