/**
 * Uniform random points on the ground near the border: how much land there is at each distance from it, which a count of
 * units must be held against (METHODS section 11).
 */
import { flattening, polarMetres, type Random } from '../math/index.js'
import type { Border } from './border.js'
import { type EligibilityRules, type Eligible, eligible } from './eligible.js'
import { measureUnits } from './measured.js'
import type { Piece } from './pieces.js'

export interface RandomGround {
  /** Index into the placement's lines of the pieces in use, by point. */
  readonly line: Int32Array
  /** Signed as units are, in the unit of the rules. */
  readonly x: Float64Array
  readonly treated: Uint8Array
  /** Points per square kilometre of land, the same everywhere. */
  readonly perSquareKm: number
}

/** A degree of latitude is never shorter than this. */
const leastMetresPerDegree = 110_574
const radiansPerDegree = Math.PI / 180
const eccentricitySquared = flattening * (2 - flattening)

/** A box in degrees around a piece. */
interface Box {
  readonly piece: number
  readonly west: number
  readonly east: number
  readonly south: number
  readonly north: number
  readonly squareKm: number
}

/**
 * Points within `radiusMetres` of the border, uniform over the land that units could be placed from: drawn in a box
 * around every piece in use, and kept where that piece is the nearest and the rules place a unit. About `tries` are
 * drawn. Rules that look at a unit's record (side) must not be among `rules`.
 */
export function randomGround(
  border: Border,
  pieces: readonly Piece[],
  rules: EligibilityRules,
  radiusMetres: number,
  tries: number,
  random: Random,
): RandomGround {
  const boxes = pieces.flatMap((piece, p) => (piece.setAside === undefined ? [boxAround(piece, p, radiusMetres)] : []))
  const total = boxes.reduce((sum, { squareKm }) => sum + squareKm, 0)
  const lon: number[] = []
  const lat: number[] = []
  const drawnFor: number[] = []
  const perSquareKm = tries / total
  for (const box of boxes) {
    const count = wholeAtRandom(box.squareKm * perSquareKm, random)
    for (let i = 0; i < count; i++) {
      const [x, y] = pointIn(box, random)
      lon.push(x)
      lat.push(y)
      drawnFor.push(box.piece)
    }
  }
  const measured = measureUnits(border, Float64Array.from(lon), Float64Array.from(lat))
  const placed: Eligible = eligible(border, measured, { ...rules, reachMetres: radiusMetres })
  const { unit, line, x, treated } = placed.placement
  const kept = unit.map((_, e) => e).filter((e) => measured.piece[unit[e]] === drawnFor[unit[e]])
  return {
    line: kept.map((e) => line[e]),
    x: Float64Array.from(kept, (e) => x[e]),
    treated: Uint8Array.from(kept, (e) => treated[e]),
    perSquareKm,
  }
}

/** The whole number below or above, so that its mean is the number. */
function wholeAtRandom(number: number, random: Random): number {
  const below = Math.floor(number)
  return below + (random.next() < number - below ? 1 : 0)
}

function boxAround({ coordinates }: Piece, piece: number, radiusMetres: number): Box {
  const lons = coordinates.map(([lon]) => lon)
  const lats = coordinates.map(([, lat]) => lat)
  const up = radiusMetres / leastMetresPerDegree
  const south = Math.max(-90, Math.min(...lats) - up)
  const north = Math.min(90, Math.max(...lats) + up)
  const narrowest = Math.cos(Math.max(Math.abs(south), Math.abs(north)) * radiansPerDegree)
  const across = narrowest > 1e-3 ? Math.min(180, up / narrowest) : 180
  const [west, east] = [Math.min(...lons) - across, Math.max(...lons) + across]
  const wide = Math.min(360, east - west)
  return { piece, west, east: west + wide, south, north, squareKm: squareKmOf(wide, south, north) }
}

/** Land per unit of latitude and longitude, up to a factor: cos φ/(1 − e² sin² φ)². */
function landAt(latDegrees: number): number {
  const sine = Math.sin(latDegrees * radiansPerDegree)
  return Math.cos(latDegrees * radiansPerDegree) / (1 - eccentricitySquared * sine * sine) ** 2
}

/** Area of a box on the ellipsoid (Snyder 1987, Map Projections, p. 16: the authalic integral). */
function squareKmOf(wideDegrees: number, south: number, north: number): number {
  const e = Math.sqrt(eccentricitySquared)
  const integral = (latDegrees: number) => {
    const sine = Math.sin(latDegrees * radiansPerDegree)
    return sine / (2 * (1 - eccentricitySquared * sine * sine)) + Math.atanh(e * sine) / (2 * e)
  }
  return (polarMetres ** 2 * wideDegrees * radiansPerDegree * (integral(north) - integral(south))) / 1e6
}

function pointIn({ west, east, south, north }: Box, random: Random): [number, number] {
  const most = south <= 0 && north >= 0 ? 1 : Math.max(landAt(south), landAt(north))
  for (;;) {
    const lat = south + (north - south) * random.next()
    if (random.next() * most > landAt(lat)) continue
    const lon = west + (east - west) * random.next()
    return [lon - 360 * Math.round(lon / 360), lat]
  }
}
