/**
 * Power before the outcome is seen: smallest detectable effects, units needed, and standard errors from assumptions.
 * Source: METHODS section 12; Schochet 2009 (J. Educ. Behav. Stat. 34; IES NCEE 2008-4026) for the design effect of a
 * score; Fan & Gijbels 1996, section 3.2.2, for the variance of a local polynomial at the end of its data.
 */
import type { Kernel } from '../jump/index.js'
import { choleskyInPlace, choleskySolveInPlace, normalCdf, normalQuantile, rootBetween } from '../math/index.js'

/** Power of the two-sided test of no effect at size `alpha`: Φ(δ/se − z) + Φ(−δ/se − z). */
export function powerAt(effect: number, standardError: number, alpha: number): number {
  const z = normalQuantile(1 - alpha / 2)
  const ratio = effect / standardError
  return normalCdf(ratio - z) + normalCdf(-ratio - z)
}

/** The effect that the two-sided test finds with the given power (> alpha), in standard errors: 2.801582 at 80% and 5%. */
export function detectableInStandardErrors(power: number, alpha: number): number {
  if (!(power > alpha && power < 1)) throw new RangeError(`power must lie between alpha and 1: got ${power}`)
  const high = normalQuantile(1 - alpha / 2) + Math.abs(normalQuantile(power)) + 1
  return rootBetween((ratio) => powerAt(ratio, 1, alpha) - power, 0, high, 0)
}

/** Times as many units as now, all else equal, for an effect to be found with the power that `multiple` stands for. */
export function timesTheUnits(effect: number, standardError: number, multiple: number): number {
  return ((multiple * standardError) / effect) ** 2
}

export type ScoreShape = 'normal' | 'uniform'

/**
 * How many times as many units a straight line in the score on both sides needs, against random assignment of the same
 * share: 1/(1 − ρ²), ρ the correlation of score and treatment.
 */
export function scoreDesignEffect(shape: ScoreShape, shareTreated: number): number {
  const spread = shareTreated * (1 - shareTreated)
  const squared = shape === 'uniform' ? 3 * spread : normalDensity(normalQuantile(shareTreated)) ** 2 / spread
  return 1 / (1 - squared)
}

function normalDensity(z: number): number {
  return Math.exp((-z * z) / 2) / Math.sqrt(2 * Math.PI)
}

/** Density at the line of a score of standard deviation 1. */
export function densityAtLine(shape: ScoreShape, shareTreated: number): number {
  return shape === 'uniform' ? 1 / Math.sqrt(12) : normalDensity(normalQuantile(shareTreated))
}

/** What a plan assumes of the units at one line. */
export interface Assumptions {
  readonly units: number
  /** Standard deviation of the outcome around its curve in the score. */
  readonly residualSd: number
  readonly shareTreated: number
  readonly shape: ScoreShape
  /** In standard deviations of the score; absent: all units and a straight line on both sides. */
  readonly bandwidth?: number
  /** Variance constant of the local fit at its end, for one side (`boundaryConstant`). */
  readonly constant: number
  /** Correlation of the outcomes of units of one cluster, and units in it; 0 and 1 without clusters. */
  readonly intraclassCorrelation: number
  readonly clusterSize: number
}

/** Standard error of the jump at one line. */
export function plannedStandardError(assumed: Assumptions): number {
  const { units, residualSd, shareTreated, shape, bandwidth } = assumed
  const clustering = 1 + (assumed.clusterSize - 1) * assumed.intraclassCorrelation
  const atRandom = residualSd ** 2 / (units * shareTreated * (1 - shareTreated))
  const variance =
    bandwidth === undefined
      ? atRandom * scoreDesignEffect(shape, shareTreated)
      : (2 * assumed.constant * residualSd ** 2) / (units * bandwidth * densityAtLine(shape, shareTreated))
  return Math.sqrt(variance * clustering)
}

/**
 * Variance of a local polynomial's level at the end of its data, times n h f / σ²: e'S⁻¹ S* S⁻¹e with S = ∫ r r' K and
 * S* = ∫ r r' K² over [0, 1], r = (1, u, …, u^order). Triangular, order 1: 24/5.
 */
export function boundaryConstant(kernel: Kernel, order: number): number {
  const size = order + 1
  const matrix = new Float64Array(size * size)
  for (let i = 0; i < size; i++)
    for (let j = 0; j < size; j++) matrix[i * size + j] = polynomialIntegral(shapeOf[kernel], i + j)
  choleskyInPlace(matrix, size)
  const level = new Float64Array(size)
  level[0] = 1
  choleskySolveInPlace(matrix, size, level)
  const squared = product(shapeOf[kernel], shapeOf[kernel])
  let constant = 0
  for (let i = 0; i < size; i++)
    for (let j = 0; j < size; j++) constant += level[i] * level[j] * polynomialIntegral(squared, i + j)
  return constant
}

/** Kernels on [0, 1] as polynomials in u, up to a factor, which cancels. */
const shapeOf: Readonly<Record<Kernel, readonly number[]>> = {
  triangular: [1, -1],
  epanechnikov: [1, 0, -1],
  uniform: [1],
}

/** ∫ u^power · polynomial over [0, 1]. */
function polynomialIntegral(coefficients: readonly number[], power: number): number {
  return coefficients.reduce((sum, coefficient, k) => sum + coefficient / (power + k + 1), 0)
}

function product(a: readonly number[], b: readonly number[]): number[] {
  const out = new Array<number>(a.length + b.length - 1).fill(0)
  a.forEach((x, i) => {
    b.forEach((y, j) => {
      out[i + j] += x * y
    })
  })
  return out
}
