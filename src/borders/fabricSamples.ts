/** Places along a run of boundary with the distance to another zone's boundary, close enough that it has no bend between. */
import type { Boundaries } from './boundaries.js'
import type { Part, Reaches } from './fabricParts.js'
import { edgeLengthMetres } from './geodesy.js'
import { bendsAlong, type Segment, type SignedFoot, segmentOf, signedFoot } from './zoneFoot.js'

export interface Sample {
  readonly lon: number
  readonly lat: number
  /** Undefined where the zone is out of reach. */
  readonly foot: SignedFoot | undefined
  /** Metres of boundary since the first sample. */
  readonly walkedMetres: number
  /** Does the boundary coincide with the zone's from the sample before to this one? */
  readonly isExact: boolean
}

/** What is searched for within a distance is searched for within this much more, for rounding. */
const searchRoom = 1.01
/** Halvings of the way between two bends, where the distance is not straight there after all. */
const mostHalvings = 14
/** The distance halfway may differ by this from the mean of both ends: metres, and a share of them. */
const straightMetres = 0.001
const straightShare = 0.001

/**
 * Samples of parts that join end to end, from the first to the last end; of a part that coincides, only its ends. The
 * zone is searched for within the tolerance beside what is shared, else within the reach.
 */
export function samplesAlong(boundaries: Boundaries, parts: readonly Part[], zone: number, reaches: Reaches): Sample[] {
  const samples: Sample[] = []
  let walked = 0
  for (const { edge, from, to, isExact, label } of parts) {
    const segment = segmentOf(boundaries, edge, from, to)
    const metres = searchRoom * (label === 'shared' ? reaches.snapMetres : reaches.reachMetres)
    const feet = feetAlong(boundaries, segment, zone, metres, isExact)
    for (const { lon, lat, foot } of samples.length === 0 ? feet : feet.slice(1)) {
      const walkedMetres = walked + edgeLengthMetres(segment[0], segment[1], lon, lat)
      samples.push({ lon, lat, foot, walkedMetres, isExact: isExact && samples.length > 0 })
    }
    walked += edgeLengthMetres(...segment)
  }
  return samples
}

type Foot = Pick<Sample, 'lon' | 'lat' | 'foot'> & { readonly fraction: number }

/**
 * Places on a segment with their feet on a zone's boundary: its ends, the bends of the distance that the zone's vertices
 * make, and, where another of its edges comes nearer in between, closer and closer to that bend.
 */
export function feetAlong(
  boundaries: Boundaries,
  segment: Segment,
  zone: number,
  reachMetres: number,
  isEndsOnly = false,
): Foot[] {
  const [lon0, lat0, lon1, lat1] = segment
  const at = (fraction: number): Foot => {
    const lon = fraction === 1 ? lon1 : lon0 + fraction * (lon1 - lon0)
    const lat = fraction === 1 ? lat1 : lat0 + fraction * (lat1 - lat0)
    return { lon, lat, foot: signedFoot(boundaries, zone, lon, lat, reachMetres), fraction }
  }
  const feet = [at(0)]
  const bends = isEndsOnly ? [0, 1] : bendsAlong(boundaries, segment, zone, reachMetres)
  for (let i = 1; i < bends.length; i++) {
    const after = at(bends[i])
    if (!isEndsOnly) addBetween(at, feet[feet.length - 1], after, mostHalvings, feet)
    feet.push(after)
  }
  return feet
}

/** Adds places between two where the distance halfway is not the mean of theirs. */
function addBetween(at: (fraction: number) => Foot, before: Foot, after: Foot, halvings: number, feet: Foot[]): void {
  if (halvings === 0) return
  const metres = ({ foot }: Foot) => foot?.signedMetres ?? Number.NaN
  const middle = at((before.fraction + after.fraction) / 2)
  const [a, b] = [metres(before), metres(after)]
  const allowed = straightMetres + straightShare * Math.max(Math.abs(a), Math.abs(b))
  const isNowhere = !before.foot && !middle.foot && !after.foot
  if (isNowhere || Math.abs(metres(middle) - (a + b) / 2) <= allowed) return
  addBetween(at, before, middle, halvings - 1, feet)
  feet.push(middle)
  addBetween(at, middle, after, halvings - 1, feet)
}

/** Largest and mean distance; where the zone is out of reach the distance is the reach. */
export function gapOf(samples: readonly Sample[], reachMetres: number): { largestMetres: number; meanMetres: number } {
  let [largest, sum] = [0, 0]
  const gap = ({ foot }: Sample) => (foot ? Math.abs(foot.signedMetres) : reachMetres)
  for (let i = 1; i < samples.length; i++) {
    if (samples[i].isExact) continue
    const [before, after] = [gap(samples[i - 1]), gap(samples[i])]
    largest = Math.max(largest, before, after)
    sum += ((before + after) / 2) * (samples[i].walkedMetres - samples[i - 1].walkedMetres)
  }
  const length = samples[samples.length - 1].walkedMetres
  return { largestMetres: largest, meanMetres: length > 0 ? sum / length : 0 }
}
