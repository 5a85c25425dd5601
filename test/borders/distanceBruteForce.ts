import { geodesicMetres } from '../../src/borders/geodesy.js'
import type { Edges } from '../../src/borders/segmentTree.js'

/**
 * The slow truth: Karney's inverse problem (geographiclib-geodesic) at many places along every edge, then golden section
 * around each place that may hold the least. Golden section finds the least value to rounding, about 1e-8 m.
 */

export function edgesOf(list: readonly (readonly [number, number, number, number])[]): Edges {
  const column = (at: number): Float64Array => Float64Array.from(list, (edge) => edge[at])
  return { lon0: column(0), lat0: column(1), lon1: column(2), lat1: column(3) }
}

/** Edges from each position to the next. */
export function lineOf(line: readonly (readonly [number, number])[]): Edges {
  return edgesOf(line.slice(1).map((to, k) => [line[k][0], line[k][1], to[0], to[1]] as const))
}

export function distanceAt(edges: Edges, edge: number, fraction: number, lon: number, lat: number): number {
  const { lon0, lat0, lon1, lat1 } = edges
  return geodesicMetres(
    lon,
    lat,
    lon0[edge] + fraction * (lon1[edge] - lon0[edge]),
    lat0[edge] + fraction * (lat1[edge] - lat0[edge]),
  )
}

export function bruteForceMetres(edges: Edges, lon: number, lat: number, samples: number): number {
  const coarse: { edge: number; k: number; metres: number; reach: number }[] = []
  let leastCoarse = Infinity
  for (let edge = 0; edge < edges.lon0.length; edge++) {
    const metres = Array.from({ length: samples + 1 }, (_, k) => distanceAt(edges, edge, k / samples, lon, lat))
    for (let k = 0; k <= samples; k++) {
      leastCoarse = Math.min(leastCoarse, metres[k])
      const before = k > 0 ? metres[k - 1] : Infinity
      const after = k < samples ? metres[k + 1] : Infinity
      if (metres[k] > before || metres[k] > after) continue
      // no point between the samples can be nearer than the sample less the way to it
      const reach = geodesicMetres(
        edges.lon0[edge],
        edges.lat0[edge],
        edges.lon0[edge] + (edges.lon1[edge] - edges.lon0[edge]) / samples,
        edges.lat0[edge] + (edges.lat1[edge] - edges.lat0[edge]) / samples,
      )
      coarse.push({ edge, k, metres: metres[k], reach: 2 * reach })
    }
  }
  let least = leastCoarse
  for (const { edge, k, metres, reach } of coarse) {
    if (metres - reach > leastCoarse) continue
    const from = Math.max(0, (k - 1) / samples)
    const to = Math.min(1, (k + 1) / samples)
    least = Math.min(
      least,
      goldenLeast((t) => distanceAt(edges, edge, t, lon, lat), from, to),
    )
  }
  return least
}

function goldenLeast(f: (t: number) => number, from: number, to: number): number {
  const ratio = (Math.sqrt(5) - 1) / 2
  let left = to - ratio * (to - from)
  let right = from + ratio * (to - from)
  let atLeft = f(left)
  let atRight = f(right)
  for (let step = 0; step < 45; step++) {
    if (atLeft < atRight) {
      to = right
      right = left
      atRight = atLeft
      left = to - ratio * (to - from)
      atLeft = f(left)
    } else {
      from = left
      left = right
      atLeft = atRight
      right = from + ratio * (to - from)
      atRight = f(right)
    }
  }
  return Math.min(atLeft, atRight, f(from), f(to))
}
