/** Estimates as they stand in results.json. */

import type { Piece } from '../borders/index.js'
import type { BiasAwareEstimated, Inference, JumpFit, Variance } from '../jump/index.js'
import type { Line, Placement } from '../placement.js'
import type {
  BorderResult,
  BySide,
  Comparison,
  CovariateReport,
  Estimate,
  Jump,
  LineSummary,
  NotEstimated,
  OutcomeResult,
  PooledJump,
  TakeUp,
  Target,
} from '../results.js'
import type { EstimationPart, Study } from '../study/index.js'
import type { BorderFacts } from './border.js'
import {
  type CovariatesMade,
  hasReason,
  type LineEstimate,
  type MainEstimates,
  type NoEstimate,
  type OutcomeEstimates,
  type TakeUpMade,
} from './estimating.js'
import { leastF } from './standards.js'
import { shown } from './words.js'

export function outcomeResult(
  study: Study,
  outcome: string,
  lines: readonly Line[],
  estimates: OutcomeEstimates,
  slope: Comparison['slope'],
): OutcomeResult {
  const { estimation } = study
  const { comparison } = estimates
  return {
    outcome,
    lines: lines.map((line, i) => {
      const estimate = estimates.lines[i]
      return hasReason(estimate)
        ? { line: line.id, ...notEstimated(estimate) }
        : { line: line.id, ...jumpResult(estimate, estimation, estimates.lineVariance) }
    }),
    pooled: pooledResult(estimates, estimation, lines),
    target: targetResult(estimates, lines),
    ...(comparison.ok
      ? { comparison: { ...comparison.comparison, ...(slope ? { slope } : {}) } }
      : { comparison: null, comparison_reason: comparison.reason }),
    checks: [],
  }
}

export function pooledResult(estimates: MainEstimates, estimation: EstimationPart, lines: readonly Line[]): PooledJump {
  const { pooled } = estimates
  if (hasReason(pooled)) return notEstimated(pooled)
  const variance = lines.length === 1 ? estimates.lineVariance : estimates.pooledVariance
  const jump = jumpResult(pooled, estimation, variance)
  const left = pooled.withoutEffect
  const without = left > 0 ? [`${left} entries of lines without a unit within the bandwidth are left out`] : []
  const all = [...(jump.notes ?? []), ...without, ...estimates.notes]
  const notes = all.length > 0 ? all : undefined
  return { ...jump, ...(notes ? { notes } : {}), weights: weightsByLine(lines, pooled.weights) }
}

export function targetResult(estimates: MainEstimates, lines: readonly Line[]): Target {
  const { target, targetCovers: covers } = estimates
  if (!target.ok) return { not_estimated: target.reason }
  const compared = estimates.compared.map((i) => lines[i])
  return {
    kind: target.kind,
    ...(covers === undefined ? {} : { covers }),
    estimate: target.estimate,
    standard_error: target.standardError,
    low: target.low,
    high: target.high,
    p: target.p,
    weights: weightsByLine(compared, target.weights),
  }
}

function weightsByLine(lines: readonly Line[], weights: Float64Array): Record<string, number> {
  return Object.fromEntries(lines.map((line, i) => [line.id, weights[i]]))
}

function notEstimated({ reason, takeUp }: NoEstimate): NotEstimated {
  return { not_estimated: reason, ...(takeUp ? { take_up: takeUpResult(takeUp) } : {}) }
}

/** Against the estimate without covariates, at bandwidths of its own. */
function covariateResult({ names, coefficients, without }: CovariatesMade, { corrected }: JumpFit): CovariateReport {
  const isUsed = (c: number) => !Number.isNaN(coefficients[c])
  return {
    coefficients: Object.fromEntries(names.flatMap((name, c) => (isUsed(c) ? [[name, coefficients[c]]] : []))),
    left_out: names.filter((_, c) => !isUsed(c)),
    ...(without
      ? {
          moved: corrected.estimate - without.corrected.estimate,
          standard_error_ratio: corrected.standardError / without.corrected.standardError,
        }
      : {}),
  }
}

function weakFirstStage(f: number): string {
  return `take-up jumps weakly, F = ${shown(f)}, under ${leastF}: go by the Anderson–Rubin set, which needs no first stage`
}

function takeUpResult({ eligibility, ratio }: TakeUpMade): TakeUp {
  const { firstStage, f, andersonRubin } = ratio
  const end = (value: number) => (Number.isFinite(value) ? value : null)
  return {
    jump: firstStage.estimate,
    standard_error: firstStage.standardError,
    f: end(f),
    ...(Number.isFinite(f) ? {} : { f_reason: 'all take up what they are assigned to' }),
    anderson_rubin: andersonRubin.map(([low, high]) => [end(low), end(high)]),
    eligibility: { plain: estimateResult(eligibility.plain), corrected: estimateResult(eligibility.corrected) },
  }
}

export function jumpResult(
  { jump, biasAware, takeUp, covariates }: LineEstimate,
  estimation: EstimationPart,
  variance: Variance,
): Jump {
  const notes = [
    ...fewValues(jump, estimation.interval, biasAware),
    ...(takeUp && takeUp.ratio.f < leastF ? [weakFirstStage(takeUp.ratio.f)] : []),
  ]
  return {
    order: estimation.order,
    kernel: estimation.kernel,
    variance,
    ...(jump.clusters === undefined ? {} : { clusters: jump.clusters }),
    ...(jump.effectiveClusters === undefined ? {} : { effective_clusters: jump.effectiveClusters }),
    units_in_bandwidth: jump.unitsInBandwidth,
    bandwidth: jump.bandwidths.h,
    bias_bandwidth: jump.bandwidths.b,
    at_line: jump.atLine,
    plain: estimateResult(jump.plain),
    corrected: estimateResult(jump.corrected),
    ...biasAwareResult(biasAware),
    ...quotedInterval(estimation.interval, jump, biasAware),
    ...(takeUp ? { take_up: takeUpResult(takeUp) } : {}),
    ...(covariates ? { covariates: covariateResult(covariates, takeUp?.eligibility ?? jump) } : {}),
    ...(notes.length > 0 ? { notes } : {}),
  }
}

function biasAwareResult(made: BiasAwareEstimated | undefined): Pick<Jump, 'bias_aware' | 'bias_aware_reason'> {
  if (!made) return {}
  if (!made.ok) return { bias_aware: null, bias_aware_reason: made.reason }
  const { estimate, standardError, worstBias, smoothness, smoothnessFrom, bandwidth, low, high, curve } = made.interval
  const { unitsInBandwidth } = made.interval
  return {
    bias_aware: {
      estimate,
      standard_error: standardError,
      worst_bias: worstBias,
      smoothness,
      smoothness_from: smoothnessFrom === 'rule' ? 'rule' : 'study',
      bandwidth,
      units_in_bandwidth: unitsInBandwidth,
      low,
      high,
      ...(curve.length > 0
        ? { curve: curve.map((one) => ({ smoothness: one.smoothness, low: one.low, high: one.high })) }
        : {}),
    },
  }
}

export function estimateResult(inference: Inference): Estimate {
  const { estimate, degreesOfFreedom, low, high, p } = inference
  const isNormal = degreesOfFreedom === Number.POSITIVE_INFINITY
  return {
    estimate,
    standard_error: inference.standardError,
    degrees_of_freedom: isNormal ? null : degreesOfFreedom,
    ...(isNormal ? { degrees_of_freedom_reason: 'normal reference' } : {}),
    low,
    high,
    p,
  }
}

const fewDistinct = 10

/** Sides with few values within the bandwidth, in words. */
function coarseSides({ distinct }: JumpFit): string[] {
  const sides = (['untreated', 'treated'] as const).filter((name) => distinct[name] < fewDistinct)
  return sides.map((name) => `${distinct[name]} distinct values within the bandwidth on the ${name} side`)
}

/** The bias-aware interval where the study asks for it, or leaves the choice open and the score has few values (METHODS section 5). */
function quotedInterval(
  asked: EstimationPart['interval'],
  jump: JumpFit,
  biasAware: BiasAwareEstimated | undefined,
): Pick<Jump, 'quoted' | 'quoted_because'> {
  if (!biasAware?.ok || asked === 'corrected') return { quoted: 'corrected' }
  if (asked === 'bias-aware') return { quoted: 'bias-aware' }
  const [coarse] = coarseSides(jump)
  return coarse ? { quoted: 'bias-aware', quoted_because: `only ${coarse}` } : { quoted: 'corrected' }
}

/** What few values mean for the interval to go by. */
function fewValues(
  jump: JumpFit,
  asked: EstimationPart['interval'],
  biasAware: BiasAwareEstimated | undefined,
): string[] {
  const allows = 'the bias-aware interval, which allows for what may happen between them'
  const advice = !biasAware?.ok
    ? `the corrected interval does not allow for what may happen between them, and a bias-aware one has not been made${biasAware ? ` (${biasAware.reason})` : ''}`
    : asked === 'corrected'
      ? `the study goes by the corrected interval; beside it is ${allows}`
      : `go by ${allows}`
  return coarseSides(jump).map((values) => `only ${values}: ${advice}`)
}

/** `pieces` are the border's pieces in use, in the order of the lines; none for scores. */
export function lineSummaries(placement: Placement, pieces: readonly Piece[] = []): LineSummary[] {
  const counts = placement.lines.map(() => ({ untreated: 0, treated: 0 }))
  for (let e = 0; e < placement.line.length; e++) {
    counts[placement.line[e]][placement.treated[e] === 1 ? 'treated' : 'untreated']++
  }
  return placement.lines.map((line, i) => ({
    line: line.id,
    label: line.label,
    ...(line.cutoff === undefined ? {} : { cutoff: line.cutoff }),
    ...(line.zones === undefined ? {} : { zones: line.zones }),
    ...(line.piece === undefined ? {} : { piece: line.piece }),
    ...(line.lengthMetres === undefined ? {} : { length_m: line.lengthMetres }),
    ...(pieces[i] ? { straightness: pieces[i].straightness, largest_turn: pieces[i].largestTurnDegrees } : {}),
    ...(line.dose === undefined ? {} : { dose: line.dose }),
    units: counts[i] as BySide,
  }))
}

/** Degrees: a piece that turns by more has a corner (common practice, no source). */
export const cornerTurn = 45

export const hasCorner = (piece: Piece) => piece.largestTurnDegrees > cornerTurn

export function borderResult({ waterfall, layers, conflicts, repeated, border }: BorderFacts): BorderResult {
  const { units, distinct, repeatedShare, most } = repeated()
  const sharesOf = ({ km, shares }: { km: number; shares: readonly number[] }) => ({
    km,
    shares: shares.map((share) => (Number.isNaN(share) ? null : share)),
  })
  return {
    waterfall,
    ...(layers
      ? {
          what_else_changes: {
            layers: layers.layers,
            whole: sharesOf(layers.whole),
            pairs: layers.pairs.map((pair) => ({ zones: pair.zones, ...sharesOf(pair) })),
          },
        }
      : {}),
    ...(conflicts ? { conflicts } : {}),
    corners: {
      points: border.corners.length,
      turn: cornerTurn,
      turning_pieces: border.pieces.filter((piece) => piece.setAside === undefined && hasCorner(piece)).length,
    },
    repeated_points: {
      units,
      distinct,
      ...(Number.isNaN(repeatedShare)
        ? { repeated_share: null, repeated_share_reason: 'no unit has a position' }
        : { repeated_share: repeatedShare }),
      most,
    },
  }
}
