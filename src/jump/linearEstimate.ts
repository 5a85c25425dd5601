/**
 * A jump Σ l_i y_i from fits of the two sides: its value, its variance and the reference distribution.
 * Source: METHODS section 4.
 */
import type { CrossedClusters } from './clustersCrossed.js'
import { clusteredSpread, fewClustersSpread } from './clustersSpread.js'
import { type Inference, infer, satterthwaite } from './inference.js'
import { type Influence, influenceByKey, influenceOfUnits, varianceOf } from './influence.js'
import type { LocalFit } from './localPolynomial.js'
import type { Side } from './sample.js'
import { negativeVariance, placesFor } from './spatial.js'
import type { SpatialPlaces } from './spatialPairs.js'
import { scaledResiduals, type Variance } from './variance.js'

export interface InferenceOptions {
  readonly variance: Variance
  readonly reference: 't' | 'normal'
  readonly level: number
  /** Where the variance is spatial: the units of the table, by row, with the cutoff. */
  readonly spatial?: SpatialPlaces
  /** Two kinds of clusters: the sample's cluster codes are then those of pairs. */
  readonly crossed?: CrossedClusters
  /** Each line of the sample has a level of its own, which `few-clusters` counts as a term. The outcomes may be freed of them. */
  readonly hasLineLevels?: boolean
}

/** One side: l of its first units, and the fit that the residuals come from. */
export interface LinearPart {
  readonly side: Side
  readonly fit: LocalFit
  readonly weights: Float64Array
  /** Set where the variance is from neighbours. */
  readonly neighbours: Float64Array | undefined
}

export interface LinearEstimate {
  readonly inference: Inference
  readonly influence: Influence
  readonly clusters?: number
  /** Worked out when it is asked for. */
  readonly effectiveClusters?: () => number
}

/** From the untreated and the treated part; a string is the reason why there is no standard error. */
export function linearEstimate(
  parts: readonly LinearPart[],
  options: InferenceOptions,
  repeats: boolean,
): LinearEstimate | string {
  const { variance, level } = options
  const spread =
    variance === 'few-clusters'
      ? fewClustersSpread(parts, options.hasLineLevels ?? false)
      : spreadOf(parts, options, repeats)
  if (typeof spread === 'string') return spread
  const places = placesFor(options)
  const squared = varianceOf(spread.influence, places)
  if (places && squared < 0) return negativeVariance(places)
  if (!(squared >= 0)) return 'the variance clustered two ways is negative; cluster by one of the two'
  const freedom = options.reference === 't' ? spread.degreesOfFreedom : Number.POSITIVE_INFINITY
  return { ...spread, inference: infer(spread.estimate, squared, freedom, level) }
}

interface Spread extends Omit<LinearEstimate, 'inference'> {
  readonly estimate: number
  readonly degreesOfFreedom: number
}

function spreadOf(parts: readonly LinearPart[], options: InferenceOptions, repeats: boolean): Spread | string {
  const { variance, crossed } = options
  const weights = parts.map((part) => part.weights)
  let estimate = 0
  const psi = parts.map(({ side, fit, weights: l, neighbours }) => {
    const { y } = side
    let sum = estimate
    for (let i = 0; i < l.length; i++) sum += l[i] * y[i]
    estimate = sum
    const residuals = neighbours ?? scaledResiduals(side, fit, l.length, variance)
    const values = new Float64Array(l.length)
    for (let i = 0; i < l.length; i++) values[i] = l[i] * residuals[i]
    return values
  })
  if (variance === 'clusters') {
    const sides = parts.map((part) => part.side)
    const clustered = clusteredSpread(sides, weights, psi, parts[0].fit.order, crossed)
    return typeof clustered === 'string' ? clustered : { ...clustered, estimate }
  }
  const keys = parts.map((part) => part.side.unit)
  const influence = repeats ? influenceByKey(keys, psi) : influenceOfUnits(keys, psi)
  return { influence, degreesOfFreedom: satterthwaite(weights), estimate }
}
