/** Joins shared paths of a pair of zones into chains, each in one canonical direction. */
import { canonicalRing, comparePaths } from './rings.js'

type Point = readonly [number, number]

/** An unbroken polyline; longitudes run on across the antimeridian. */
export interface Chain {
  readonly points: readonly Point[]
}

/** Ends nearer than about a millimetre are one place. */
const nodesPerDegree = 1e8

/**
 * Paths that meet end to end, where no third one meets them, become one chain. Chains start at their smaller end
 * (by longitude, then latitude; closed ones at their smallest point) and come in that order.
 */
export function joinPaths(paths: readonly (readonly Point[])[]): Chain[] {
  const sorted = paths.map((points) => canonical(points)).sort(comparePaths)
  const nodes = new Map<string, { path: number; isEnd: boolean }[]>()
  sorted.forEach((points, path) => {
    for (const isEnd of [false, true]) {
      const key = nodeKey(isEnd ? points[points.length - 1] : points[0])
      const list = nodes.get(key)
      if (list) list.push({ path, isEnd })
      else nodes.set(key, [{ path, isEnd }])
    }
  })
  const isUsed = sorted.map(() => false)
  const walk = (start: number, fromEnd: boolean): Point[] => {
    const chain: Point[] = []
    let [path, isBackward] = [start, fromEnd]
    for (;;) {
      isUsed[path] = true
      append(chain, isBackward ? [...sorted[path]].reverse() : sorted[path])
      const node = nodes.get(nodeKey(chain[chain.length - 1])) ?? []
      const next = node.length === 2 ? node.find((end) => !isUsed[end.path]) : undefined
      if (!next) return chain
      path = next.path
      isBackward = next.isEnd
    }
  }
  const chains: Point[][] = []
  const isLoose = (point: Point) => nodes.get(nodeKey(point))?.length !== 2
  sorted.forEach((points, path) => {
    if (!isUsed[path] && isLoose(points[0])) chains.push(walk(path, false))
    if (!isUsed[path] && isLoose(points[points.length - 1])) chains.push(walk(path, true))
  })
  sorted.forEach((_, path) => {
    if (!isUsed[path]) chains.push(walk(path, false))
  })
  return chains
    .map(canonical)
    .sort(comparePaths)
    .map((points) => ({ points }))
}

function nodeKey([lon, lat]: Point): string {
  const turn = 360 * nodesPerDegree
  const around = ((Math.round(lon * nodesPerDegree) % turn) + turn) % turn
  return `${around} ${Math.round(lat * nodesPerDegree)}`
}

/** Adds a path that begins where the chain ends, without repeating that point, on the same turn of the globe. */
function append(chain: Point[], path: readonly Point[]): void {
  const last = chain[chain.length - 1]
  const shift = last ? Math.round((last[0] - path[0][0]) / 360) * 360 : 0
  for (let i = last ? 1 : 0; i < path.length; i++) chain.push([path[i][0] + shift, path[i][1]])
}

function canonical(points: readonly Point[]): readonly Point[] {
  const [first, last] = [points[0], points[points.length - 1]]
  if (points.length > 3 && first[0] === last[0] && first[1] === last[1]) {
    return canonicalRing(points, false).positions as readonly Point[]
  }
  const west = Math.min(first[0], last[0])
  const shift = -Math.floor((west + 180) / 360) * 360
  const forward: Point[] = shift === 0 ? [...points] : points.map(([lon, lat]) => [lon + shift, lat])
  const backward = [...forward].reverse()
  return comparePaths(forward, backward) <= 0 ? forward : backward
}
