/** Every part of a ring of the boundaries with its label: what lies beyond it. */
import type { Boundaries } from './boundaries.js'
import { NEAR, samePlaceMetres, stretchesOfEdge } from './nearness.js'
import { seamsOfRing } from './outside.js'
import { doubleArea } from './rings.js'
import type { SharedPath } from './sharedBorders.js'
import { bendsAlong, facingFoot, partMetres, segmentOf } from './zoneFoot.js'

/**
 * - `shared`: another zone's boundary within the tolerance, no whiskers and no meetings at a corner;
 * - `beyond tolerance`: another zone's boundary faces it, farther off than the tolerance and nearer than the reach;
 * - `hole`: no such zone, on the edge of a hole of its own zone;
 * - `outer`: no such zone, on an outer ring: coast, lake shore or the edge of the study;
 * - `seam`: the zone itself goes on beyond, as along a cut at the antimeridian, or it is at a pole.
 */
export type StretchLabel = 'shared' | 'beyond tolerance' | 'hole' | 'outer' | 'seam'

/** A part of one edge; `other`: the zone it is shared with or that faces it, else -1. */
export interface Part {
  readonly edge: number
  readonly from: number
  readonly to: number
  readonly label: StretchLabel
  readonly other: number
  readonly isExact: boolean
}

interface Candidate extends Part {
  /** Zones within the reach. */
  readonly near: readonly number[]
  /** Metres to the zone that faces it, at its middle. */
  readonly gapMetres: number
  /** Does it face no edge of that zone but only a vertex, or nothing of it, being a turn in a longer stretch? */
  readonly isAtVertex: boolean
}

export interface Reaches {
  readonly snapMetres: number
  readonly reachMetres: number
}

/** Two zones that face each other over no more than this many times their distance only meet at a corner. */
export const cornerGaps = 2

/** Paths of each ring. */
export function pathsByRing({ ringOfEdge, ringStart }: Boundaries, paths: readonly SharedPath[]): SharedPath[][] {
  const byRing: SharedPath[][] = Array.from({ length: ringStart.length - 1 }, () => [])
  for (const path of paths) byRing[ringOfEdge[path.steps[0].edge]].push(path)
  return byRing
}

/** The parts of a ring in order, end to end, from where one of its runs begins. `shared`: the paths on it. */
export function partsOfRing(
  boundaries: Boundaries,
  ring: number,
  shared: readonly SharedPath[],
  reaches: Reaches,
): Part[] {
  const { ringStart } = boundaries
  const label = isHole(boundaries, ring) ? 'hole' : 'outer'
  const covered = coveredParts(boundaries, ring, shared)
  const parts: Candidate[] = []
  for (let e = ringStart[ring], c = 0; e < ringStart[ring + 1]; e++) {
    let reached = 0
    for (; c < covered.length && covered[c].edge === e; c++) {
      const { from, to } = covered[c]
      if (to <= reached) continue
      const isFree = from > reached && partMetres(boundaries, e, reached, from) > 2 * samePlaceMetres
      if (isFree) parts.push(...freeParts(boundaries, e, reached, from, label, reaches))
      parts.push({ ...covered[c], from: isFree ? from : reached, near: [], gapMetres: 0, isAtVertex: false })
      reached = to
    }
    if (reached < 1) parts.push(...freeParts(boundaries, e, reached, 1, label, reaches))
  }
  return merged(withoutCorners(boundaries, bridged(boundaries, parts, reaches.reachMetres), label))
}

/** Parts that run on along one edge under one label are one. */
function merged(parts: readonly Part[]): Part[] {
  const result: Part[] = []
  for (const { edge, from, to, label, other, isExact } of parts) {
    const last = result[result.length - 1]
    const isSame = last && last.label === label && last.other === other && last.isExact === isExact
    if (isSame && last.edge === edge && last.to === from) result[result.length - 1] = { ...last, to }
    else result.push({ edge, from, to, label, other, isExact })
  }
  return result
}

/** Holes have their zone on the outer side. */
function isHole({ edges, ringStart, insideOfRing }: Boundaries, ring: number): boolean {
  const positions: [number, number][] = []
  for (let e = ringStart[ring]; e < ringStart[ring + 1]; e++) positions.push([edges.lon0[e], edges.lat0[e]])
  return doubleArea([...positions, positions[0]]) > 0 !== insideOfRing[ring] > 0
}

/** Shared parts and seams of a ring, by edge and place. */
function coveredParts(boundaries: Boundaries, ring: number, shared: readonly SharedPath[]): Part[] {
  const first = boundaries.ringStart[ring]
  const parts: Part[] = shared.flatMap(({ steps, isExact, untreated }) =>
    steps.map((step, i) => ({ ...step, label: 'shared' as const, other: untreated, isExact: isExact[i] })),
  )
  for (const [from, to] of seamsOfRing(boundaries, ring)) {
    const edge = Math.floor(from)
    const seam = { from: from - edge, to: to - edge, label: 'seam' as const, other: -1, isExact: false }
    parts.push({ edge: first + edge, ...seam })
  }
  return parts.sort((a, b) => a.edge - b.edge || a.from - b.from || a.to - b.to)
}

/** Parts of an edge that is not shared from one fraction to another; those that another zone faces say so. */
function freeParts(
  boundaries: Boundaries,
  e: number,
  start: number,
  end: number,
  label: 'hole' | 'outer',
  { snapMetres, reachMetres }: Reaches,
): Candidate[] {
  const wide = stretchesOfEdge(boundaries, e, reachMetres).filter((stretch) => stretch.kind === NEAR)
  const plain = { edge: e, label, other: -1, isExact: false, gapMetres: 0, isAtVertex: false } as const
  if (wide.length === 0) return [{ ...plain, from: start, to: end, near: [] }]
  const close = stretchesOfEdge(boundaries, e, snapMetres).filter((stretch) => stretch.kind === NEAR)
  const cuts = [...wide, ...close].flatMap(({ from, to }) => [from, to]).filter((cut) => cut > start && cut < end)
  const places = [start, ...cuts.sort((a, b) => a - b), end]
  const parts: Candidate[] = []
  for (let i = 0; i + 1 < places.length; i++) {
    const [from, to] = [places[i], places[i + 1]]
    if (!(to > from)) continue
    const holds = ({ from: low, to: high }: { from: number; to: number }) =>
      low <= (from + to) / 2 && high >= (from + to) / 2
    const near = wide.filter(holds).map((stretch) => stretch.zone)
    if (near.length === 0 || close.some(holds)) parts.push({ ...plain, from, to, near })
    else
      for (const piece of dividedFinely(boundaries, e, from, to, near, reachMetres)) {
        const facing = nearestFacing(boundaries, e, (piece.from + piece.to) / 2, near, reachMetres)
        parts.push({ ...plain, ...piece, near, ...(facing && { label: 'beyond tolerance' as const, ...facing }) })
      }
  }
  return parts
}

/** Cut at the bends of the distance to any of the zones, and no part longer than an eighth of the reach. */
export function dividedFinely(
  boundaries: Boundaries,
  e: number,
  from: number,
  to: number,
  zones: readonly number[],
  reachMetres: number,
): { readonly from: number; readonly to: number }[] {
  const segment = segmentOf(boundaries, e, from, to)
  const bends = zones.flatMap((zone) => bendsAlong(boundaries, segment, zone, reachMetres)).sort((a, b) => a - b)
  const length = partMetres(boundaries, e, from, to)
  const places = [from]
  for (let i = 1; i < bends.length; i++) {
    const [low, high] = [bends[i - 1], bends[i]]
    const count = Math.ceil(((high - low) * length) / (reachMetres / 8))
    for (let k = 1; k <= count; k++) places.push(from + (low + (k * (high - low)) / count) * (to - from))
  }
  places[places.length - 1] = to
  return places.slice(1).map((place, i) => ({ from: places[i], to: place }))
}

/** Of the zones that face an edge at a place of it, the nearest. */
export function nearestFacing(
  boundaries: Boundaries,
  e: number,
  fraction: number,
  zones: readonly number[],
  reachMetres: number,
): Pick<Candidate, 'other' | 'gapMetres' | 'isAtVertex'> | undefined {
  let best: Pick<Candidate, 'other' | 'gapMetres' | 'isAtVertex'> | undefined
  for (const other of zones) {
    const foot = facingFoot(boundaries, e, fraction, other, reachMetres)
    if (!foot || (best && foot.metres >= best.gapMetres)) continue
    best = { other, gapMetres: foot.metres, isAtVertex: foot.fraction === 0 || foot.fraction === 1 }
  }
  return best
}

/** Neighbouring parts of one kind together, beginning so that no run goes over the end of the list. */
export function runsOf<P extends Part>(
  parts: readonly P[],
  isSame = (a: Part, b: Part) => a.label === b.label && a.other === b.other,
): P[][] {
  const start = parts.findIndex((part, i) => !isSame(part, parts[(i + parts.length - 1) % parts.length]))
  if (start < 0) return [[...parts]]
  const runs: P[][] = []
  for (let i = 0; i < parts.length; i++) {
    const part = parts[(start + i) % parts.length]
    const run = runs[runs.length - 1]
    if (run && isSame(run[0], part)) run.push(part)
    else runs.push([part])
  }
  return runs
}

function runMetres(boundaries: Boundaries, run: readonly Part[]): number {
  return run.reduce((sum, { edge, from, to }) => sum + partMetres(boundaries, edge, from, to), 0)
}

/** Short turns away from a zone that faces the boundary before and after, and is within the reach all along. */
function bridged(boundaries: Boundaries, parts: readonly Candidate[], reachMetres: number): Candidate[] {
  const runs = runsOf(parts)
  return runs.flatMap((run, r) => {
    const before = runs[(r + runs.length - 1) % runs.length][0]
    const after = runs[(r + 1) % runs.length][0]
    const { other } = before
    const isBetween = run[0].other < 0 && other >= 0 && after.other === other && runs.length > 1
    if (!isBetween || (before.label === 'shared' && after.label === 'shared')) return run
    if (!run.every((part) => part.near.includes(other)) || runMetres(boundaries, run) > reachMetres / 4) return run
    return run.map((part) => ({ ...part, label: 'beyond tolerance' as const, other, isAtVertex: true }))
  })
}

/**
 * Takes back what faces a zone only beyond the tolerance and is none of its border: the ends of a run that look back at
 * its last vertex, and runs no longer than twice their gap, which are meetings at a corner. Where a shared border goes
 * on into the run, it stays.
 */
function withoutCorners(boundaries: Boundaries, parts: readonly Candidate[], label: 'hole' | 'outer'): Part[] {
  const runs = runsOf(parts)
  return runs.flatMap((run, r) => {
    const [{ label: own, other }] = run
    if (own !== 'beyond tolerance') return run
    const goesOn = [runs[(r + runs.length - 1) % runs.length][0], runs[(r + 1) % runs.length][0]].map(
      (part) => part.label === 'shared' && part.other === other,
    )
    const isWhole = runs.length === 1
    const isBody = run.map((part) => !part.isAtVertex)
    const first = goesOn[0] || isWhole ? 0 : isBody.indexOf(true)
    const last = goesOn[1] || isWhole ? run.length - 1 : isBody.lastIndexOf(true)
    const body = first < 0 ? [] : run.slice(first, last + 1)
    const gap = body.reduce((most, part) => Math.max(most, part.gapMetres), 0)
    const isKept = goesOn[0] || goesOn[1] || runMetres(boundaries, body) > cornerGaps * gap
    return run.map((part, i) =>
      isKept && first >= 0 && i >= first && i <= last ? part : { ...part, label, other: -1 },
    )
  })
}
