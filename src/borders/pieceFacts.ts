/** How straight a piece is: a border that bends biases estimates by distance alone (METHODS section 10). */
import { edgeLengthMetres, geodesicMetres } from './geodesy.js'
import { localPlane } from './localPlane.js'

type Points = readonly (readonly [number, number])[]

export interface PieceFacts {
  /** Geodesic between the ends over the length: 1 on a straight piece, 0 on a closed one. */
  readonly straightness: number
  /**
   * The largest angle between the directions of any two stretches a tenth of the piece long, 0 to 180 degrees. Bends
   * that are undone within a tenth of the piece are roughness, and smoothed away.
   */
  readonly largestTurnDegrees: number
}

/** A stretch is this share of its piece … */
const stretchShare = 0.1
/** … and at least this many tolerances long, so that a jagged drawing is no turn; never more than half the piece. */
const stretchTolerances = 2
/** Stretches begin at every tenth of a stretch. */
const startsPerStretch = 10

/** `points` in degrees, at least two; `snapMetres` is the tolerance of the border. */
export function factsOfPiece(points: Points, snapMetres: number): PieceFacts {
  const walked = [0]
  for (let i = 1; i < points.length; i++) {
    const [[lon0, lat0], [lon1, lat1]] = [points[i - 1], points[i]]
    walked.push(walked[i - 1] + edgeLengthMetres(lon0, lat0, lon1, lat1))
  }
  const length = walked[walked.length - 1]
  const [first, last] = [points[0], points[points.length - 1]]
  const straightness = length > 0 ? Math.min(1, geodesicMetres(first[0], first[1], last[0], last[1]) / length) : 1
  const share = Math.min(0.5, Math.max(stretchShare, (stretchTolerances * snapMetres) / length))
  return { straightness, largestTurnDegrees: widestAngle(directions(points, walked, share)) }
}

/** Directions in degrees, clockwise from north, of stretches that are `share` of the piece. */
function directions(points: Points, walked: readonly number[], share: number): number[] {
  const length = walked[walked.length - 1]
  const starts = Math.round(((1 - share) / share) * startsPerStretch)
  const found: number[] = []
  // places at which stretches begin and end, walking along the piece once for each
  const from = placesAlong(points, walked, starts, 0, (1 - share) * length)
  const to = placesAlong(points, walked, starts, share * length, length)
  for (let i = 0; i <= starts; i++) {
    const plane = localPlane((from[i][0] + to[i][0]) / 2, (from[i][1] + to[i][1]) / 2)
    const east = (to[i][0] - from[i][0]) * plane.metresPerLon
    const north = (to[i][1] - from[i][1]) * plane.metresPerLat
    if (east !== 0 || north !== 0) found.push((Math.atan2(east, north) * 180) / Math.PI)
  }
  return found
}

/** `count` + 1 points, evenly from `first` to `last` metres along the line. */
function placesAlong(
  points: Points,
  walked: readonly number[],
  count: number,
  first: number,
  last: number,
): [number, number][] {
  const places: [number, number][] = []
  let step = 0
  for (let i = 0; i <= count; i++) {
    const metres = first + (i / count) * (last - first)
    while (step + 2 < points.length && walked[step + 1] < metres) step++
    const length = walked[step + 1] - walked[step]
    const t = length > 0 ? Math.min(1, Math.max(0, (metres - walked[step]) / length)) : 0
    const [[lon0, lat0], [lon1, lat1]] = [points[step], points[step + 1]]
    places.push([lon0 + t * (lon1 - lon0), lat0 + t * (lat1 - lat0)])
  }
  return places
}

/** The largest angle between two of the directions, 0 to 180. */
function widestAngle(degrees: readonly number[]): number {
  let widest = 0
  for (let i = 0; i < degrees.length; i++) {
    for (let j = 0; j < i; j++) {
      const apart = Math.abs(degrees[i] - degrees[j])
      widest = Math.max(widest, apart > 180 ? 360 - apart : apart)
    }
  }
  return widest
}
