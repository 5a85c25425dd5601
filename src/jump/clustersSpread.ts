/**
 * The clustered variances of a linear estimate: plain, two-way, and bias-reduced for few clusters. METHODS section 4.
 */
import { type CrossedClusters, countKind, influenceByKind } from './clustersCrossed.js'
import { effectiveClusters } from './clustersEffective.js'
import { jointFit, type SideWindow } from './clustersJoint.js'
import { reducedClusters } from './clustersReduced.js'
import { type Influence, influenceByKey } from './influence.js'
import type { Side } from './sample.js'
import { clusterFactor, countClusters } from './variance.js'

export interface ClusteredSpread {
  readonly influence: Influence
  readonly degreesOfFreedom: number
  /** Of the kind that has fewer, where two cross. */
  readonly clusters: number
  readonly effectiveClusters: () => number
}

/** From l and l times the residual, by side; two-way with `crossed`. A string is the reason why there is none. */
export function clusteredSpread(
  sides: readonly Side[],
  weights: readonly Float64Array[],
  psi: readonly Float64Array[],
  order: number,
  crossed: CrossedClusters | undefined,
): ClusteredSpread | string {
  const { met, units } = countClusters(weights, sides)
  const codes = sides.map((side) => side.cluster as Int32Array)
  const scaled = (influence: Influence, clusters: number): Influence => {
    const root = Math.sqrt(clusterFactor(clusters, units, order))
    return { key: influence.key, psi: influence.psi.map((value) => value * root) }
  }
  const kinds = crossed ? [crossed.first, crossed.second] : []
  const counts = crossed ? kinds.map((kind) => countKind(met, kind)) : [met.size]
  const clusters = Math.min(...counts)
  if (clusters < 2) return `only ${clusters} cluster near the line, a clustered variance needs 2`
  if (!(clusterFactor(clusters, units, order) > 0)) {
    return `only ${units} units near the line, too few for a clustered variance`
  }
  const own = influenceByKey(codes, psi)
  const [first, second] = kinds.map((kind, i) => scaled(influenceByKind(own, kind), counts[i]))
  const byCode = scaled(own, met.size)
  return {
    influence: crossed ? { ...byCode, crossed: { first, second } } : byCode,
    degreesOfFreedom: clusters - 1,
    clusters,
    effectiveClusters: () =>
      crossed
        ? Math.min(...kinds.map((kind) => effectiveClusters(weights, codes, kind)))
        : effectiveClusters(weights, codes),
  }
}

/** The estimate and its bias-reduced variance from one regression of both sides. */
export function fewClustersSpread(
  windows: readonly SideWindow[],
  hasLineLevels: boolean,
): (ClusteredSpread & { readonly estimate: number }) | string {
  const joint = jointFit(windows, hasLineLevels)
  if (typeof joint === 'string') return joint
  const cluster = clustersWithin(windows)
  const reduced = reducedClusters({ ...joint.regression, cluster })
  if (typeof reduced === 'string') return reduced
  if (reduced.clusters < 2) return 'only 1 cluster near the line, a clustered variance needs 2'
  const codes = windows.map(({ side }) => side.cluster as Int32Array)
  return { ...reduced, estimate: joint.estimate, effectiveClusters: () => effectiveClusters(joint.weights, codes) }
}

function clustersWithin(windows: readonly SideWindow[]): Int32Array {
  const cluster = new Int32Array(windows.reduce((sum, { fit }) => sum + fit.count, 0))
  let filled = 0
  for (const { side, fit } of windows) {
    if (side.cluster === null) throw new Error('the clustered variance needs cluster codes')
    cluster.set(side.cluster.subarray(0, fit.count), filled)
    filled += fit.count
  }
  return cluster
}
