/**
 * Shared borders of zones: the parts of the boundary of the zone on the treated side within the tolerance of the other
 * zone's (METHODS section 10), as paths along the treated boundary. No vertex is ever moved.
 */
import { type Boundaries, pointOfEdge } from './boundaries.js'
import { edgeLengthMetres } from './geodesy.js'
import { EXACT, NEAR, type Nearness, nearestOfZone, SAME_SIDE, samePlaceMetres } from './nearness.js'

/** A stretch of one edge of the boundaries; `from` lies past `to` on a path read backwards. */
export interface PathStep {
  readonly edge: number
  readonly from: number
  readonly to: number
}

/** Is the border between two zones wanted, with the first on its treated side? By zone. */
export type Relevance = (own: number, other: number) => boolean

/** One unbroken stretch of a treated zone's boundary, shared with one untreated zone. */
export interface SharedPath {
  readonly treated: number
  readonly untreated: number
  /** [longitude, latitude], at least two; first and last are equal where a whole ring is shared. */
  readonly points: readonly (readonly [number, number])[]
  /** For each step from a point to the next: do the two boundaries coincide there? */
  readonly isExact: readonly boolean[]
  /** Where on the boundary each step runs. */
  readonly steps: readonly PathStep[]
  /** A whole ring. */
  readonly isClosed: boolean
  /** Does another untreated zone's path take over at once at the start, and at the end? */
  readonly isFollowed: readonly [start: boolean, end: boolean]
}

/** Runs no longer than this many tolerances, coincident nowhere, are two zones meeting at a corner. */
export const cornerTolerances = 4

interface Claim extends PathStep {
  readonly zone: number
  readonly isExact: boolean
}

/**
 * Every shared stretch along the boundary of its treated side, whiskers included, meetings at a corner left out. A
 * stretch near two zones on the other side goes to the nearer, cut where they are equally near; a coincident boundary
 * goes first.
 */
export function sharedPaths(
  boundaries: Boundaries,
  nearness: Nearness,
  isRelevant: Relevance,
  metres: number,
): SharedPath[] {
  const { ringStart, zoneOfRing } = boundaries
  const paths: SharedPath[] = []
  for (let ring = 0; ring + 1 < ringStart.length; ring++) {
    const own = zoneOfRing[ring]
    const isWanted = (zone: number) => isRelevant(own, zone)
    const claims: Claim[] = []
    for (let e = ringStart[ring]; e < ringStart[ring + 1]; e++) {
      claimsOfEdge(boundaries, nearness, isWanted, metres, e, claims)
    }
    paths.push(...pathsOfRing(boundaries, ring, claims, metres))
  }
  return paths
}

/** Cuts one edge where claims begin and end, and gives each part to the zone with the best claim. */
function claimsOfEdge(
  boundaries: Boundaries,
  nearness: Nearness,
  isWanted: (zone: number) => boolean,
  metres: number,
  e: number,
  claims: Claim[],
): void {
  const { edges } = boundaries
  const [first, last] = [nearness.start[e], nearness.start[e + 1]]
  const cuts: number[] = []
  for (let i = first; i < last; i++) {
    if (isWanted(nearness.zone[i])) cuts.push(nearness.from[i], nearness.to[i])
  }
  if (cuts.length === 0) return
  const length = edgeLengthMetres(edges.lon0[e], edges.lat0[e], edges.lon1[e], edges.lat1[e])
  const slack = samePlaceMetres / length
  const add = (from: number, to: number, zone: number, isExact: boolean) => {
    const before = claims[claims.length - 1]
    const isSame = before && before.edge === e && before.zone === zone && before.isExact === isExact
    if (isSame && from === before.to) claims[claims.length - 1] = { ...before, to }
    else claims.push({ edge: e, from, to, zone, isExact })
  }
  const places = distinctPlaces(cuts, slack)
  for (let c = 0; c + 1 < places.length; c++) {
    const [from, to] = [places[c], places[c + 1]]
    const { exact, near } = claimants(nearness, isWanted, first, last, (from + to) / 2)
    if (exact.length > 0) add(from, to, exact[0], true)
    else if (near.length === 1) add(from, to, near[0], false)
    else if (near.length > 1) {
      for (const part of nearerParts(boundaries, near, e, from, to, length, metres)) {
        add(part.from, part.to, part.zone, false)
      }
    }
  }
}

/** Sorted, one for all that lie within `slack` of each other; 1 where the edge's end is among them. */
function distinctPlaces(cuts: number[], slack: number): number[] {
  const places: number[] = []
  for (const cut of cuts.sort((a, b) => a - b)) {
    const last = places.length - 1
    if (last < 0 || cut - places[last] > slack) places.push(cut)
    else if (cut === 1) places[last] = 1
  }
  return places
}

/** Wanted zones with a claim at fraction t of an edge; nearness lists each zone's kinds together, NEAR first. */
function claimants(nearness: Nearness, isWanted: (zone: number) => boolean, first: number, last: number, t: number) {
  const exact: number[] = []
  const near: number[] = []
  const overlapping: number[] = []
  for (let i = first; i < last; i++) {
    const zone = nearness.zone[i]
    if (!isWanted(zone) || t < nearness.from[i] || t > nearness.to[i]) continue
    if (nearness.kind[i] === NEAR) near.push(zone)
    else if (nearness.kind[i] === EXACT) exact.push(zone)
    else if (nearness.kind[i] === SAME_SIDE) overlapping.push(zone)
  }
  return {
    exact: exact.filter((zone) => !overlapping.includes(zone)),
    near: near.filter((zone) => !overlapping.includes(zone)),
  }
}

interface Part {
  from: number
  to: number
  zone: number
}

/**
 * Splits a stretch of an edge between the zones near it: sampled every quarter of the tolerance (at most 64 samples),
 * and where neighbouring samples disagree the change is found by bisection.
 */
function nearerParts(
  boundaries: Boundaries,
  zones: readonly number[],
  e: number,
  from: number,
  to: number,
  length: number,
  metres: number,
): Part[] {
  const nearest = (t: number): number => {
    const [lon, lat] = pointOfEdge(boundaries.edges, e, t)
    let best = zones[0]
    let least = Infinity
    for (const zone of zones) {
      const distance = nearestOfZone(boundaries, zone, lon, lat, 1.01 * metres)?.metres ?? Infinity
      if (distance < least - samePlaceMetres) {
        best = zone
        least = distance
      }
    }
    return best
  }
  const steps = Math.min(64, Math.max(1, Math.ceil(((to - from) * length) / (metres / 4))))
  const inset = Math.min((to - from) / 4, 1e-4 / length)
  const at = (i: number) => (i === 0 ? from + inset : i === steps ? to - inset : from + (i * (to - from)) / steps)
  const parts: Part[] = [{ from, to, zone: nearest(at(0)) }]
  for (let i = 1; i <= steps; i++) {
    const current = parts[parts.length - 1]
    const next = nearest(at(i))
    if (next === current.zone) continue
    let [low, high] = [at(i - 1), at(i)]
    while ((high - low) * length > samePlaceMetres) {
      const middle = (low + high) / 2
      if (middle <= low || middle >= high) break
      if (nearest(middle) === current.zone) low = middle
      else high = middle
    }
    current.to = high
    parts.push({ from: high, to, zone: next })
  }
  return parts
}

/** Joins the claims of a ring that run on into each other and go to the same zone; corners are left out. */
function pathsOfRing(boundaries: Boundaries, ring: number, claims: readonly Claim[], metres: number): SharedPath[] {
  const { ringStart } = boundaries
  const [firstEdge, lastEdge] = [ringStart[ring], ringStart[ring + 1] - 1]
  const meets = (a: Claim, b: Claim) => {
    if (a.edge === b.edge && b.from >= a.to - 1e-9) return b.from - a.to < 1e-9
    const isNext = b.edge === a.edge + 1 || (a.edge === lastEdge && b.edge === firstEdge)
    return isNext && a.to === 1 && b.from === 0
  }
  const follows = (a: Claim, b: Claim) => a.zone === b.zone && meets(a, b)
  const runs: Claim[][] = []
  for (const claim of claims) {
    const run = runs[runs.length - 1]
    if (run && follows(run[run.length - 1], claim)) run.push(claim)
    else runs.push([claim])
  }
  let isClosed = false
  if (runs.length > 0) {
    const [head, tail] = [runs[0], runs[runs.length - 1]]
    if (follows(tail[tail.length - 1], head[0])) {
      if (runs.length === 1) isClosed = true
      else {
        tail.push(...head)
        runs.shift()
      }
    }
  }
  const kept = runs.filter((run) => isClosed || !isCornerOnly(boundaries, run, metres))
  return kept.map((run, i) => {
    const before = kept[(i + kept.length - 1) % kept.length]
    const after = kept[(i + 1) % kept.length]
    const points = run.map((claim) => pointOfEdge(boundaries.edges, claim.edge, claim.from))
    const end = run[run.length - 1]
    points.push(pointOfEdge(boundaries.edges, end.edge, end.to))
    return {
      treated: boundaries.zoneOfRing[ring],
      untreated: run[0].zone,
      points,
      isExact: run.map((claim) => claim.isExact),
      steps: run.map(({ edge, from, to }) => ({ edge, from, to })),
      isClosed,
      isFollowed: [meets(before[before.length - 1], run[0]), meets(end, after[0])] as const,
    }
  })
}

/** Does the run coincide nowhere, and is it no longer than four tolerances? Then two zones only meet at a corner. */
function isCornerOnly({ edges }: Boundaries, run: readonly Claim[], metres: number): boolean {
  if (run.some((claim) => claim.isExact)) return false
  let length = 0
  for (const { edge, from, to } of run) {
    const [lon0, lat0] = pointOfEdge(edges, edge, from)
    const [lon1, lat1] = pointOfEdge(edges, edge, to)
    length += edgeLengthMetres(lon0, lat0, lon1, lat1)
  }
  return length <= cornerTolerances * metres
}
