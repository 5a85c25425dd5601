/**
 * The jump at one line: plain and bias-corrected, with their variances.
 * Source: Calonico, Cattaneo & Titiunik 2014; METHODS sections 2 to 4.
 * τ̂ = Σ l_i y_i, treated less untreated. plain: l = ±a_{0,i}(p,h). corrected: l = ±(a_{0,i}(p,h) − c·a_{p+1,i}(q,b)),
 * q = p+1, c = Σ a_{0,i} x_i^{p+1}. Residuals come from the order-p fit at h, and from the order-q fit at b.
 */
import type { Bandwidths } from './bandwidth.js'
import { type Inference, infer, satterthwaite } from './inference.js'
import { type Influence, influenceByKey, influenceOfUnits, varianceOf } from './influence.js'
import type { Kernel } from './kernel.js'
import { addWeights, coefficientOf, fitLocal, functional, type LocalFit, responseOf } from './localPolynomial.js'
import { neighbourResidualsOf } from './neighbours.js'
import { type BySide, distinctWithin, type Sample, type Side } from './sample.js'
import { negativeVariance, placesFor } from './spatial.js'
import type { SpatialPlaces } from './spatialPairs.js'
import { clusterFactor, countClusters, scaledResiduals, type Variance } from './variance.js'

export interface JumpOptions {
  readonly order: number
  readonly kernel: Kernel
  readonly variance: Variance
  readonly reference: 't' | 'normal'
  readonly level: number
  /** Where the variance is spatial: the units of the table, by row, with the cutoff. */
  readonly spatial?: SpatialPlaces
}

export interface JumpFit {
  readonly bandwidths: Bandwidths
  /** Units of positive kernel weight at h. */
  readonly unitsInBandwidth: BySide<number>
  /** Fitted means at x = 0, order p at h. */
  readonly atLine: BySide<number>
  readonly plain: Inference
  readonly corrected: Inference
  /** Of the corrected estimate. */
  readonly influence: Influence
  readonly clusters?: number
  /** Distinct distances within h, counted to 10. */
  readonly distinct: BySide<number>
  /** The order-p fits at h, for drawing. */
  readonly fits: BySide<LocalFit>
}

export type Estimated = { readonly ok: true; readonly jump: JumpFit } | { readonly ok: false; readonly reason: string }

interface SideFit {
  readonly side: Side
  readonly main: LocalFit
  readonly bias: LocalFit
  readonly plain: Float64Array
  readonly corrected: Float64Array
  /** Set where the variance is from neighbours. */
  readonly neighbours: Float64Array | undefined
}

/**
 * Estimates at given bandwidths; what can't be estimated has a reason that names the side. `neighbours` are the
 * sample's neighbour residuals, where the caller has them.
 */
export function jumpAt(
  sample: Sample,
  bandwidths: Bandwidths,
  options: JumpOptions,
  neighbours?: BySide<Float64Array>,
): Estimated {
  const sides: SideFit[] = []
  const fromNeighbours = options.variance === 'neighbours' ? (neighbours ?? neighbourResidualsOf(sample)) : undefined
  for (const name of ['untreated', 'treated'] as const) {
    const fitted = fitSide(sample, name, bandwidths, options, fromNeighbours?.[name])
    if (typeof fitted === 'string') return { ok: false, reason: `${name} side: ${fitted}` }
    sides.push(fitted)
  }
  if (isConstant(sides)) return { ok: false, reason: 'the outcome is the same for every unit near the line' }
  const plain = inferenceOf(sides, 'plain', options, sample.repeats)
  const corrected = inferenceOf(sides, 'corrected', options, sample.repeats)
  if (typeof plain === 'string') return { ok: false, reason: plain }
  if (typeof corrected === 'string') return { ok: false, reason: corrected }
  const [left, right] = sides
  return {
    ok: true,
    jump: {
      bandwidths,
      unitsInBandwidth: { untreated: left.main.count, treated: right.main.count },
      atLine: {
        untreated: coefficientOf(left.main, 0) + sample.centre,
        treated: coefficientOf(right.main, 0) + sample.centre,
      },
      plain: plain.inference,
      corrected: corrected.inference,
      influence: corrected.influence,
      clusters: corrected.clusters,
      distinct: {
        untreated: distinctWithin(left.side.t, left.main.count, 10),
        treated: distinctWithin(right.side.t, right.main.count, 10),
      },
      fits: { untreated: left.main, treated: right.main },
    },
  }
}

function fitSide(
  sample: Sample,
  name: 'untreated' | 'treated',
  { h, b }: Bandwidths,
  options: JumpOptions,
  neighbours: Float64Array | undefined,
): SideFit | string {
  const side = sample[name]
  const sign = name === 'treated' ? 1 : -1
  const p = options.order
  if (side.t.length === 0) return 'no units'
  const main = fitLocal(side, p, h[name], options.kernel)
  if (!main.ok) return main.reason
  const bias = fitLocal(side, p + 1, b[name], options.kernel)
  if (!bias.ok) return `bias fit: ${bias.reason}`
  const length = Math.max(main.fit.count, bias.fit.count)
  const level = functional(main.fit, 0)
  const plain = new Float64Array(length)
  addWeights(plain, side, main.fit, level, sign)
  const corrected = Float64Array.from(plain)
  addWeights(corrected, side, bias.fit, functional(bias.fit, p + 1), -sign * responseOf(main.fit, level))
  return { side, main: main.fit, bias: bias.fit, plain, corrected, neighbours }
}

function isConstant(sides: readonly SideFit[]): boolean {
  const first = sides[0].side.y[0]
  return sides.every(({ side, plain }) => {
    for (let i = 0; i < plain.length; i++) if (side.y[i] !== first) return false
    return true
  })
}

function inferenceOf(
  sides: readonly SideFit[],
  which: 'plain' | 'corrected',
  options: JumpOptions,
  repeats: boolean,
): { inference: Inference; influence: Influence; clusters?: number } | string {
  const { variance } = options
  const weights = sides.map((part) => part[which])
  const order = which === 'plain' ? options.order : options.order + 1
  let estimate = 0
  const psi = sides.map((part, s) => {
    const l = weights[s]
    for (let i = 0; i < l.length; i++) estimate += l[i] * part.side.y[i]
    const fit = which === 'plain' ? part.main : part.bias
    const residuals = part.neighbours ?? scaledResiduals(part.side, fit, l.length, variance)
    const values = new Float64Array(l.length)
    for (let i = 0; i < l.length; i++) values[i] = l[i] * residuals[i]
    return values
  })
  let degreesOfFreedom = satterthwaite(weights)
  let clusters: number | undefined
  if (variance === 'clusters') {
    const counted = countClusters(
      weights,
      sides.map((part) => part.side),
    )
    clusters = counted.clusters
    if (clusters < 2) return `only ${clusters} cluster near the line, a clustered variance needs 2`
    const factor = clusterFactor(clusters, counted.units, order)
    if (!(factor > 0)) return `only ${counted.units} units near the line, too few for a clustered variance`
    for (const side of psi) for (let i = 0; i < side.length; i++) side[i] *= Math.sqrt(factor)
    degreesOfFreedom = clusters - 1
  }
  const keys = sides.map((part) => (variance === 'clusters' ? (part.side.cluster as Int32Array) : part.side.unit))
  const sumByKey = variance === 'clusters' || repeats
  const influence = sumByKey ? influenceByKey(keys, psi) : influenceOfUnits(keys, psi)
  const places = placesFor(options)
  const spread = varianceOf(influence, places)
  if (places && spread < 0) return negativeVariance(places)
  const reference = options.reference === 't' ? degreesOfFreedom : Number.POSITIVE_INFINITY
  return { inference: infer(estimate, spread, reference, options.level), influence, clusters }
}
