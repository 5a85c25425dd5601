/**
 * The jump at one point of a border, from a fit in two coordinates on each side.
 * Source: Imbens & Zajonc 2011; Keele & Titiunik 2015; Cattaneo, Titiunik & Yu 2025; METHODS sections 3, 4 and 10.
 * τ̂ = level at the point on the treated side less that on the untreated side = Σ l_i y_i. A distance-only fit is off
 * where the border bends, because the units at one distance then lie in other directions; a fit in both coordinates
 * is exact for every plane, whatever the shape of the border.
 * plain: l from the order-p fit at h. corrected: the estimated bias is taken off, l_bc = l − Σ_k c_k a_k(q, b), q = p+1,
 * over the terms k of degree p+1: c_k is what the order-p level makes of term k, a_k(q, b) the weights of its
 * coefficient in the order-q fit. With b = h the corrected estimate is the order-q level at h.
 */

import { choleskySolveInPlace } from '../math/index.js'
import { type Inference, infer, satterthwaite } from './inference.js'
import { type Influence, influenceByKey, influenceOfUnits, varianceOf } from './influence.js'
import { countWithin, type Kernel, kernelValue } from './kernel.js'
import { biasReducedClusters } from './planeClusters.js'
import {
  addPlaneWeights,
  fitPlane,
  levelFunctional,
  type PlaneFit,
  planeLeverages,
  planeResiduals,
  planeResponse,
  termCount,
} from './planeFit.js'
import { bothSides, type PlaneSample, type PlaneSide } from './planeSample.js'
import type { BySide } from './sample.js'
import { negativeVariance, placesFor } from './spatial.js'
import type { SpatialPlaces } from './spatialPairs.js'
import { clusterFactor, countClusters } from './variance.js'

/** `few-clusters` sets b = h: the corrected estimate is then one regression of order q. */
export type PlaneVariance = 'hc0' | 'hc1' | 'hc2' | 'hc3' | 'clusters' | 'few-clusters' | 'spatial'

export interface PlaneOptions {
  readonly order: number
  readonly kernel: Kernel
  readonly variance: PlaneVariance
  readonly reference: 't' | 'normal'
  readonly level: number
  /** Where the variance is spatial: the units of the table, by row, with the cutoff. */
  readonly spatial?: SpatialPlaces
  /** Units of positive weight that each side needs; 20 by default. */
  readonly smallestSide?: number
}

/** In metres. */
export interface PlaneBandwidths {
  readonly h: BySide<number>
  readonly b: BySide<number>
}

export interface PointJump {
  readonly bandwidths: PlaneBandwidths
  /** Units of positive kernel weight at h. */
  readonly units: BySide<number>
  /** Fitted levels at the point, order p at h. */
  readonly atPoint: BySide<number>
  readonly plain: Inference
  readonly corrected: Inference
  /** Of the corrected estimate; keys are units, or clusters where the variance is clustered. */
  readonly influence: Influence
  readonly clusters?: number
  /** Σ w_i K(r_i/h)/h² over both sides: proportional to the density of units at the point. */
  readonly density: number
}

export type PointEstimated =
  | { readonly ok: true; readonly jump: PointJump }
  | { readonly ok: false; readonly reason: string; readonly units: BySide<number> }

interface SideFit {
  readonly side: PlaneSide
  readonly main: PlaneFit
  readonly bias: PlaneFit
  readonly plain: Float64Array
  readonly corrected: Float64Array
}

const defaultSmallestSide = 20

/** Estimates at given bandwidths; what can't be estimated has a reason that names the side. */
export function jumpAtPoint(sample: PlaneSample, bandwidths: PlaneBandwidths, options: PlaneOptions): PointEstimated {
  const { kernel, variance, smallestSide = defaultSmallestSide } = options
  if (variance === 'few-clusters') bandwidths = { h: bandwidths.h, b: bandwidths.h }
  const units = bothSides((name) => countWithin(sample[name].t, bandwidths.h[name], kernel))
  const sides: SideFit[] = []
  for (const name of ['untreated', 'treated'] as const) {
    const few = units[name] < smallestSide
    const fitted = few
      ? `${units[name]} units within the bandwidth, fewer than ${smallestSide}`
      : fitSide(sample, name, bandwidths, options)
    if (typeof fitted === 'string') return { ok: false, reason: `${name} side: ${fitted}`, units }
    sides.push(fitted)
  }
  const plain = inferenceOf(sides, 'plain', options)
  const corrected = inferenceOf(sides, 'corrected', options)
  if (typeof plain === 'string') return { ok: false, reason: plain, units }
  if (typeof corrected === 'string') return { ok: false, reason: corrected, units }
  const [left, right] = sides
  return {
    ok: true,
    jump: {
      bandwidths,
      units,
      atPoint: {
        untreated: left.main.coefficients[0] + sample.centre,
        treated: right.main.coefficients[0] + sample.centre,
      },
      plain: plain.inference,
      corrected: corrected.inference,
      influence: corrected.influence,
      clusters: corrected.clusters,
      density: densityOf(left) + densityOf(right),
    },
  }
}

function fitSide(
  sample: PlaneSample,
  name: 'untreated' | 'treated',
  bandwidths: PlaneBandwidths,
  options: PlaneOptions,
): SideFit | string {
  const side = sample[name]
  const [h, b] = [bandwidths.h[name], bandwidths.b[name]]
  const sign = name === 'treated' ? 1 : -1
  const p = options.order
  const main = fitPlane(side, p, h, options.kernel)
  if (!main.ok) return main.reason
  const bias = fitPlane(side, p + 1, b, options.kernel)
  if (!bias.ok) return `bias fit: ${bias.reason}`
  const length = Math.max(main.fit.count, bias.fit.count)
  const plain = new Float64Array(length)
  addPlaneWeights(plain, main.fit, levelFunctional(main.fit), sign)
  const corrected = Float64Array.from(plain)
  addPlaneWeights(corrected, bias.fit, biasFunctional(side, main.fit, bias.fit, plain), -1)
  return { side, main: main.fit, bias: bias.fit, plain, corrected }
}

/** The polynomial of Σ_k c_k a_k(q, b), c from the signed weights of the level. Terms are in units of h there, of b here. */
function biasFunctional(side: PlaneSide, main: PlaneFit, bias: PlaneFit, plain: Float64Array): Float64Array {
  const response = planeResponse(side, main, plain)
  const combination = new Float64Array(termCount(bias.order))
  const first = termCount(main.order)
  const rescale = (main.h / bias.h) ** bias.order
  for (let j = 0; j < response.length; j++) combination[first + j] = response[j] * rescale
  choleskySolveInPlace(bias.factor, combination.length, combination)
  return combination
}

/** Residual factor of each unit, as in METHODS section 4: ψ_i = l_i · value. */
function scaledPlaneResiduals(side: PlaneSide, fit: PlaneFit, count: number, variance: PlaneVariance): Float64Array {
  const residual = planeResiduals(side, fit, count)
  if (variance === 'hc1') {
    const factor = Math.sqrt(fit.count / (fit.count - termCount(fit.order)))
    for (let i = 0; i < count; i++) residual[i] *= factor
  }
  if (variance !== 'hc2' && variance !== 'hc3') return residual
  const leverage = planeLeverages(fit)
  for (let i = 0; i < Math.min(count, fit.count); i++) {
    const left = 1 - leverage[i]
    residual[i] /= variance === 'hc2' ? Math.sqrt(left) : left
  }
  return residual
}

interface Spread {
  readonly influence: Influence
  readonly degreesOfFreedom: number
  readonly clusters?: number
}

function inferenceOf(
  sides: readonly SideFit[],
  which: 'plain' | 'corrected',
  options: PlaneOptions,
): (Spread & { inference: Inference }) | string {
  const { reference, level } = options
  const spread = options.variance === 'few-clusters' ? reducedSpread(sides, which) : spreadOf(sides, which, options)
  if (typeof spread === 'string') return spread
  const places = placesFor(options)
  const variance = varianceOf(spread.influence, places)
  if (places && variance < 0) return negativeVariance(places)
  if (!(variance > 0)) return 'the fit leaves no residual on either side'
  let estimate = 0
  for (const part of sides) {
    const l = part[which]
    for (let i = 0; i < l.length; i++) estimate += l[i] * part.side.y[i]
  }
  const freedom = reference === 't' ? spread.degreesOfFreedom : Number.POSITIVE_INFINITY
  return { ...spread, inference: infer(estimate, variance, freedom, level) }
}

/** hc0 to hc3, the spatial and the plain clustered variance. */
function spreadOf(
  sides: readonly SideFit[],
  which: 'plain' | 'corrected',
  { variance, order }: PlaneOptions,
): Spread | string {
  const weights = sides.map((part) => part[which])
  const psi = sides.map((part, s) => {
    const l = weights[s]
    const values = scaledPlaneResiduals(part.side, which === 'plain' ? part.main : part.bias, l.length, variance)
    for (let i = 0; i < l.length; i++) values[i] *= l[i]
    return values
  })
  if (variance !== 'clusters') {
    const units = sides.map(({ side }) => side.unit)
    return { influence: influenceOfUnits(units, psi), degreesOfFreedom: satterthwaite(weights) }
  }
  const counted = countClusters(
    weights,
    sides.map((part) => part.side),
  )
  const { clusters } = counted
  if (clusters < 2) return oneCluster
  // the factor counts the terms of both sides: those of one side, as if they were the terms of one polynomial
  const terms = termCount(which === 'plain' ? order : order + 1)
  const factor = clusterFactor(clusters, counted.units, terms - 1)
  if (!(factor > 0)) return `only ${counted.units} units near the point, too few for a clustered variance`
  for (const side of psi) for (let i = 0; i < side.length; i++) side[i] *= Math.sqrt(factor)
  const codes = sides.map(({ side }) => side.cluster as Int32Array)
  return { influence: influenceByKey(codes, psi), degreesOfFreedom: clusters - 1, clusters }
}

const oneCluster = 'only 1 cluster near the point, a clustered variance needs 2'

function reducedSpread(sides: readonly SideFit[], which: 'plain' | 'corrected'): Spread | string {
  const reduced = biasReducedClusters(
    sides.map((part) => {
      const fit = which === 'plain' ? part.main : part.bias
      return { side: part.side, fit, weights: part[which], residual: planeResiduals(part.side, fit, fit.count) }
    }),
  )
  return typeof reduced !== 'string' && reduced.clusters < 2 ? oneCluster : reduced
}

function densityOf({ side, main }: SideFit): number {
  let total = 0
  for (let i = 0; i < main.count; i++) {
    total += (side.w === null ? 1 : side.w[i]) * kernelValue(main.kernel, side.t[i] / main.h)
  }
  return total / (main.h * main.h)
}
