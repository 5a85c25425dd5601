/**
 * Clusters of two kinds that cross, such as units and pieces, or states and borders.
 * Source: Cameron, Gelbach & Miller 2011, Journal of Business & Economic Statistics: V = V_1 + V_2 − V_12, each with the
 * factor G/(G−1) · (n−1)/(n−k) of its own number of clusters (METHODS section 4). A unit's cluster code stands for the pair
 * of its clusters; tables say which cluster of each kind a pair belongs to.
 */
import { type Influence, influenceByKey } from './influence.js'

/** By code of a pair. */
export interface CrossedClusters {
  readonly first: Int32Array
  readonly second: Int32Array
}

/** Codes of the pairs met (>= 0, in the order of the two codes), and what they stand for. */
export function crossClusters(
  first: Int32Array,
  second: Int32Array,
): { readonly cluster: Int32Array; readonly crossed: CrossedClusters } {
  if (first.length !== second.length) {
    throw new RangeError(`${first.length} units have a first cluster, ${second.length} a second`)
  }
  let width = 1
  for (const code of second) width = Math.max(width, code + 1)
  const met = new Set<number>()
  for (let i = 0; i < first.length; i++) met.add(first[i] * width + second[i])
  const pairs = Float64Array.from(met).sort()
  const place = new Map<number, number>()
  pairs.forEach((pair, code) => {
    place.set(pair, code)
  })
  return {
    cluster: Int32Array.from(first, (code, i) => place.get(code * width + second[i]) as number),
    crossed: {
      first: Int32Array.from(pairs, (pair) => Math.floor(pair / width)),
      second: Int32Array.from(pairs, (pair) => pair % width),
    },
  }
}

/** Sums influence values by pair (without a factor) into those by one kind of cluster. */
export function influenceByKind({ key, psi }: Influence, kind: Int32Array): Influence {
  return influenceByKey([Int32Array.from(key, (pair) => kind[pair])], [psi])
}

/** Clusters of one kind among pairs. */
export function countKind(pairs: ReadonlySet<number>, kind: Int32Array): number {
  const met = new Set<number>()
  for (const pair of pairs) met.add(kind[pair])
  return met.size
}
