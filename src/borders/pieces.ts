/** Pieces: each pair's border cut into equal parts, the units of fixed effects, clustering, comparison and the map. */
import type { Chain } from './chains.js'
import { edgeLengthMetres } from './geodesy.js'
import type { PieceFacts } from './pieceFacts.js'

/** A stretch of border between an untreated and a treated zone: one polyline, never across a gap. */
export interface CutPiece {
  /** `UNTREATED | TREATED, piece N`: the id of its line. */
  readonly label: string
  /** Where zones differ in dose, the lower dose goes first. */
  readonly zones: readonly [untreated: string, treated: string]
  /** Along the pair's border, from 1. */
  readonly piece: number
  readonly lengthMetres: number
  /** [longitude, latitude] in degrees; longitudes run on past 180 where the piece crosses the antimeridian. */
  readonly coordinates: readonly (readonly [number, number])[]
  /** Where the piece begins along the pair's border, its chains end to end, in metres. */
  readonly startMetres: number
}

export interface Piece extends CutPiece, PieceFacts {
  /** Dose on the treated side less dose on the other, where zones differ in dose. */
  readonly dose?: number
  /** Why it is not used, e.g. `barrier rivers.geojson`; only where rules were applied (`eligible`). */
  readonly setAside?: string
}

type Point = readonly [number, number]

/** A cut nearer than this to a vertex is made at the vertex. */
const vertexMetres = 0.001

/** Cuts the chains of one pair, in order, each into round(length / pieceMetres) equal pieces, at least one. */
export function cutIntoPieces(
  chains: readonly Chain[],
  zones: readonly [untreated: string, treated: string],
  pieceMetres: number,
): CutPiece[] {
  const pieces: CutPiece[] = []
  let startMetres = 0
  for (const { points } of chains) {
    const lengths = stepMetres(points)
    const total = lengths.reduce((sum, length) => sum + length, 0)
    const count = Math.max(1, Math.round(total / pieceMetres))
    for (const coordinates of equalParts(points, lengths, total, count)) {
      const number = pieces.length + 1
      const lengthMetres = total / count
      const label = `${zones[0]} | ${zones[1]}, piece ${number}`
      pieces.push({ label, zones, piece: number, lengthMetres, coordinates, startMetres })
      startMetres += lengthMetres
    }
  }
  return pieces
}

export function stepMetres(points: readonly Point[]): number[] {
  return points.slice(1).map(([lon, lat], i) => edgeLengthMetres(points[i][0], points[i][1], lon, lat))
}

function equalParts(points: readonly Point[], lengths: readonly number[], total: number, count: number): Point[][] {
  const parts: Point[][] = []
  let part: Point[] = [points[0]]
  let walked = 0
  for (let i = 0; i + 1 < points.length; i++) {
    const [from, to] = [points[i], points[i + 1]]
    while (parts.length + 1 < count) {
      const ahead = ((parts.length + 1) * total) / count - walked
      if (ahead > lengths[i] - vertexMetres) break
      const cut = ahead < vertexMetres ? from : pointAfter(from, to, lengths[i], ahead)
      if (cut !== from) part.push(cut)
      parts.push(part)
      part = [cut]
    }
    walked += lengths[i]
    part.push(to)
  }
  parts.push(part)
  return parts
}

/** The point of a straight lon/lat edge `metres` along it from its start: secant steps on the length, to 0.1 mm. */
function pointAfter(from: Point, to: Point, length: number, metres: number): Point {
  const at = (t: number): Point => [from[0] + t * (to[0] - from[0]), from[1] + t * (to[1] - from[1])]
  let t = metres / length
  for (let step = 0; step < 20; step++) {
    const [lon, lat] = at(t)
    const short = metres - edgeLengthMetres(from[0], from[1], lon, lat)
    if (Math.abs(short) < 1e-4) break
    t = Math.min(1, Math.max(0, t + short / length))
  }
  return at(t)
}
