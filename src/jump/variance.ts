/**
 * Variances of a linear estimate Σ l_i y_i, from its residuals or from neighbours.
 * Source: MacKinnon & White 1985 (hc0–hc3); Abadie & Imbens 2006 (neighbours); METHODS section 4.
 * Every variance is a sum of squares of influence values ψ_i (summed within clusters where clustered; where spatial, with
 * the products of neighbours), and those ψ carry whatever factor the variance has, so that covariances between estimates
 * follow from the same numbers.
 */
import { choleskySolveInPlace } from '../math/index.js'
import { kernelCurve, type LocalFit } from './localPolynomial.js'
import type { Side } from './sample.js'
import { evaluate, legendreInZ } from './zPolynomial.js'

export type Variance = 'hc0' | 'hc1' | 'hc2' | 'hc3' | 'neighbours' | 'clusters' | 'few-clusters' | 'spatial'

/**
 * Residual factor of each of the first `count` units: ψ_i = l_i · value.
 * hc0, clusters, spatial: e_i; hc1: e_i √(n/(n−order−1)), n the units of positive weight; hc2: e_i/√(1−leverage);
 * hc3: e_i/(1−leverage). Units outside the fit's window have leverage 0 and the residual from the fit carried on to them.
 */
export function scaledResiduals(side: Side, fit: LocalFit, count: number, variance: Variance): Float64Array {
  const residuals = new Float64Array(count)
  const { t, y, w } = side
  const { scale, polynomial } = fit
  const usesLeverage = variance === 'hc2' || variance === 'hc3'
  const factor = variance === 'hc1' ? Math.sqrt(fit.count / (fit.count - fit.order - 1)) : 1
  for (let i = 0; i < count; i++) residuals[i] = factor * (y[i] - evaluate(polynomial, (2 * t[i]) / scale - 1))
  if (!usesLeverage) return residuals
  const shape = leverageShape(fit)
  const { linear, square } = kernelCurve(fit.h, fit.kernel)
  const within = Math.min(count, fit.count)
  for (let i = 0; i < within; i++) {
    const k = (1 + t[i] * (linear + t[i] * square)) * (w === null ? 1 : w[i])
    const left = 1 - k * evaluate(shape, (2 * t[i]) / scale - 1)
    residuals[i] /= variance === 'hc2' ? Math.sqrt(left) : left
  }
  return residuals
}

/** The leverage of a unit is k_i H(z_i): H = P'G⁻¹P as a polynomial of degree 2·order in z. */
function leverageShape(fit: LocalFit): Float64Array {
  const size = fit.order + 1
  const shape = new Float64Array(2 * fit.order + 1)
  const unit = new Float64Array(size)
  for (let row = 0; row < size; row++) {
    unit.fill(0)
    unit[row] = 1
    const own = legendreInZ(unit)
    choleskySolveInPlace(fit.factor, size, unit)
    const solved = legendreInZ(unit)
    for (let a = 0; a < size; a++) for (let b = 0; b < size; b++) shape[a + b] += own[a] * solved[b]
  }
  return shape
}

/** The clusters among the units of non-zero weight, their number, and the number of those units. */
export function countClusters(
  weights: readonly Float64Array[],
  sides: readonly Side[],
): { met: ReadonlySet<number>; clusters: number; units: number } {
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
  return { met: seen, clusters: seen.size, units }
}

/** G/(G−1) · (n−1)/(n−k), k = 2(order+1) for the two sides together. */
export function clusterFactor(clusters: number, units: number, order: number): number {
  return ((clusters / (clusters - 1)) * (units - 1)) / (units - 2 * (order + 1))
}
