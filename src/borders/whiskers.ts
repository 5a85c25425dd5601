/**
 * Whiskers: where a shared border ends, the boundary runs on away from the other zone and is still within the
 * tolerance for a few metres. These metres are no border.
 */
import type { Boundaries } from './boundaries.js'
import { edgeLengthMetres } from './geodesy.js'
import { footOnSegment, localPlane } from './localPlane.js'
import { nearestOfZone } from './nearness.js'
import { turnsTo } from './rings.js'
import { cornerTolerances, type SharedPath } from './sharedBorders.js'
import { bendsAlong, squareFoot } from './zoneFoot.js'

const samplesPerEdge = 8
/** Whiskers are no longer than this many tolerances. */
const whiskerTolerances = 2 * cornerTolerances
/** An end is drawn back again while that takes off more than this share of its distance to the other zone: it leaves. */
const leavingShare = 0.1
const mostRepeats = 200

/**
 * The path without whiskers, or undefined where nothing else is left:
 * 1. beyond the last coincident stretch, an end along which the distance to the other zone only grows is cut off;
 * 2. an end that does not coincide is cut off as far as the other zone does not lie over against it;
 * 3. and it is drawn back to the point of the path nearest to its foot on the other zone, again and again while that
 *    takes off more than a tenth of its distance to that zone and the distance is above a tenth of the tolerance.
 * Whole rings have no ends, and an end where another zone takes over is left as it is.
 */
export function withoutWhiskers(boundaries: Boundaries, path: SharedPath, metres: number): SharedPath | undefined {
  if (path.isClosed) return path
  const oneEnd = withoutWhisker(boundaries, path, metres)
  const both = withoutWhisker(boundaries, reversed(oneEnd), metres)
  return pathMetres(both) > 0.001 ? reversed(both) : undefined
}

/** Rules 1 to 3 at the end of the path. */
function withoutWhisker(boundaries: Boundaries, path: SharedPath, metres: number): SharedPath {
  if (path.isFollowed[1]) return path
  let drawn = drawnBack(boundaries, facingCut(boundaries, leavingCut(boundaries, path, metres), metres), metres)
  for (let again = 0; again < mostRepeats; again++) {
    const gap = endGap(boundaries, drawn, metres)
    if (gap <= metres / 10) return drawn
    const next = drawnBack(boundaries, drawn, metres)
    const [from, to] = [drawn, next].map(({ points }) => points[points.length - 1])
    if (edgeLengthMetres(...from, ...to) <= leavingShare * gap) return drawn
    drawn = next
  }
  return drawn
}

/** Metres from the end of a path to the other zone. */
function endGap(boundaries: Boundaries, { points, untreated }: SharedPath, metres: number): number {
  const [lon, lat] = points[points.length - 1]
  return nearestOfZone(boundaries, untreated, lon, lat, 1.01 * metres)?.metres ?? metres
}

function pathMetres({ points }: SharedPath): number {
  let sum = 0
  for (let i = 0; i + 1 < points.length; i++) {
    sum += edgeLengthMetres(points[i][0], points[i][1], points[i + 1][0], points[i + 1][1])
  }
  return sum
}

function reversed(path: SharedPath): SharedPath {
  const [start, end] = path.isFollowed
  return {
    ...path,
    points: [...path.points].reverse(),
    isExact: [...path.isExact].reverse(),
    steps: [...path.steps].reverse().map(({ edge, from, to }) => ({ edge, from: to, to: from })),
    isFollowed: [end, start],
  }
}

/** Rule 1 at the end of the path. */
function leavingCut(boundaries: Boundaries, path: SharedPath, metres: number): SharedPath {
  const lastExact = path.isExact.lastIndexOf(true)
  if (lastExact < 0 || lastExact === path.isExact.length - 1) return path
  const walked: number[] = [0]
  const distances: number[] = [0]
  for (let i = lastExact + 1; i < path.isExact.length; i++) {
    const [[lon0, lat0], [lon1, lat1]] = [path.points[i], path.points[i + 1]]
    const length = edgeLengthMetres(lon0, lat0, lon1, lat1)
    const before = walked[walked.length - 1]
    for (let s = 1; s <= samplesPerEdge; s++) {
      const t = s / samplesPerEdge
      const place = [lon0 + t * (lon1 - lon0), lat0 + t * (lat1 - lat0)]
      walked.push(before + t * length)
      distances.push(nearestOfZone(boundaries, path.untreated, place[0], place[1], 1.01 * metres)?.metres ?? metres)
    }
  }
  if (!onlyGrows(walked, distances)) return path
  return firstSteps(path, lastExact + 1)
}

/** The path up to the end of a number of its steps. */
function firstSteps(path: SharedPath, count: number): SharedPath {
  return {
    ...path,
    points: path.points.slice(0, count + 1),
    isExact: path.isExact.slice(0, count),
    steps: path.steps.slice(0, count),
  }
}

/** Never back by more than a tenth of the last distance, and that much reached halfway: it leaves, it does not follow. */
function onlyGrows(walked: readonly number[], distances: readonly number[]): boolean {
  const last = distances.length - 1
  const tenth = distances[last] / 10
  let farthest = 0
  for (let i = 0; i <= last; i++) {
    if (distances[i] < farthest - tenth) return false
    farthest = Math.max(farthest, distances[i])
    if (farthest < tenth && walked[i] > walked[last] / 2) return false
  }
  return true
}

/** Rule 2 at the end of the path, over at most eight tolerances of it. */
function facingCut(boundaries: Boundaries, path: SharedPath, metres: number): SharedPath {
  let left = whiskerTolerances * metres
  for (let i = path.isExact.length - 1; i >= 0; i--) {
    if (path.isExact[i]) return firstSteps(path, i + 1)
    const segment = [...path.points[i], ...path.points[i + 1]] as const
    const { edge, from, to } = path.steps[i]
    const length = edgeLengthMetres(...segment)
    const bends = bendsAlong(boundaries, segment, path.untreated, 1.01 * metres)
    for (let b = bends.length - 1, end = 1; end > 0; ) {
      while (b > 0 && bends[b] >= end) b--
      const start = Math.max(bends[b], end - metres / 4 / length)
      const middle = from + ((start + end) / 2) * (to - from)
      if (squareFoot(boundaries, edge, middle, path.untreated, 1.01 * metres)) return cutAt(path, i, end)
      left -= (end - start) * length
      if (left < 0) return path
      end = start
    }
  }
  return path
}

/** The path up to a fraction of one of its steps. */
function cutAt(path: SharedPath, step: number, fraction: number): SharedPath {
  if (fraction === 1) return firstSteps(path, step + 1)
  const before = firstSteps(path, step)
  if (fraction === 0) return before
  const [[lon0, lat0], [lon1, lat1]] = [path.points[step], path.points[step + 1]]
  const { edge, from, to } = path.steps[step]
  return {
    ...path,
    points: [...before.points, [lon0 + fraction * (lon1 - lon0), lat0 + fraction * (lat1 - lat0)]],
    isExact: path.isExact.slice(0, step + 1),
    steps: [...before.steps, { edge, from, to: from + fraction * (to - from) }],
  }
}

/** Rule 3 at the end of the path, over at most eight tolerances of it. */
function drawnBack(boundaries: Boundaries, path: SharedPath, metres: number): SharedPath {
  const { points, isExact } = path
  if (isExact[isExact.length - 1]) return path
  const [endLon, endLat] = points[points.length - 1]
  const foot = nearestOfZone(boundaries, path.untreated, endLon, endLat, 1.01 * metres)
  if (!foot) return path
  const plane = localPlane(foot.lon, foot.lat)
  const distance = new Float64Array(1)
  const shift = turnsTo(endLon, foot.lon) - foot.lon
  let best = { step: isExact.length - 1, fraction: 1, metres: foot.metres }
  let walked = 0
  for (let i = isExact.length - 1; i >= 0 && !isExact[i] && walked <= whiskerTolerances * metres; i--) {
    const [[lon0, lat0], [lon1, lat1]] = [points[i], points[i + 1]]
    const fraction = footOnSegment(
      (lon0 + shift) * plane.metresPerLon,
      (lat0 - foot.lat) * plane.metresPerLat,
      (lon1 + shift) * plane.metresPerLon,
      (lat1 - foot.lat) * plane.metresPerLat,
      distance,
    )
    if (distance[0] < best.metres - 1e-6) best = { step: i, fraction, metres: distance[0] }
    walked += edgeLengthMetres(lon0, lat0, lon1, lat1)
  }
  return cutAt(path, best.step, best.fraction)
}
