/**
 * Influence values of an estimate, and covariances between estimates as sums of their products over shared keys.
 * Source: METHODS section 4, "Influence". A key is a unit, or a cluster where the variance is clustered; where it is
 * spatial, products of neighbouring units count too.
 * Pooling, contrasts, homogeneity tests and targets are all built on this one idea, so units that serve two lines and
 * clusters that straddle lines are accounted for everywhere.
 */

import { shrinkToDefinite } from './definite.js'
import { spatialCovariance, spatialVariance } from './spatial.js'
import type { SpatialPlaces } from './spatialPairs.js'

/** Parallel arrays; every key once, with the sum of ψ over its entries. Keys whose ψ are all 0 may be absent. */
export interface Influence {
  readonly key: Int32Array
  readonly psi: Float64Array
  /**
   * Where two kinds of clusters cross: the influence by cluster of each kind. Key and psi are then those of pairs, and
   * covariances are V_1 + V_2 − V_12 (clustersCrossed.ts).
   */
  readonly crossed?: { readonly first: Influence; readonly second: Influence }
}

/** Joins the sides of an estimate whose keys are all different: no summing is needed. */
export function influenceOfUnits(keys: readonly Int32Array[], psi: readonly Float64Array[]): Influence {
  const length = psi.reduce((sum, side) => sum + side.length, 0)
  const key = new Int32Array(length)
  const all = new Float64Array(length)
  let filled = 0
  for (let s = 0; s < psi.length; s++) {
    for (let i = 0; i < psi[s].length; i++) {
      if (psi[s][i] === 0) continue
      key[filled] = keys[s][i]
      all[filled++] = psi[s][i]
    }
  }
  return { key: key.subarray(0, filled), psi: all.subarray(0, filled) }
}

/** Sums ψ by key, for clusters and for units with several entries; keys ascending. */
export function influenceByKey(keys: readonly Int32Array[], psi: readonly Float64Array[]): Influence {
  let largest = -1
  let length = 0
  for (let s = 0; s < psi.length; s++) {
    for (let i = 0; i < psi[s].length; i++) largest = Math.max(largest, keys[s][i])
    length += psi[s].length
  }
  if (largest <= 4 * length) return sumDensely(keys, psi, largest + 1)
  const sums = new Map<number, number>()
  for (let s = 0; s < psi.length; s++) {
    for (let i = 0; i < psi[s].length; i++) sums.set(keys[s][i], (sums.get(keys[s][i]) ?? 0) + psi[s][i])
  }
  const key = Int32Array.from(sums.keys()).sort()
  return { key, psi: Float64Array.from(key, (k) => sums.get(k) as number) }
}

function sumDensely(keys: readonly Int32Array[], psi: readonly Float64Array[], size: number): Influence {
  const sums = new Float64Array(size)
  for (let s = 0; s < psi.length; s++) for (let i = 0; i < psi[s].length; i++) sums[keys[s][i]] += psi[s][i]
  const key = new Int32Array(size)
  let filled = 0
  for (let k = 0; k < size; k++) if (sums[k] !== 0) key[filled++] = k
  const used = key.subarray(0, filled)
  return { key: used, psi: Float64Array.from(used, (k) => sums[k]) }
}

/**
 * Variance: the covariance of an estimate with itself. With places, keys are rows of the table and products of
 * neighbouring units count too; then, and where clusters cross, it may be negative.
 */
export function varianceOf(influence: Influence, spatial?: SpatialPlaces): number {
  const { psi, crossed } = influence
  if (crossed) return sumOfSquares(crossed.first.psi) + sumOfSquares(crossed.second.psi) - sumOfSquares(psi)
  return spatial ? spatialVariance(influence, spatial) : sumOfSquares(psi)
}

/** Σ ψ², in blocks of 4,096. */
export function sumOfSquares(psi: Float64Array): number {
  let total = 0
  for (let start = 0; start < psi.length; start += 4096) {
    const end = Math.min(psi.length, start + 4096)
    let part = 0
    for (let i = start; i < end; i++) part += psi[i] * psi[i]
    total += part
  }
  return total
}

/**
 * Covariance matrix of several estimates, row-major L×L. Work goes with the number of shared keys, so thousands of
 * lines without shared keys cost no more than their own influence values. With places, keys are rows of the table and
 * work goes with the pairs of neighbours. Where clusters cross in one, they do in all.
 */
export function covarianceMatrix(
  influences: readonly Influence[],
  spatial?: SpatialPlaces,
): { matrix: Float64Array; isDiagonal: boolean } {
  if (spatial) return spatialCovariance(influences, spatial)
  const crossed = influences.flatMap((influence) => influence.crossed ?? [])
  if (crossed.length > 0) return crossedCovariance(influences, crossed)
  const count = influences.length
  if (count === 1) return { matrix: Float64Array.of(varianceOf(influences[0])), isDiagonal: true }
  const matrix = new Float64Array(count * count)
  const { keys, distinct } = inOrderMet(influences)
  const start = new Int32Array(distinct + 1)
  for (const key of keys) for (const k of key) start[k + 1]++
  for (let k = 0; k < distinct; k++) start[k + 1] += start[k]
  const next = start.slice()
  const holder = new Int32Array(start[distinct])
  const value = new Float64Array(holder.length)
  for (let line = 0; line < count; line++) {
    const { psi } = influences[line]
    const key = keys[line]
    for (let i = 0; i < key.length; i++) {
      const at = next[key[i]]++
      holder[at] = line
      value[at] = psi[i]
    }
    matrix[line * count + line] = varianceOf(influences[line])
  }
  let isDiagonal = true
  for (let k = 0; k < distinct; k++) {
    for (let a = start[k]; a < start[k + 1]; a++) {
      for (let b = start[k]; b < a; b++) {
        isDiagonal = false
        matrix[holder[a] * count + holder[b]] += value[a] * value[b]
        matrix[holder[b] * count + holder[a]] += value[a] * value[b]
      }
    }
  }
  return { matrix, isDiagonal }
}

/**
 * Keys numbered as they are first met. Sums over keys then run in an order that the distances from the line decide, not
 * the rows of a file, so that reordering rows cannot change a single bit.
 */
function inOrderMet(influences: readonly Influence[]): { readonly keys: Int32Array[]; readonly distinct: number } {
  let largest = -1
  for (const { key } of influences) for (const k of key) if (k > largest) largest = k
  const number = new Int32Array(largest + 1).fill(-1)
  let distinct = 0
  const keys = influences.map(({ key }) =>
    key.map((k) => {
      if (number[k] < 0) number[k] = distinct++
      return number[k]
    }),
  )
  return { keys, distinct }
}

/** V_1 + V_2 − V_12, covariances shrunk by the least that leaves no combination a negative variance. */
function crossedCovariance(
  influences: readonly Influence[],
  crossed: readonly { readonly first: Influence; readonly second: Influence }[],
): { matrix: Float64Array; isDiagonal: boolean } {
  if (crossed.length !== influences.length) throw new Error('clusters cross in some of the estimates only')
  const first = covarianceMatrix(crossed.map((one) => one.first))
  const second = covarianceMatrix(crossed.map((one) => one.second))
  const both = covarianceMatrix(influences.map(({ key, psi }) => ({ key, psi })))
  const matrix = first.matrix.map((value, i) => value + second.matrix[i] - both.matrix[i])
  const isDiagonal = first.isDiagonal && second.isDiagonal
  if (!isDiagonal) shrinkToDefinite(matrix, influences.length)
  return { matrix, isDiagonal }
}
