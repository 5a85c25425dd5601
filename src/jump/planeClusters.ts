/**
 * Bias-reduced clustered variance of the jump at a point: few clusters lie near one point, so the plain clustered
 * variance is too small there. The two sides are one weighted regression with a block of terms for each side.
 */
import { type BiasReduced, reducedClusters } from './clustersReduced.js'
import { type PlaneFit, termCount } from './planeFit.js'
import type { PlaneSide } from './planeSample.js'

/** One side: its fit, and by unit of positive weight l (signed) and the residual. */
export interface ClusterPart {
  readonly side: PlaneSide
  readonly fit: PlaneFit
  readonly weights: Float64Array
  readonly residual: Float64Array
}

/** The jump of two sides fitted at one order; every unit of the fits has a cluster code. */
export function biasReducedClusters(parts: readonly ClusterPart[]): BiasReduced | string {
  const size = termCount(parts[0].fit.order)
  const columns = size * parts.length
  const n = parts.reduce((sum, { fit }) => sum + fit.count, 0)
  const rows = new Float64Array(n * columns)
  const [k, l, residual] = [new Float64Array(n), new Float64Array(n), new Float64Array(n)]
  const cluster = new Int32Array(n)
  let filled = 0
  parts.forEach(({ side, fit, weights, residual: left }, s) => {
    if (side.cluster === null) throw new Error('the clustered variance needs cluster codes')
    for (let i = 0; i < fit.count; i++, filled++) {
      rows.set(fit.rows.subarray(i * size, (i + 1) * size), filled * columns + s * size)
      k[filled] = fit.k[i]
      l[filled] = weights[i]
      residual[filled] = left[i]
      cluster[filled] = side.cluster[i]
    }
  })
  return reducedClusters({ columns, rows, k, l, residual, cluster, line: null })
}
