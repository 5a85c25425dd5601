/** Points at equal spacing along the border, where the jump is estimated (METHODS section 10, "Along the border"). */
import type { Border } from './border.js'
import { cutIntoPieces, type Piece } from './pieces.js'

export interface BorderPoint {
  readonly lon: number
  readonly lat: number
  /** Along its pair's border. */
  readonly positionMetres: number
  /** Index into the border's pieces. */
  readonly piece: number
  /** Where the run of pieces that the point is on begins along its pair's border. */
  readonly runStartMetres: number
  /** The stretch of border that the point stands for. */
  readonly lengthMetres: number
}

type Point = readonly [number, number]

/**
 * The pieces of a pair that follow one another without a gap, none of them set aside, make a run. A run of length L gets
 * n = max(1, round(L/spacing)) points at (k + ½)L/n, k = 0 … n−1, so each stands for a stretch of equal length, no
 * point is at an end and none is there twice. In the order of the pieces, which is canonical; longitudes in [−180, 180).
 * Throws RangeError where the spacing is not positive.
 */
export function pointsAlong(border: Pick<Border, 'pieces'>, spacingMetres: number): BorderPoint[] {
  if (!(spacingMetres > 0)) throw new RangeError(`spacingMetres must be above 0: got ${spacingMetres}`)
  const points: BorderPoint[] = []
  for (const run of runsOf(border.pieces)) points.push(...pointsOfRun(border.pieces, run, spacingMetres))
  return points
}

/** First piece of a run, and the one after its last. */
interface Run {
  readonly from: number
  readonly to: number
}

function runsOf(pieces: readonly Piece[]): Run[] {
  const runs: Run[] = []
  for (let from = 0, to = 0; from < pieces.length; from = to) {
    to = from + 1
    if (pieces[from].setAside !== undefined) continue
    while (to < pieces.length && pieces[to].setAside === undefined && follows(pieces[to - 1], pieces[to])) to++
    runs.push({ from, to })
  }
  return runs
}

function follows(before: Piece, after: Piece): boolean {
  const [end, start] = [before.coordinates[before.coordinates.length - 1], after.coordinates[0]]
  const isSamePair = before.zones[0] === after.zones[0] && before.zones[1] === after.zones[1]
  return isSamePair && end[0] === start[0] && end[1] === start[1]
}

function pointsOfRun(pieces: readonly Piece[], { from, to }: Run, spacingMetres: number): BorderPoint[] {
  const line: Point[] = [pieces[from].coordinates[0]]
  let total = 0
  for (let p = from; p < to; p++) {
    line.push(...pieces[p].coordinates.slice(1))
    total += pieces[p].lengthMetres
  }
  const count = Math.max(1, Math.round(total / spacingMetres))
  // cut into halves of the stretches: a point is where the first half of its stretch ends
  const halves = cutIntoPieces([{ points: line }], pieces[from].zones, total / (2 * count))
  const runStartMetres = pieces[from].startMetres
  const points: BorderPoint[] = []
  let piece = from
  for (let k = 0; k < count; k++) {
    const { coordinates } = halves[2 * k]
    const [lon, lat] = coordinates[coordinates.length - 1]
    const positionMetres = runStartMetres + ((k + 0.5) * total) / count
    while (piece + 1 < to && pieces[piece + 1].startMetres <= positionMetres) piece++
    const turns = 360 * Math.floor((lon + 180) / 360)
    points.push({ lon: lon - turns, lat, positionMetres, piece, runStartMetres, lengthMetres: total / count })
  }
  return points
}
