/**
 * Jumps at points along a border: a curve of effects with pointwise and uniform bands, and its averages.
 * Source: Keele & Titiunik 2015; Imbens & Zajonc 2011; Cattaneo, Titiunik & Yu 2025; METHODS section 10.
 * Everything uses the corrected estimates and their influences, so units and clusters that serve several points are
 * accounted for in the uniform band and in the averages.
 */
import {
  buildPlaneSample,
  covarianceMatrix,
  jumpAtPoint,
  type PlaneBandwidths,
  type PlaneEntries,
  type PlaneOptions,
  type PointEstimated,
  type PointJump,
  pickCodes,
  pickNumbers,
} from '../jump/index.js'
import { normalUpper, type Random, studentQuantile } from '../math/index.js'
import { checkLevel, type LineEffects } from './effects.js'
import { largestQuantile } from './maximum.js'
import { type TargetEffect, targetEffect } from './targets.js'

/** Units near a point: their places in the arrays of `AlongUnits`, each once, and where they lie. */
export interface UnitsNearPoint {
  readonly index: Int32Array
  readonly eastMetres: Float64Array
  readonly northMetres: Float64Array
}

/** The units placed on the border; arrays of equal length. */
export interface AlongUnits {
  /** The units within a distance of a point, given by its place in the list of points. */
  readonly near: (point: number, radiusMetres: number) => UnitsNearPoint
  /** Key of the unit: its row. */
  readonly unit: Int32Array
  /** 1 on the treated side; not looked at for points that name their zones. */
  readonly treated: Uint8Array
  /** NaN: no outcome, or left out for another reason. */
  readonly y: Float64Array
  /** Sampling weights > 0. */
  readonly w?: Float64Array
  /** Cluster codes >= 0. */
  readonly cluster?: Int32Array
  /** Zone codes; needed where points name their zones. */
  readonly zone?: Int32Array
}

export interface AlongPoint {
  /** Unique text, for messages. */
  readonly id: string
  /** The stretch of border that the point stands for, in metres. */
  readonly lengthMetres: number
  /** Where given, only units of these zones count, and they decide the side (a border between doses). */
  readonly zones?: readonly [untreated: number, treated: number]
}

export interface AlongOptions extends PlaneOptions {
  readonly bandwidths: PlaneBandwidths
  /** Draws the critical value of the uniform band. */
  readonly random: Random
  /** 20,000 by default. */
  readonly draws?: number
}

export type AlongEstimate =
  | { readonly ok: true; readonly jump: PointJump; readonly uniformLow: number; readonly uniformHigh: number }
  | Extract<PointEstimated, { ok: false }>

export interface Along {
  /** In the order of the points. */
  readonly points: readonly AlongEstimate[]
  /** Weighted means of the effects over the points that have one; weights are given for those alone, and taken as known. */
  readonly average: {
    /** By the length of border each point stands for. */
    readonly length: TargetEffect
    /** By length times the density of units at the point: the mean over units at the border. */
    readonly density: TargetEffect
  }
  /** Standard errors that the uniform band reaches under the normal reference; absent where no point has an estimate. */
  readonly criticalValue?: number
}

/**
 * Estimates every point. A point with too few units on a side, or none that can be fitted, has a reason.
 * The uniform band covers the whole curve with probability `level`: with c the quantile of the largest |t|, each point gets
 * its interval at the level that c has for it alone, from t with its own degrees of freedom where the reference is t.
 */
export function estimateAlong(points: readonly AlongPoint[], units: AlongUnits, options: AlongOptions): Along {
  const { level, random, draws = 20_000 } = options
  checkLevel(level)
  if (!(Number.isInteger(draws) && draws > 0))
    throw new RangeError(`the number of draws must be positive, not ${draws}`)
  const { h, b } = options.bandwidths
  const radius = Math.max(h.untreated, h.treated, b.untreated, b.treated)
  const estimated = points.map((point, i) =>
    jumpAtPoint(buildPlaneSample(entriesNear(units, point, units.near(i, radius))), options.bandwidths, options),
  )
  const usable = points.flatMap((point, i) => {
    const at = estimated[i]
    return at.ok ? [{ point, jump: at.jump }] : []
  })
  if (usable.length === 0) {
    const none = { ok: false, reason: 'no point has an estimate' } as const
    return { points: estimated as Extract<PointEstimated, { ok: false }>[], average: { length: none, density: none } }
  }
  const effects = effectsOf(usable, options)
  const criticalValue = largestQuantile(effects, level, random, draws)
  const averageBy = (name: string, shares: Float64Array) =>
    targetEffect(effects, { kind: 'shares', name, shares }, level)
  return {
    points: estimated.map((at) => (at.ok ? { ...at, ...uniformBand(at.jump, criticalValue) } : at)),
    average: {
      length: averageBy(
        'length',
        Float64Array.from(usable, ({ point }) => point.lengthMetres),
      ),
      density: averageBy(
        'density',
        Float64Array.from(usable, ({ point, jump }) => point.lengthMetres * jump.density),
      ),
    },
    criticalValue,
  }
}

/** The units near a point that count there, with their sides. */
function entriesNear(units: AlongUnits, { zones, id }: AlongPoint, near: UnitsNearPoint): PlaneEntries {
  if (zones && !units.zone) throw new Error(`point ${id} names its zones, but the units have none`)
  const { index } = near
  const kept = new Int32Array(index.length)
  const side = new Uint8Array(index.length)
  let count = 0
  for (let i = 0; i < index.length; i++) {
    const at = index[i]
    const sideOf = zones && units.zone ? zones.indexOf(units.zone[at]) : units.treated[at]
    if (sideOf < 0 || !Number.isFinite(units.y[at])) continue
    side[count] = sideOf
    kept[count++] = i
  }
  const places = kept.subarray(0, count)
  const rows = places.map((i) => index[i])
  return {
    eastMetres: pickNumbers(near.eastMetres, places),
    northMetres: pickNumbers(near.northMetres, places),
    treated: side.subarray(0, count),
    unit: pickCodes(units.unit, rows),
    y: pickNumbers(units.y, rows),
    w: units.w && pickNumbers(units.w, rows),
    cluster: units.cluster && pickCodes(units.cluster, rows),
  }
}

function effectsOf(
  usable: readonly { readonly point: AlongPoint; readonly jump: PointJump }[],
  { variance, spatial }: AlongOptions,
): LineEffects {
  const influences = usable.map(({ jump }) => jump.influence)
  const { matrix, isDiagonal } = covarianceMatrix(influences, variance === 'spatial' ? spatial : undefined)
  return {
    ids: usable.map(({ point }) => point.id),
    estimate: Float64Array.from(usable, ({ jump }) => jump.corrected.estimate),
    covariance: matrix,
    isDiagonal,
  }
}

function uniformBand({ corrected }: PointJump, criticalValue: number): { uniformLow: number; uniformHigh: number } {
  const { estimate, standardError, degreesOfFreedom } = corrected
  const isNormal = degreesOfFreedom === Number.POSITIVE_INFINITY
  const quantile = isNormal ? criticalValue : studentQuantile(1 - normalUpper(criticalValue), degreesOfFreedom)
  return { uniformLow: estimate - quantile * standardError, uniformHigh: estimate + quantile * standardError }
}
