/** Gaps and overlaps between the boundaries of two zones: where, how wide, how large. */
import { type Boundaries, pointOfEdge } from './boundaries.js'
import type { Sample } from './fabricSamples.js'
import { edgeLengthMetres } from './geodesy.js'
import { coincidentMetres, nearestOfZone } from './nearness.js'
import { ringSquareMetres } from './polygonArea.js'
import { turnsTo } from './rings.js'
import { neighbourEdge, type SignedFoot } from './zoneFoot.js'

type Point = readonly [lon: number, lat: number]

/** A gap is land of neither zone, an overlap land of both. */
export interface SliverShape {
  readonly kind: 'gap' | 'overlap'
  /** From any place of one zone's edge to the nearest of the other's. */
  readonly widestMetres: number
  readonly squareMetres: number
  /** Mean of the lengths of its two sides. */
  readonly lengthMetres: number
  /** Its middle: halfway along the first zone's edge, and from there halfway across. */
  readonly lon: number
  readonly lat: number
  /** Closed, degrees. */
  readonly ring: readonly Point[]
}

/** Slivers along a run of zone `own`'s boundary, sampled against zone `other`; cut wherever the two boundaries touch. */
export function sliversAlong(
  boundaries: Boundaries,
  samples: readonly Sample[],
  own: number,
  other: number,
  reachMetres: number,
): SliverShape[] {
  const slivers: SliverShape[] = []
  let group = samples.slice(0, 1)
  for (let i = 1; i < samples.length; i++) {
    const [before, next] = [samples[i - 1], samples[i]]
    const [from, to] = [before.foot?.signedMetres, next.foot?.signedMetres]
    const isJoined = !next.isExact && from !== undefined && to !== undefined && from * to >= 0
    if (!isJoined || (from === 0 && group.length > 1)) {
      addSliver(boundaries, group, own, other, reachMetres, slivers)
      group = isJoined ? [before] : []
    }
    group.push(next)
  }
  addSliver(boundaries, group, own, other, reachMetres, slivers)
  return slivers
}

function addSliver(
  boundaries: Boundaries,
  samples: readonly Sample[],
  own: number,
  other: number,
  reachMetres: number,
  slivers: SliverShape[],
): void {
  const far = samples.find(({ foot }) => foot && Math.abs(foot.signedMetres) > coincidentMetres)
  if (samples.length < 2 || !far?.foot) return
  const near: Point[] = samples.map(({ lon, lat }) => [lon, lat])
  const opposite = oppositeSide(boundaries, samples)
  const widths = samples.map(({ foot }) => foot?.metres ?? 0)
  const wide = 1.1 * widths.reduce((most, width) => Math.max(most, width), 0) + coincidentMetres
  const across = opposite.map(
    ([lon, lat]) =>
      (nearestOfZone(boundaries, own, lon, lat, wide) ?? nearestOfZone(boundaries, own, lon, lat, reachMetres))
        ?.metres ?? 0,
  )
  const turn = (point: Point): Point => [point[0] + turnsTo(point[0], near[0][0]), point[1]]
  const ring = [...near, ...opposite.map(turn).reverse(), near[0]]
  const middle = placeHalfway(near)
  const foot = nearestOfZone(boundaries, other, middle[0], middle[1], reachMetres)
  const end = foot ? turn([foot.lon, foot.lat]) : middle
  slivers.push({
    kind: far.foot.signedMetres > 0 ? 'gap' : 'overlap',
    widestMetres: [...widths, ...across].reduce((most, width) => Math.max(most, width), 0),
    squareMetres: Math.abs(ringSquareMetres(ring)),
    lengthMetres: (pathMetres(near) + pathMetres(opposite.map(turn))) / 2,
    lon: (middle[0] + end[0]) / 2,
    lat: (middle[1] + end[1]) / 2,
    ring,
  })
}

/** From the first sample's foot to the last's along the other zone's own boundary, where it goes from foot to foot. */
function oppositeSide(boundaries: Boundaries, samples: readonly Sample[]): Point[] {
  const points: Point[] = []
  samples.forEach(({ foot, walkedMetres }, i) => {
    if (!foot) return
    const before = i > 0 ? samples[i - 1] : undefined
    if (before?.foot) {
      const room = walkedMetres - before.walkedMetres + before.foot.metres + foot.metres
      points.push(...verticesBetween(boundaries, before.foot, foot, 2 * room + coincidentMetres))
    }
    points.push([foot.lon, foot.lat])
  })
  return points
}

/** The vertices of a ring from one foot to another, the way that is no longer than `metres`; none where both are. */
function verticesBetween(boundaries: Boundaries, a: SignedFoot, b: SignedFoot, metres: number): Point[] {
  const { edges, ringOfEdge } = boundaries
  if (a.edge === b.edge || ringOfEdge[a.edge] !== ringOfEdge[b.edge]) return []
  const ways = [1, 0].map((end) => {
    const vertices: Point[] = []
    let room = metres
    let at: Point = [a.lon, a.lat]
    for (let e = a.edge; e !== b.edge; e = neighbourEdge(boundaries, e, end)) {
      const vertex = pointOfEdge(edges, e, end)
      room -= edgeLengthMetres(at[0], at[1], vertex[0], vertex[1])
      if (!(room >= 0)) return undefined
      vertices.push(vertex)
      at = vertex
    }
    return { vertices, room: room - edgeLengthMetres(at[0], at[1], b.lon, b.lat) }
  })
  const [best] = ways
    .filter((way) => way !== undefined && way.room >= 0)
    .sort((p, q) => (q?.room ?? 0) - (p?.room ?? 0))
  return best?.vertices ?? []
}

function pathMetres(points: readonly Point[]): number {
  let sum = 0
  for (let i = 0; i + 1 < points.length; i++) sum += edgeLengthMetres(...points[i], ...points[i + 1])
  return sum
}

function placeHalfway(points: readonly Point[]): Point {
  let rest = pathMetres(points) / 2
  for (let i = 0; i + 1 < points.length; i++) {
    const [[lon0, lat0], [lon1, lat1]] = [points[i], points[i + 1]]
    const length = edgeLengthMetres(lon0, lat0, lon1, lat1)
    if (rest <= length && length > 0) {
      const share = rest / length
      return [lon0 + share * (lon1 - lon0), lat0 + share * (lat1 - lat0)]
    }
    rest -= length
  }
  return points[points.length - 1]
}
