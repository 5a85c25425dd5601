/** Zones that were meant to touch and don't: refused, because nothing says where between them the border runs. */
import type { Problem } from '../problem.js'
import { type Boundaries, pointOfEdge } from './boundaries.js'
import { cornerGaps, dividedFinely, nearestFacing } from './fabricParts.js'
import { placeText } from './geojson.js'
import { NEAR, stretchesOfEdge } from './nearness.js'
import type { Relevance, SharedPath } from './sharedBorders.js'
import { partMetres } from './zoneFoot.js'

/** Two zones may lie apart by this many tolerances, and by this many metres at least, and are taken to be meant to touch. */
const apartTolerances = 5
const leastApartMetres = 50

interface Facing {
  readonly own: number
  readonly other: number
  metres: number
  gapMetres: number
  lon: number
  lat: number
}

/**
 * One problem for each pair of zones that should have a border (`isRelevant`), share none (`paths`), and face each other
 * farther apart than the tolerance, over more than twice that distance. Pairs that share a part of their border are not
 * refused: `fabricOf` lists what they lack. Zones by index in `names`; farther apart than five tolerances or
 * 50 m, whichever is more, two zones are no neighbours.
 */
export function facingApartProblems(
  boundaries: Boundaries,
  isRelevant: Relevance,
  paths: readonly Pick<SharedPath, 'treated' | 'untreated'>[],
  names: readonly string[],
  file: string,
  metres: number,
): Problem[] {
  const reachMetres = Math.max(apartTolerances * metres, leastApartMetres)
  const shared = new Set(paths.map(({ treated, untreated }) => `${treated} ${untreated}`))
  const pairs = new Map<string, Facing>()
  for (let e = 0; e < boundaries.zoneOfEdge.length; e++) {
    const own = boundaries.zoneOfEdge[e]
    const isWanted = (zone: number) => isRelevant(own, zone) && !shared.has(`${own} ${zone}`)
    for (const { zone, kind, from, to } of stretchesOfEdge(boundaries, e, reachMetres, isWanted)) {
      if (kind === NEAR) addFacing(boundaries, e, from, to, zone, metres, reachMetres, pairs)
    }
  }
  return [...pairs.values()]
    .filter((pair) => pair.metres > cornerGaps * pair.gapMetres)
    .map((pair) => problemOf(pair, names, file, metres))
}

/** Adds what a stretch of an edge has of a zone over against it, beyond the tolerance. */
function addFacing(
  boundaries: Boundaries,
  e: number,
  start: number,
  end: number,
  other: number,
  metres: number,
  reachMetres: number,
  pairs: Map<string, Facing>,
): void {
  const own = boundaries.zoneOfEdge[e]
  for (const { from, to } of dividedFinely(boundaries, e, start, end, [other], reachMetres)) {
    const facing = nearestFacing(boundaries, e, (from + to) / 2, [other], reachMetres)
    if (!facing || facing.gapMetres <= metres) continue
    const key = `${own} ${other}`
    const pair = pairs.get(key) ?? { own, other, metres: 0, gapMetres: 0, lon: 0, lat: 0 }
    pairs.set(key, pair)
    pair.metres += partMetres(boundaries, e, from, to)
    for (const fraction of [from, (from + to) / 2, to]) {
      const gap = nearestFacing(boundaries, e, fraction, [other], reachMetres)?.gapMetres ?? 0
      if (gap <= pair.gapMetres) continue
      const [lon, lat] = pointOfEdge(boundaries.edges, e, fraction)
      Object.assign(pair, { gapMetres: gap, lon, lat })
    }
  }
}

function problemOf(pair: Facing, names: readonly string[], file: string, metres: number): Problem {
  const { own, other, gapMetres } = pair
  const [first, second] = own < other ? [own, other] : [other, own]
  const length = pair.metres >= 1000 ? `${(pair.metres / 1000).toFixed(1)} km` : `${Math.round(pair.metres)} m`
  const gap = gapMetres >= 10 ? Math.ceil(gapMetres - 0.01) : Number(gapMetres.toPrecision(2))
  return {
    file,
    what: `zones ${names[first]} and ${names[second]} face each other over ${length} and share no border`,
    found: `up to ${gap} m apart, beyond snap (${Number(metres.toPrecision(3))} m), near ${placeText(pair.lon, pair.lat)}`,
    todo: `if they are meant to touch, set snap above ${gap}; if not, leave one of them out`,
  }
}
