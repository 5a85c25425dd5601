/** A prepared border as plain data, and back: what need not be found again while zones and options stay the same. */
import type { Checked, Problem } from '../problem.js'
import { type Border, type BorderOptions, borderOfPieces, namesOf } from './border.js'
import type { Corner } from './corners.js'
import { type Measured, reasonWithout } from './measured.js'
import type { Piece } from './pieces.js'
import { rolesOf } from './roles.js'
import { manyZones, noZone } from './zoneGrid.js'
import type { Zones } from './zones.js'

/** Survives JSON to the last bit. */
export interface Lines {
  readonly pieces: readonly Piece[]
  readonly corners: readonly Corner[]
}

export function linesOf({ pieces, corners }: Border): Lines {
  return { pieces, corners }
}

/** The border of the same zones and options, without looking for what they share. Problems are those of the roles. */
export function borderOfLines(zones: Zones, options: BorderOptions, { pieces, corners }: Lines): Checked<Border> {
  const problems: Problem[] = []
  const roles = rolesOf(zones, options, problems)
  if (problems.length > 0) return { ok: false, problems }
  return { ok: true, value: borderOfPieces(zones, roles, namesOf(zones, roles), pieces, corners) }
}

/** Texts as codes into labels, -1 where missing. */
interface Texts {
  readonly codes: Int32Array
  readonly labels: readonly string[]
}

/** What was measured, as a table keeps it; one element for each unit. */
export interface MeasuredColumns extends Omit<Measured, 'zone' | 'piece'> {
  readonly zone: Texts
  /** The text in `zone` for more than one. */
  readonly severalZones: string
  /** Label of the nearest piece. */
  readonly nearest: Texts
}

/** The units as they were measured; undefined where a zone or a piece is none of the border's, or its name not its own. */
export function measuredOfColumns(
  border: Border,
  lon: Float64Array,
  lat: Float64Array,
  { zone, severalZones, nearest, ...rest }: MeasuredColumns,
): Measured | undefined {
  const zoneOf = new Map([...border.names.map((name, i) => [name, i] as const), [severalZones, manyZones]])
  const pieceOf = new Map(border.pieces.map(({ label }, p) => [label, p]))
  if (zoneOf.size <= border.names.length || pieceOf.size < border.pieces.length) return undefined
  const zones = zone.labels.map((label) => zoneOf.get(label))
  const pieces = nearest.labels.map((label) => pieceOf.get(label))
  if (zones.includes(undefined) || pieces.includes(undefined)) return undefined
  return {
    zone: zone.codes.map((code) => (code < 0 ? noZone : (zones[code] as number))),
    piece: nearest.codes.map((code, i) => (code < 0 ? reasonWithout(lon[i], lat[i]) : (pieces[code] as number))),
    ...rest,
  }
}
