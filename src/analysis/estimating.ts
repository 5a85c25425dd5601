/** All estimates of one outcome: every line, pooled, the target and the comparison of lines. */

import { centroidSuspicion, snapAgainstBandwidth } from '../borders/index.js'
import {
  type Bandwidths,
  type BiasAwareEstimated,
  bandwidthsFor,
  biasAware,
  buildSample,
  covarianceMatrix,
  type Entries,
  type Estimated,
  type Influence,
  type JumpFit,
  type JumpOptions,
  jumpAt,
  neighbourResidualsOf,
  outsideDonut,
  type Sample,
  type SpatialPlaces,
  type TakeUpRatio,
  takeUpRatio,
  type Variance,
  withOutcomes,
} from '../jump/index.js'
import { streamOf, sum } from '../math/index.js'
import type { EstimationPart, Study } from '../study/index.js'
import {
  compareLines,
  type LineEffects,
  type PoolOptions,
  poolBiasAware,
  poolLines,
  targetEffect,
} from '../thresholds/index.js'
import { metresPerUnit } from './border.js'
import { entriesOfLine, type NamedColumn, type OutcomeEntries } from './entries.js'
import type { Placed } from './placing.js'

export interface LineEstimate {
  readonly jump: JumpFit
  readonly sample: Sample
  /** Of the main estimates alone; for another order than 1 it has a reason. */
  readonly biasAware?: BiasAwareEstimated
  /** What covariates did. */
  readonly covariates?: CovariatesMade
  /** With take-up: `jump` is the effect per unit of it, and this the effect of being eligible and the first stage. */
  readonly takeUp?: TakeUpMade
}

export interface CovariatesMade {
  readonly names: readonly string[]
  /** NaN where one is constant or a sum of others. */
  readonly coefficients: Float64Array
  /** The estimate without them; undefined where there is none. */
  readonly without: JumpFit | undefined
}

export interface TakeUpMade {
  readonly eligibility: JumpFit
  readonly ratio: TakeUpRatio
  /** Take-up in place of the outcome, at the same bandwidths. */
  readonly first: LineEstimate
  readonly column: string
}

/** All lines' entries on one distance, sorted; with the donut still in it. */
export interface PoolBasis {
  readonly sample: Sample
  readonly lines: number
  readonly options: PoolOptions
}

export type OrReason<T> = T | NoEstimate

export interface NoEstimate {
  readonly reason: string
  /** Where it is the ratio that is withheld. */
  readonly takeUp?: TakeUpMade
}

interface PooledFacts {
  readonly weights: Float64Array
  readonly withoutEffect: number
  readonly coefficients: Float64Array
}

export interface OutcomeEstimates {
  /** In the order of the placement's lines. */
  readonly lines: readonly OrReason<LineEstimate>[]
  readonly pooled: OrReason<LineEstimate & PooledFacts>
  readonly lineVariance: Variance
  readonly pooledVariance: Variance
  /** What the pooled estimate is made from, to make it again with one thing changed. */
  readonly basis: PoolBasis
  /** Cautions about the pooled estimate that only the study knows of. */
  readonly notes: readonly string[]
  /** Places of the lines that the target and the comparison use. */
  readonly compared: readonly number[]
  readonly effects: LineEffects
  readonly target: ReturnType<typeof targetEffect>
  /** Of all stated shares, the part at `compared` lines. */
  readonly targetCovers?: number
  readonly comparison: ReturnType<typeof compareLines>
}

export function hasReason<T extends object>(value: OrReason<T>): value is NoEstimate {
  return 'reason' in value
}

/** What variants are put beside: no comparison of lines. */
export type MainEstimates = Omit<OutcomeEstimates, 'comparison' | 'effects'>
export type MainWithEffects = MainEstimates & Pick<OutcomeEstimates, 'effects'>

/** Estimates one outcome; `shares` are the target's weights by line where the study states them. */
export function estimateOutcome(
  study: Study,
  placed: Placed,
  entries: OutcomeEntries,
  shares: Float64Array | undefined,
  progress: (done: number) => void,
): OutcomeEstimates {
  const main = estimateMain(study, placed, entries, shares, progress)
  const { level } = study.estimation
  return { ...main, comparison: compareLines(main.effects, { level, random: streamOf(study.seed, 1) }) }
}

/** Lines, pooled and target, and the effects that can be compared. */
export function estimateMain(
  study: Study,
  placed: Placed,
  entries: OutcomeEntries,
  shares: Float64Array | undefined,
  progress: (done: number) => void = () => {},
): MainWithEffects {
  const { placement } = placed
  const hasClusters = placed.cluster !== undefined
  const { lineVariance, pooledVariance } = variancesOf(study, hasClusters)
  const guard = bandwidthGuard(study, placed)
  const { takeUp } = entries
  const lines = placement.lines.map((_, line) => {
    const options = jumpOptions(study.estimation, lineVariance, placed)
    const estimate = guard(lineWithMore(study, entries, line, options))
    progress(line + 1)
    return estimate
  })
  const basis = poolBasis(study, placed, entries, lines.length === 1 ? lineVariance : pooledVariance)
  const pooled = guard(lines.length === 1 ? alone(lines[0]) : pooledWithMore(study, basis, takeUp, entries.covariates))
  const ids = placement.lines.map((line) => line.id)
  const { effects, index } = effectsOf(ids, lines, placed.spatial)
  const target = targetOf(study, effects, index, lines, shares)
  return {
    lines,
    pooled,
    lineVariance,
    pooledVariance,
    basis,
    notes: snapNotes(study, [...lines, pooled]),
    compared: index,
    target,
    ...(shares ? { targetCovers: sum(index.map((i) => shares[i])) / sum(shares) } : {}),
    effects,
  }
}

/**
 * What the variance is where the study does not say: clustered where the units have clusters; else hc2, and
 * for pooled border pieces clustered by piece. `clusters` on a border without clusters: pooled by piece, each piece hc2.
 */
function variancesOf(study: Study, hasClusters: boolean): { lineVariance: Variance; pooledVariance: Variance } {
  const { variance, spatial } = study.estimation
  if (spatial !== undefined) return { lineVariance: 'spatial', pooledVariance: 'spatial' }
  const { line } = study
  const byPiece = (line.kind === 'border' || (line.kind === 'distance' && line.pieces)) && !hasClusters
  if (variance === 'few-clusters') return { lineVariance: hasClusters ? variance : 'hc2', pooledVariance: variance }
  if (variance !== undefined && variance !== 'clusters') return { lineVariance: variance, pooledVariance: variance }
  return {
    lineVariance: hasClusters ? 'clusters' : 'hc2',
    pooledVariance: hasClusters || byPiece ? 'clusters' : 'hc2',
  }
}

/** Withholds an estimate whose bandwidth is too narrow for what is known of the positions. */
function bandwidthGuard(study: Study, placed: Placed): <T extends LineEstimate>(made: OrReason<T>) => OrReason<T> {
  const against = reasonAgainstWidth(study, placed)
  return (made) => {
    if (hasReason(made)) return made
    const reason = against(made.jump.bandwidths.h)
    return reason === undefined ? made : { reason }
  }
}

/** Why a bandwidth is too narrow for what is known of the positions; undefined where it is not. */
export function reasonAgainstWidth(
  { line }: Study,
  { repeated }: Placed,
): (h: { readonly untreated: number; readonly treated: number }) => string | undefined {
  if (line.kind !== 'border' || !repeated) return () => undefined
  const perUnit = metresPerUnit[line.unit]
  return ({ untreated, treated }) => {
    const metres = Math.min(untreated, treated) * perUnit
    if (!(metres < 2 * line.positionError)) return centroidSuspicion(repeated(), metres)
    const width = Number(metres.toPrecision(4))
    return `the bandwidth of ${width} m is under twice the position error of ${line.positionError} m`
  }
}

/** A snap above a fifth of the smallest bandwidth moves the border by too much. */
function snapNotes({ line }: Study, made: readonly OrReason<LineEstimate>[]): string[] {
  if (line.kind !== 'border') return []
  const widths = made.flatMap((one) => (hasReason(one) ? [] : Object.values(one.jump.bandwidths.h)))
  const smallest = Math.min(...widths) * metresPerUnit[line.unit]
  const doubt = smallest < Number.POSITIVE_INFINITY ? snapAgainstBandwidth(line.snap, smallest) : undefined
  return doubt === undefined ? [] : [doubt.says]
}

function jumpOptions(estimation: EstimationPart, variance: Variance, { spatial, crossed }: Placed): JumpOptions {
  const { order, kernel, reference, level } = estimation
  const isCrossed = crossed && variance === 'clusters'
  return {
    order,
    kernel,
    variance,
    reference,
    level,
    ...(spatial ? { spatial } : {}),
    ...(isCrossed ? { crossed } : {}),
  }
}

/** One line, with what covariates and take-up make of it. */
function lineWithMore(
  study: Study,
  entries: OutcomeEntries,
  line: number,
  options: JumpOptions,
): OrReason<LineEstimate> {
  const own = entriesOfLine(entries, line)
  const { takeUp, covariates } = entries
  if (covariates.length > 0) {
    const basis = basisOf(study, { ...own, group: new Int32Array(own.x.length) }, 1, options, covariates)
    return pooledWithMore(study, basis, takeUp, covariates)
  }
  const made = estimateLine(own, study.estimation, options)
  return takeUp ? perTakeUp(made, takeUp, options, (sample, at) => firstOf(sample, jumpAt(sample, at, options))) : made
}

function estimateLine(entries: Entries, estimation: EstimationPart, options: JumpOptions): OrReason<LineEstimate> {
  const { variance } = options
  const sample = buildSample(entries, estimation.donut)
  const clustered = variance === 'clusters' || variance === 'few-clusters'
  const neighbours = variance === 'neighbours' ? neighbourResidualsOf(sample) : undefined
  const chosen = bandwidthsFor(sample, estimation.bandwidth, { ...estimation, clustered }, neighbours)
  if (!chosen.ok) return { reason: chosen.reason }
  const estimated = jumpAt(sample, chosen.bandwidths, options, neighbours)
  if (!estimated.ok) return { reason: estimated.reason }
  const { smoothness } = estimation
  return { jump: estimated.jump, sample, biasAware: biasAware(sample, { ...options, smoothness, multiples: [] }) }
}

/** The pooled estimate without any line's own: what checks need of other outcomes and other lines. */
export function pooledOnly(study: Study, placed: Placed, entries: OutcomeEntries): OutcomeEstimates['pooled'] {
  const { lineVariance, pooledVariance } = variancesOf(study, placed.cluster !== undefined)
  const isOne = placed.placement.lines.length === 1
  const basis = poolBasis(study, placed, entries, isOne ? lineVariance : pooledVariance)
  return bandwidthGuard(study, placed)(estimatePooled(basis, study.estimation.donut))
}

/** One line of entries brought from elsewhere, by the study's options, at given bandwidths or by its rule. */
export function estimateEntries(
  study: Study,
  placed: Placed,
  entries: Entries,
  bandwidths?: Bandwidths,
): OrReason<LineEstimate> {
  const { lineVariance } = variancesOf(study, placed.cluster !== undefined)
  const { estimation } = study
  const options = jumpOptions(estimation, lineVariance, placed)
  if (!bandwidths) return estimateLine(entries, estimation, options)
  const sample = buildSample(entries, estimation.donut)
  const made = jumpAt(sample, bandwidths, options)
  return made.ok ? { jump: made.jump, sample } : { reason: made.reason }
}

function alone(line: OrReason<LineEstimate>): OutcomeEstimates['pooled'] {
  return hasReason(line)
    ? line
    : { ...line, weights: Float64Array.of(1), withoutEffect: 0, coefficients: new Float64Array(0) }
}

/** A single line has no other to differ from: no fixed effect. */
function poolBasis(study: Study, placed: Placed, entries: OutcomeEntries, variance: Variance): PoolBasis {
  const { estimation } = study
  const hasClusters = placed.cluster !== undefined
  const lines = entries.start.length - 1
  const byPiece = (variance === 'clusters' || variance === 'few-clusters') && !hasClusters
  const all = byPiece ? { ...entries.all, cluster: entries.all.group } : entries.all
  return basisOf(study, all, lines, jumpOptions(estimation, variance, placed), entries.covariates)
}

function basisOf(
  { estimation, pooling }: Study,
  entries: Entries,
  lines: number,
  options: JumpOptions,
  covariates: readonly NamedColumn[],
): PoolBasis {
  const { variance } = options
  return {
    sample: buildSample(entries),
    lines,
    options: {
      ...options,
      bandwidth: estimation.bandwidth,
      sides: estimation.sides,
      clustered: variance === 'clusters' || variance === 'few-clusters',
      fixedEffects: pooling.fixedEffects && lines > 1,
      ...(covariates.length > 0 ? { covariates: covariates.map(({ values }) => values) } : {}),
    },
  }
}

/** The pooled estimate with its bias-aware interval, and the curve of that over smoothness; or per unit of take-up. */
function pooledWithMore(
  { estimation }: Study,
  basis: PoolBasis,
  takeUp: NamedColumn | undefined,
  covariates: readonly NamedColumn[],
): OutcomeEstimates['pooled'] {
  const { donut, smoothness } = estimation
  const pooled = estimatePooled(basis, donut)
  if (hasReason(pooled)) return pooled
  const beside =
    covariates.length > 0 ? { covariates: covariatesMade(basis, donut, covariates, pooled.coefficients) } : {}
  if (!takeUp) {
    const sample = outsideDonut(basis.sample, donut)
    const interval = poolBiasAware(sample, basis.lines, { ...basis.options, smoothness })
    return { ...pooled, ...beside, biasAware: interval }
  }
  const made = pooledPerTakeUp(pooled, basis, donut, takeUp)
  return hasReason(made) ? made : { ...pooled, ...beside, ...made }
}

function pooledPerTakeUp(
  pooled: LineEstimate,
  basis: PoolBasis,
  donut: number,
  takeUp: NamedColumn,
): OrReason<LineEstimate> {
  return perTakeUp(pooled, takeUp, basis.options, (_, { h, b }) => {
    const options = { ...basis.options, bandwidth: { kind: 'fixed' as const, ...h, bias: b } }
    const first = estimatePooled({ ...basis, options, sample: withColumn(basis.sample, takeUp) }, donut)
    return first
  })
}

/** The estimate of a basis, per unit of take-up where there is one; nothing beside it. */
export function estimateAgain(
  basis: PoolBasis,
  donut: number,
  takeUp: NamedColumn | undefined,
): OrReason<LineEstimate> {
  const pooled = estimatePooled(basis, donut)
  return hasReason(pooled) || !takeUp ? pooled : pooledPerTakeUp(pooled, basis, donut, takeUp)
}

/** What the estimate of one line is made from: a pool of that line alone, which comes to the same. */
export function basisOfLine(study: Study, placed: Placed, entries: OutcomeEntries, line: number): PoolBasis {
  const own = entriesOfLine(entries, line)
  const { lineVariance } = variancesOf(study, placed.cluster !== undefined)
  const options = jumpOptions(study.estimation, lineVariance, placed)
  return basisOf(study, { ...own, group: new Int32Array(own.x.length) }, 1, options, entries.covariates)
}

/** At bandwidths of its own, the estimate without covariates. */
function covariatesMade(
  basis: PoolBasis,
  donut: number,
  covariates: readonly NamedColumn[],
  coefficients: Float64Array,
): CovariatesMade {
  const { covariates: _, ...options } = basis.options
  const without = estimatePooled({ ...basis, options }, donut)
  return {
    names: covariates.map(({ name }) => name),
    coefficients,
    without: hasReason(without) ? undefined : without.jump,
  }
}

/** Below this first-stage F no ratio is shown. */
export const leastFirstStage = 4

/** The estimate per unit of take-up; withheld where the first stage is too weak for a ratio to mean anything. */
function perTakeUp(
  made: OrReason<LineEstimate>,
  takeUp: NamedColumn,
  { level, spatial }: JumpOptions,
  estimate: (sample: Sample, bandwidths: Bandwidths) => OrReason<LineEstimate>,
): OrReason<LineEstimate> {
  if (hasReason(made)) return made
  const { biasAware: _, ...outcome } = made
  const first = estimate(withColumn(outcome.sample, takeUp), outcome.jump.bandwidths)
  if (hasReason(first)) return { reason: `${takeUp.name}: ${first.reason}` }
  const ratio = takeUpRatio(outcome.jump, first.jump, { level, ...(spatial ? { spatial } : {}) })
  if (typeof ratio === 'string') return { reason: ratio }
  const details = { eligibility: outcome.jump, ratio, first, column: takeUp.name }
  if (!(ratio.f >= leastFirstStage)) {
    const f = Number(ratio.f.toPrecision(3))
    return { reason: `take-up jumps too little for a ratio: F = ${f}, under ${leastFirstStage}`, takeUp: details }
  }
  const { plain, corrected, influence } = ratio
  return { ...outcome, jump: { ...outcome.jump, plain, corrected, influence }, takeUp: details }
}

function firstOf(sample: Sample, made: Estimated): OrReason<LineEstimate> {
  return made.ok ? { jump: made.jump, sample } : { reason: made.reason }
}

/** The same units with another column in place of the outcome. */
function withColumn(sample: Sample, { values }: NamedColumn): Sample {
  const sides = [sample.untreated, sample.treated].map(({ unit }) => Float64Array.from(unit, (row) => values[row]))
  const count = sides[0].length + sides[1].length
  const centre = sides.reduce((sum, side) => side.reduce((total, value) => total + value, sum), 0) / count
  const [untreated, treated] = sides.map((side) => side.map((value) => value - centre))
  return { ...withOutcomes(sample, untreated, treated), centre }
}

/** An estimate as it would be without take-up: the effect of being eligible. */
export function ofEligibility<T extends LineEstimate>(made: OrReason<T>): OrReason<T> {
  if (hasReason(made) || !made.takeUp) return made
  return { ...made, jump: made.takeUp.eligibility }
}

/** Pools the entries with |x| at or above `donut`. */
export function estimatePooled({ sample, lines, options }: PoolBasis, donut: number): OutcomeEstimates['pooled'] {
  const pooled = poolLines(outsideDonut(sample, donut), lines, options)
  return pooled.ok ? pooled : { reason: pooled.reason }
}

/** The lines that can be compared: estimated, with a variance above 0; `index` gives their place among all lines. */
function effectsOf(
  ids: readonly string[],
  lines: readonly OrReason<LineEstimate>[],
  spatial: SpatialPlaces | undefined,
): { effects: LineEffects; index: number[] } {
  const index: number[] = []
  const influences: Influence[] = []
  const estimates: number[] = []
  const freedom: number[] = []
  lines.forEach((line, i) => {
    if (hasReason(line) || !(line.jump.corrected.standardError > 0)) return
    index.push(i)
    influences.push(line.jump.influence)
    estimates.push(line.jump.corrected.estimate)
    freedom.push(line.jump.corrected.degreesOfFreedom)
  })
  const { matrix, isDiagonal } = covarianceMatrix(influences, spatial)
  return {
    effects: {
      ids: index.map((i) => ids[i]),
      estimate: Float64Array.from(estimates),
      covariance: matrix,
      isDiagonal,
      degreesOfFreedom: Float64Array.from(freedom),
    },
    index,
  }
}

function targetOf(
  study: Study,
  effects: LineEffects,
  index: readonly number[],
  lines: readonly OrReason<LineEstimate>[],
  shares: Float64Array | undefined,
): OutcomeEstimates['target'] {
  const { target } = study.pooling
  const { level } = study.estimation
  if (typeof target === 'object') {
    const used = Float64Array.from(index, (i) => (shares as Float64Array)[i])
    return targetEffect(
      effects,
      { kind: 'shares', name: 'column' in target ? target.column : target.value, shares: used },
      level,
    )
  }
  if (target !== 'units') return targetEffect(effects, { kind: target }, level)
  const units = Float64Array.from(index, (i) => {
    const { untreated, treated } = (lines[i] as LineEstimate).jump.unitsInBandwidth
    return untreated + treated
  })
  return targetEffect(effects, { kind: 'units', units }, level)
}
