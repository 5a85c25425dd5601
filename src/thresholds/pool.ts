/**
 * Normalise and pool: all units on the signed distance from their own line, one bandwidth, with or without line
 * fixed effects. Source: Cattaneo, Keele, Titiunik & Vazquez-Bare 2016; METHODS sections 8 and 9.
 * The estimand averages the lines' effects with weights ω̂_c: the share of kernel weight each line supplies.
 */
import {
  type BandwidthChoice,
  type Bandwidths,
  type BySide,
  bandwidthRange,
  bandwidthsFor,
  type JumpFit,
  type JumpOptions,
  jumpAt,
  pilotBandwidth,
  type Sample,
  type Side,
  withOutcomes,
} from '../jump/index.js'
import { fitFixedEffects, kernelWeightByLine } from './fixedEffects.js'

export interface PoolOptions extends JumpOptions {
  readonly bandwidth: BandwidthChoice
  readonly sides: 'common' | 'separate'
  readonly clustered: boolean
  readonly fixedEffects: boolean
  /** Taken out with coefficients common to both sides; by row of the table. */
  readonly covariates?: readonly Float64Array[]
}

export type Pooled =
  | {
      readonly ok: true
      readonly jump: JumpFit
      /** ω̂ of each line, summing to 1. */
      readonly weights: Float64Array
      /** The sample estimated on: fixed effects taken out, lines without weight at h left out. */
      readonly sample: Sample
      /** Entries left out because their line has no unit within the bandwidth (fixed effects only). */
      readonly withoutEffect: number
      /** Of the covariates; NaN where one is constant or a sum of others. */
      readonly coefficients: Float64Array
    }
  | { readonly ok: false; readonly reason: string }

/**
 * Pools a sample whose sides carry `group` (the line of each entry). With fixed effects the bandwidth is chosen on
 * y − γ̂ from the pilot bandwidth, and the estimate made on y − γ̂ from the chosen one; the entries of a line without
 * any unit of positive weight have no γ̂ and are left out of that fit.
 */
export function poolLines(sample: Sample, lines: number, options: PoolOptions): Pooled {
  const pick = (on: Sample) => bandwidthsFor(on, options.bandwidth, options)
  let on = sample
  const isFreed = options.fixedEffects || (options.covariates ?? []).length > 0
  if (isFreed && options.bandwidth.kind === 'rule') {
    const freed = freeAtPilot(sample, lines, options)
    if (!freed.ok) return freed
    on = freed.sample
  }
  const chosen = pick(on)
  if (!chosen.ok) return chosen
  const bandwidths: Bandwidths = chosen.bandwidths
  let used = sample
  let withoutEffect = 0
  let coefficients = new Float64Array(0)
  let weights: Float64Array | undefined
  if (isFreed) {
    const freed = freeOfEffects(sample, bandwidths.h, lines, options)
    if (!freed.ok) return freed
    used = freed.sample
    withoutEffect = freed.dropped
    coefficients = freed.coefficients
    weights = freed.weight
  }
  const estimated = jumpAt(used, bandwidths, { ...options, hasLineLevels: options.fixedEffects })
  if (!estimated.ok) return estimated
  weights ??= kernelWeightByLine(used, bandwidths.h, options.kernel, lines)
  const total = weights.reduce((sum, weight) => sum + weight, 0)
  return {
    ok: true,
    jump: estimated.jump,
    weights: weights.map((weight) => weight / total),
    sample: used,
    withoutEffect,
    coefficients,
  }
}

type Freed =
  | {
      readonly ok: true
      readonly sample: Sample
      readonly dropped: number
      /** Kernel weight of each line at h, where there are line effects. */
      readonly weight?: Float64Array
      readonly coefficients: Float64Array<ArrayBuffer>
    }
  | { readonly ok: false; readonly reason: string }

type FreeOptions = Pick<PoolOptions, 'order' | 'kernel' | 'fixedEffects' | 'covariates'>

/** y − γ̂ from the pilot bandwidth, which bandwidths are chosen on. */
export function freeAtPilot(sample: Sample, lines: number, options: FreeOptions): Freed {
  const pilot = pilotBandwidth(sample, options.kernel, bandwidthRange(sample, options.order))
  return freeOfEffects(sample, { untreated: pilot, treated: pilot }, lines, options)
}

/** y − γ̂ from the fit at h; entries of lines without a unit of positive weight are dropped. */
export function freeOfEffects(sample: Sample, h: BySide<number>, lines: number, options: FreeOptions): Freed {
  const { order, kernel, fixedEffects, covariates = [] } = options
  const fit = fitFixedEffects(sample, h, order, kernel, { lines, fixedEffects, covariates })
  if (!fit.ok) return fit
  const { effects, weight, coefficients } = fit
  const untreated = keepEntries(sample.untreated, (group) => !Number.isNaN(effects[group]))
  const treated = keepEntries(sample.treated, (group) => !Number.isNaN(effects[group]))
  const taken = takenOut(sample, covariates, coefficients)
  const free = (side: Side) => side.y.map((y, i) => y - effects[(side.group as Int32Array)[i]] - taken(side.unit[i]))
  const dropped = sample.untreated.t.length + sample.treated.t.length - untreated.t.length - treated.t.length
  return {
    ok: true,
    sample: withOutcomes({ ...sample, untreated, treated }, free(untreated), free(treated)),
    dropped,
    weight,
    coefficients: Float64Array.from(coefficients),
  }
}

/** Σ γ̂ (z − z̄) of a unit, z̄ over the entries of the sample, so that the level stays. */
function takenOut(
  { untreated, treated }: Sample,
  covariates: readonly Float64Array[],
  coefficients: Float64Array,
): (unit: number) => number {
  const used = covariates.flatMap((values, c) =>
    Number.isNaN(coefficients[c]) ? [] : [{ values, by: coefficients[c] }],
  )
  if (used.length === 0) return () => 0
  const count = untreated.unit.length + treated.unit.length
  const means = used.map(({ values }) => {
    let sum = 0
    for (const side of [untreated, treated]) for (const unit of side.unit) sum += values[unit]
    return sum / count
  })
  return (unit) => {
    let sum = 0
    for (let c = 0; c < used.length; c++) sum += used[c].by * (used[c].values[unit] - means[c])
    return sum
  }
}

function keepEntries(side: Side, keeps: (group: number) => boolean): Side {
  const group = side.group as Int32Array
  const kept: number[] = []
  for (let i = 0; i < group.length; i++) if (keeps(group[i])) kept.push(i)
  if (kept.length === group.length) return side
  const codes = (values: Int32Array) => Int32Array.from(kept, (i) => values[i])
  const numbers = (values: Float64Array) => Float64Array.from(kept, (i) => values[i])
  return {
    t: numbers(side.t),
    y: numbers(side.y),
    w: side.w && numbers(side.w),
    unit: codes(side.unit),
    cluster: side.cluster && codes(side.cluster),
    group: codes(group),
  }
}
