/** Which pieces and units count, by rules over facts measured once; and what each rule costs. */
import type { Line, Placement } from '../placement.js'
import type { Border } from './border.js'
import { type Measured, noBorderOfZone, positionMissing, positionOutOfRange } from './measured.js'
import { metresToCorner } from './neighbourhood.js'
import type { Piece } from './pieces.js'
import { type Conflict, conflictCounter, type SideRule, sideFinder, sideReasons } from './sides.js'
import { manyZones, noZone } from './zoneGrid.js'

/** A layer beside the border; `share` by piece, from `shareNear`. */
export interface LayerShare {
  readonly name: string
  readonly share: Float64Array
}

export interface EligibilityRules {
  /** Metres in one unit of the study's length. */
  readonly metresPerUnit: number
  /** Units farther from the border are set aside; absent: none. */
  readonly reachMetres?: number
  /** Pieces with more than half their length near one of these are set aside, and so are those of `overlaps`. */
  readonly barriers?: readonly LayerShare[]
  readonly overlaps?: readonly LayerShare[]
  /** Pieces that turn by more are set aside. */
  readonly largestTurnDegrees?: number
  /** Units whose foot is nearer to a corner are set aside. */
  readonly cornerMetres?: number
  /** Units nearer to the border are set aside: their side is not sure. */
  readonly positionErrorMetres?: number
  /** The zone by the record, beside that of the map. */
  readonly side?: SideRule
}

/** What is left after a rule. */
export interface WaterfallStep {
  readonly rule: string
  readonly pieces: number
  readonly km: number
  /** Pairs of zones. */
  readonly pairs: number
  /** Units that are placed as far as the rules up to this one go. */
  readonly units: number
}

/** Where each unit stands on the ground; one element per unit, as `Measured` has it. */
export type Ground = Pick<Measured, 'zone' | 'piece' | 'footLon' | 'footLat' | 'positionMetres'>

export interface Eligible {
  /** Lines are the pieces not set aside; the unit is its row, from 0. */
  readonly placement: Placement
  readonly ground: Ground
  /** Units not placed, by reason. */
  readonly setAside: Map<string, number>
  /** Why each unit was not placed: index into `labels`, -1 where it was. */
  readonly reason: { readonly codes: Int32Array; readonly labels: readonly string[] }
  /** All pieces of the border, with those marked that are set aside. */
  readonly pieces: readonly Piece[]
  /** The last step has the units of the placement. */
  readonly waterfall: readonly WaterfallStep[]
  /** With a side rule: units by record and map where the two differ, most units first. */
  readonly conflicts?: readonly Conflict[]
}

/** A unit nearer to the border than this is on it, and on neither side. */
const onBorderMetres = 0.001
/** Share of a piece's length that must run along a layer for the piece to be set aside. */
const mostAlong = 0.5

const unitReasons = [
  'position missing',
  'position out of range',
  'exactly on the border',
  'in no zone',
  'in more than one zone',
  'own zone has no border where the dose differs',
  'within position error',
  ...sideReasons,
  'beyond reach',
] as const

type UnitReason = (typeof unitReasons)[number]
const codeOf = (reason: UnitReason) => unitReasons.indexOf(reason)

/**
 * Each unit gets one entry, or one reason, the first that applies: those about its position and side, reach, its
 * nearest piece (a unit is set aside with it), corners. Its side comes from a zone, of the map or the record, never from
 * the nearest segment. x is in the study's unit, positive where treated.
 * Throws RangeError where a rule is out of range or a list has not one element per piece or unit.
 */
export function eligible(border: Border, measured: Measured, rules: EligibilityRules): Eligible {
  checkRules(border, measured, rules)
  const pieceRules = pieceRulesOf(border, rules)
  const pieces = border.pieces.map((piece, p) => {
    const rule = pieceRules.find(({ isAgainst }) => isAgainst(p))
    return rule ? { ...piece, setAside: rule.name } : piece
  })
  const lostAt = Int32Array.from(pieces, (_, p) => {
    const rule = pieceRules.findIndex(({ isAgainst }) => isAgainst(p))
    return rule < 0 ? pieceRules.length : rule
  })
  const nearCorner = 'near a corner where three zones meet'
  const labels = [...unitReasons, ...pieceRules.map(({ name }) => `nearest piece set aside: ${name}`), nearCorner]
  const { codes, isTreated, conflicts } = judgeUnits(border, measured, rules)
  const toCorner = (rules.cornerMetres ?? 0) > 0 ? metresToCorner(border, measured) : undefined
  const leftAt = new Float64Array(pieceRules.length + 1)
  let placed = 0
  for (let i = 0; i < codes.length; i++) {
    if (codes[i] >= 0) continue
    const lost = lostAt[measured.piece[i]]
    leftAt[lost]++
    if (lost < pieceRules.length) codes[i] = unitReasons.length + lost
    else if (toCorner && toCorner[i] < (rules.cornerMetres as number)) codes[i] = labels.length - 1
    else placed++
  }
  const waterfall = waterfallOf(border, pieceRules, lostAt, leftAt)
  if (toCorner) waterfall.push({ ...waterfall[waterfall.length - 1], rule: 'corners', units: placed })
  return {
    placement: placementOf(pieces, measured, codes, isTreated, placed, rules.metresPerUnit),
    ground: measured,
    setAside: counted(codes, labels),
    reason: { codes, labels },
    pieces,
    waterfall,
    ...(conflicts ? { conflicts } : {}),
  }
}

function checkRules({ pieces }: Border, { piece }: Measured, rules: EligibilityRules): void {
  const { metresPerUnit, reachMetres = Infinity, barriers = [], overlaps = [], side } = rules
  if (!(metresPerUnit > 0)) throw new RangeError(`metresPerUnit must be above 0: got ${metresPerUnit}`)
  if (!(reachMetres > 0)) throw new RangeError(`reachMetres must be above 0: got ${reachMetres}`)
  for (const key of ['cornerMetres', 'positionErrorMetres', 'largestTurnDegrees'] as const) {
    const value = rules[key] ?? 0
    if (!(value >= 0)) throw new RangeError(`${key} must be 0 or more: got ${value}`)
  }
  for (const { name, share } of [...barriers, ...overlaps]) {
    if (share.length !== pieces.length)
      throw new RangeError(`${name} has ${share.length} shares, the border ${pieces.length} pieces`)
  }
  if (side && side.recordZone.length !== piece.length)
    throw new RangeError(`the record has ${side.recordZone.length} zones for ${piece.length} units`)
}

interface PieceRule {
  readonly name: string
  readonly isAgainst: (piece: number) => boolean
}

/** In the order of the waterfall. */
function pieceRulesOf({ pieces }: Border, { barriers = [], overlaps = [], largestTurnDegrees }: EligibilityRules) {
  const along = (kind: string, { name, share }: LayerShare): PieceRule => ({
    name: `${kind} ${name}`,
    isAgainst: (piece) => share[piece] > mostAlong,
  })
  const rules = [
    ...barriers.map((layer) => along('barrier', layer)),
    ...overlaps.map((layer) => along('overlap', layer)),
  ]
  if (largestTurnDegrees !== undefined)
    rules.push({
      name: `turns by more than ${largestTurnDegrees} degrees`,
      isAgainst: (piece) => pieces[piece].largestTurnDegrees > largestTurnDegrees,
    })
  return rules
}

/** The reasons that lie with the unit itself (-1: none), and the sides. */
function judgeUnits(border: Border, measured: Measured, rules: EligibilityRules) {
  const { zone, piece, distanceMetres } = measured
  const { reachMetres = Infinity, positionErrorMetres = 0, side } = rules
  const count = piece.length
  const codes = new Int32Array(count).fill(-1)
  const isTreated = new Uint8Array(count)
  const findSide = sideFinder(border, side)
  const counter = side && conflictCounter(border.names)
  const firstSideCode = codeOf(sideReasons[0])
  const fromRecord = side?.onConflict === 'record' ? side.recordZone : undefined
  for (let i = 0; i < count; i++) {
    if (counter && piece[i] !== positionMissing && piece[i] !== positionOutOfRange)
      counter.add((side as SideRule).recordZone[i], zone[i])
    const reason = positionReason(zone[i], piece[i], distanceMetres[i], fromRecord?.[i])
    if (reason !== undefined) codes[i] = codeOf(reason)
    else if (distanceMetres[i] < positionErrorMetres) codes[i] = codeOf('within position error')
    else {
      const found = findSide(zone[i], piece[i], i)
      if (found < 0) codes[i] = firstSideCode - found - 1
      else if (distanceMetres[i] > reachMetres) codes[i] = codeOf('beyond reach')
      else isTreated[i] = found
    }
  }
  return { codes, isTreated, conflicts: counter?.table() }
}

/** `recordZone`: where the record decides the side, so that a unit off the map's zones may have one. */
function positionReason(
  zone: number,
  piece: number,
  metres: number,
  recordZone: number | undefined,
): UnitReason | undefined {
  if (piece === positionMissing) return 'position missing'
  if (piece === positionOutOfRange) return 'position out of range'
  if (metres < onBorderMetres) return 'exactly on the border'
  if (recordZone === undefined || recordZone < 0) {
    if (zone === noZone) return 'in no zone'
    if (zone === manyZones) return 'in more than one zone'
  }
  return piece === noBorderOfZone ? 'own zone has no border where the dose differs' : undefined
}

function waterfallOf(
  { pieces }: Border,
  rules: readonly PieceRule[],
  lostAt: Int32Array,
  leftAt: Float64Array,
): WaterfallStep[] {
  return ['shared borders', ...rules.map(({ name }) => name)].map((rule, step) => {
    const left = pieces.filter((_, p) => lostAt[p] >= step)
    return {
      rule,
      pieces: left.length,
      km: left.reduce((sum, piece) => sum + piece.lengthMetres, 0) / 1000,
      pairs: new Set(left.map((piece) => JSON.stringify(piece.zones))).size,
      units: leftAt.slice(step).reduce((sum, units) => sum + units, 0),
    }
  })
}

function placementOf(
  pieces: readonly Piece[],
  measured: Measured,
  codes: Int32Array,
  isTreated: Uint8Array,
  placed: number,
  metresPerUnit: number,
): Placement {
  const lineOfPiece = new Int32Array(pieces.length).fill(-1)
  const lines: Line[] = []
  pieces.forEach(({ label, zones, piece, lengthMetres, dose, setAside }, p) => {
    if (setAside !== undefined) return
    lineOfPiece[p] = lines.length
    lines.push({ id: label, label, zones, piece, lengthMetres, ...(dose === undefined ? {} : { dose }) })
  })
  const unit = new Int32Array(placed)
  const line = new Int32Array(placed)
  const x = new Float64Array(placed)
  const treated = new Uint8Array(placed)
  let entry = 0
  for (let i = 0; i < codes.length; i++) {
    if (codes[i] >= 0) continue
    unit[entry] = i
    line[entry] = lineOfPiece[measured.piece[i]]
    treated[entry] = isTreated[i]
    x[entry] = ((isTreated[i] ? 1 : -1) * measured.distanceMetres[i]) / metresPerUnit
    entry++
  }
  return { lines, unit, line, x, treated }
}

function counted(codes: Int32Array, labels: readonly string[]): Map<string, number> {
  const counts = new Float64Array(labels.length)
  for (let i = 0; i < codes.length; i++) if (codes[i] >= 0) counts[codes[i]]++
  return new Map(labels.map((label, code): [string, number] => [label, counts[code]]).filter(([, count]) => count > 0))
}
