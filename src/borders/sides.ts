/** The side of a unit: by the map, or by the record where the study has a column for it. */
import type { Border } from './border.js'
import { isOwnZoneOnly } from './ownZone.js'
import { manyZones, noZone } from './zoneGrid.js'

/** `recordZone` of a unit without a record. */
export const recordMissing = -1
/** `recordZone` of a unit whose record names no zone of the map. */
export const recordUnknown = -2

export interface SideRule {
  /** Index into the border's `names` of the zone by the record, one per unit; or -1 missing, -2 no zone of the map. */
  readonly recordZone: Int32Array
  /**
   * Where record and map differ: set the unit aside, or believe one of them. A missing record contradicts nothing, and
   * the map decides, unless the record is believed; then the unit is set aside. The distance is always the map's.
   */
  readonly onConflict: 'set-aside' | 'map' | 'record'
}

/** Units by record and map; the two differ. */
export interface Conflict {
  /** Name of a zone, or what is said in brackets where there is none. */
  readonly record: string
  readonly map: string
  readonly units: number
}

export const sideReasons = [
  'record and map disagree',
  'zone by the record missing',
  'zone by the record is none of the map',
  'zone by the record has no part in the nearest border',
] as const

const disagree = -1
const missing = -2
const unknown = -3
const noPart = -4

/** 1 treated, 0 untreated, or -1 - the index of a reason in `sideReasons`. */
export function sideFinder(
  border: Border,
  rule: SideRule | undefined,
): (zone: number, piece: number, unit: number) => number {
  const { treatedZone, treatedOfPiece, untreatedOfPiece } = border
  const isByPiece = isOwnZoneOnly(border)
  const sideOf = (zone: number, piece: number) => {
    if (!isByPiece) return treatedZone[zone]
    if (zone === treatedOfPiece[piece]) return 1
    return zone === untreatedOfPiece[piece] ? 0 : noPart
  }
  if (!rule || rule.onConflict === 'map') return sideOf
  const { recordZone, onConflict } = rule
  if (onConflict === 'set-aside')
    return (zone, piece, unit) =>
      recordZone[unit] === zone || recordZone[unit] === recordMissing ? sideOf(zone, piece) : disagree
  return (_, piece, unit) => {
    const zone = recordZone[unit]
    if (zone >= 0) return sideOf(zone, piece)
    return zone === recordMissing ? missing : unknown
  }
}

/** Counts units by record and map, and lists those where the two differ. */
export function conflictCounter(names: readonly string[]) {
  const [missingText, unknownText] = ['(missing)', '(no zone of the map)']
  const [nowhere, several] = ['(in no zone)', '(in more than one zone)']
  const records = new Map([
    [recordMissing, missingText],
    [recordUnknown, unknownText],
  ])
  const places = new Map([
    [noZone, nowhere],
    [manyZones, several],
  ])
  const width = names.length + 2
  const counts = new Map<number, number>()
  return {
    add(record: number, map: number): void {
      if (record === map && record >= 0) return
      const key = (record + 2) * width + (map + 2)
      counts.set(key, (counts.get(key) ?? 0) + 1)
    },
    table(): Conflict[] {
      return [...counts]
        .map(([key, units]) => {
          const [record, map] = [Math.floor(key / width) - 2, (key % width) - 2]
          return { record: records.get(record) ?? names[record], map: places.get(map) ?? names[map], units }
        })
        .sort((a, b) => b.units - a.units || compare(a.record, b.record) || compare(a.map, b.map))
    },
  }
}

function compare(a: string, b: string): number {
  return a < b ? -1 : a > b ? 1 : 0
}

/**
 * Zones by the record from a column of labels (`codes` index `labels`, -1 missing), and the labels that name no zone,
 * with their units, most first. Spaces around a label are no difference, as in names of zones.
 */
export function zonesByRecord(
  names: readonly string[],
  column: { readonly codes: Int32Array; readonly labels: readonly string[] },
): { recordZone: Int32Array; unknown: { readonly label: string; readonly units: number }[] } {
  const index = new Map(names.map((name, zone) => [name, zone]))
  const zoneOfLabel = Int32Array.from(column.labels, (label) =>
    label.trim() === '' ? recordMissing : (index.get(label.trim()) ?? recordUnknown),
  )
  const recordZone = column.codes.map((code) => (code < 0 ? recordMissing : zoneOfLabel[code]))
  const units = new Float64Array(column.labels.length)
  for (const code of column.codes) if (code >= 0) units[code]++
  const named = column.labels
    .map((label, code) => ({ label, units: units[code] }))
    .filter(({ units: count }, code) => zoneOfLabel[code] === recordUnknown && count > 0)
    .sort((a, b) => b.units - a.units || compare(a.label, b.label))
  return { recordZone, unknown: named }
}
