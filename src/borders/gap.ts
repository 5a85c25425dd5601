/** The smallest gap between treated and untreated zones, for the message that they share no border. */
import { type Boundaries, edgeArrays, pointOfEdge, setEdge } from './boundaries.js'
import { buildSegmentTree, type Edges, nearestEdges } from './segmentTree.js'

export interface Gap {
  readonly metres: number
  /** Middle of the gap. */
  readonly lon: number
  readonly lat: number
}

/** Two sets of edges that don't cross are nearest at a vertex of one of them: every vertex is tried. */
export function smallestGap({ edges, zoneOfEdge }: Boundaries, isTreated: Uint8Array): Gap {
  const sides = [0, 1].map((side) => edgesWhere(edges, (e) => isTreated[zoneOfEdge[e]] === side))
  let best: Gap = { metres: Infinity, lon: Number.NaN, lat: Number.NaN }
  for (const [own, other] of [sides, [sides[1], sides[0]]]) {
    const { edge, fraction, distanceMetres } = nearestEdges(buildSegmentTree(other), own.lon0, own.lat0)
    for (let i = 0; i < edge.length; i++) {
      if (!(distanceMetres[i] < best.metres)) continue
      const [lon, lat] = pointOfEdge(other, edge[i], fraction[i])
      best = { metres: distanceMetres[i], lon: (own.lon0[i] + lon) / 2, lat: (own.lat0[i] + lat) / 2 }
    }
  }
  return best
}

function edgesWhere(edges: Edges, isWanted: (edge: number) => boolean): Edges {
  const wanted: number[] = []
  for (let e = 0; e < edges.lon0.length; e++) if (isWanted(e)) wanted.push(e)
  const picked = edgeArrays(wanted.length)
  wanted.forEach((e, i) => {
    setEdge(picked, i, edges.lon0[e], edges.lat0[e], edges.lon1[e], edges.lat1[e])
  })
  return picked
}
