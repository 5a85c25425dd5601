/**
 * Variances of a linear estimate Σ l_i y_i, from its residuals or from neighbours.
 * Source: MacKinnon & White 1985 (hc0–hc3); Abadie & Imbens 2006 (neighbours); METHODS section 4.
 * Every variance is a sum of squares of influence values ψ_i (summed within clusters where clustered), and those
 * ψ carry whatever factor the variance has, so that covariances between estimates follow from the same numbers.
 */
import { choleskySolveInPlace, legendreShifted } from '../math/index.js'
import { fittedAt, type LocalFit, weigher } from './localPolynomial.js'
import type { Side } from './sample.js'

export type Variance = 'hc0' | 'hc1' | 'hc2' | 'hc3' | 'neighbours' | 'clusters'

/**
 * Residual factor of each of the first `count` units: ψ_i = l_i · value.
 * hc0, clusters: e_i; hc1: e_i √(n/(n−order−1)), n the units of positive weight; hc2: e_i/√(1−leverage);
 * hc3: e_i/(1−leverage). Units outside the fit's window have leverage 0 and the residual from the fit carried on to them.
 */
export function scaledResiduals(side: Side, fit: LocalFit, count: number, variance: Variance): Float64Array {
  const residuals = new Float64Array(count)
  const size = fit.order + 1
  const basis = new Float64Array(size)
  const solved = new Float64Array(size)
  const weigh = weigher(fit.h, fit.kernel)
  const freedom = fit.count - size
  const scale = variance === 'hc1' ? Math.sqrt(fit.count / freedom) : 1
  const usesLeverage = variance === 'hc2' || variance === 'hc3'
  for (let i = 0; i < count; i++) {
    const residual = side.y[i] - fittedAt(fit, side.t[i], basis)
    if (!usesLeverage || i >= fit.count) {
      residuals[i] = residual * scale
      continue
    }
    legendreShifted(fit.order, side.t[i] / fit.scale, basis)
    solved.set(basis)
    choleskySolveInPlace(fit.factor, size, solved)
    let leverage = 0
    for (let j = 0; j < size; j++) leverage += basis[j] * solved[j]
    leverage *= side.w === null ? weigh(side.t[i]) : weigh(side.t[i]) * side.w[i]
    const left = 1 - leverage
    residuals[i] = variance === 'hc2' ? residual / Math.sqrt(left) : residual / left
  }
  return residuals
}

/** Number of clusters among the units of non-zero weight, and the number of those units. */
export function countClusters(
  weights: readonly Float64Array[],
  sides: readonly Side[],
): { clusters: number; units: number } {
  const seen = new Set<number>()
  let units = 0
  for (let s = 0; s < sides.length; s++) {
    const codes = sides[s].cluster
    if (codes === null) throw new Error('the clustered variance needs cluster codes')
    for (let i = 0; i < weights[s].length; i++) {
      if (weights[s][i] === 0) continue
      units++
      seen.add(codes[i])
    }
  }
  return { clusters: seen.size, units }
}

/** G/(G−1) · (n−1)/(n−k), k = 2(order+1) for the two sides together. */
export function clusterFactor(clusters: number, units: number, order: number): number {
  return ((clusters / (clusters - 1)) * (units - 1)) / (units - 2 * (order + 1))
}
