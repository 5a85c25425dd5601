/**
 * The jump at one line: plain and bias-corrected, with their variances.
 * Source: Calonico, Cattaneo & Titiunik 2014; METHODS sections 2 to 4.
 * τ̂ = Σ l_i y_i, treated less untreated. plain: l = ±a_{0,i}(p,h). corrected: l = ±(a_{0,i}(p,h) − c·a_{p+1,i}(q,b)),
 * q = p+1, c = Σ a_{0,i} x_i^{p+1}. Residuals come from the order-p fit at h, and from the order-q fit at b.
 */
import type { Bandwidths } from './bandwidth.js'
import type { Inference } from './inference.js'
import type { Influence } from './influence.js'
import type { Kernel } from './kernel.js'
import { type InferenceOptions, type LinearEstimate, linearEstimate } from './linearEstimate.js'
import { addWeights, coefficientOf, fitLocal, functional, type LocalFit, responseOf } from './localPolynomial.js'
import { neighbourResidualsOf } from './neighbours.js'
import { type BySide, distinctWithin, type Sample, type Side } from './sample.js'

export interface JumpOptions extends InferenceOptions {
  readonly order: number
  readonly kernel: Kernel
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
  readonly plainInfluence: Influence
  /** Of the corrected estimate; where two kinds of clusters cross, of the kind that has fewer. */
  readonly clusters?: number
  /** By the weights of the corrected estimate (clustersEffective.ts). */
  readonly effectiveClusters?: number
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
 * sample's neighbour residuals, where the caller has them. `few-clusters` sets b = h: the corrected estimate is then one
 * regression of order q; where lines have levels of their own, with those levels fitted in it.
 */
export function jumpAt(
  sample: Sample,
  bandwidths: Bandwidths,
  options: JumpOptions,
  neighbours?: BySide<Float64Array>,
): Estimated {
  const sides: SideFit[] = []
  if (options.variance === 'few-clusters') bandwidths = { h: bandwidths.h, b: bandwidths.h }
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
      plainInfluence: plain.influence,
      clusters: corrected.clusters,
      effectiveClusters: corrected.effectiveClusters?.(),
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
): LinearEstimate | string {
  const parts = sides.map(({ side, main, bias, neighbours, ...weights }) => ({
    side,
    fit: which === 'plain' ? main : bias,
    weights: weights[which],
    neighbours,
  }))
  return linearEstimate(parts, options, repeats)
}
