/** Borders that change nothing: those between zones of equal status (METHODS section 11). */
import type { Checked } from '../problem.js'
import { type Border, type BorderOptions, borderOfPaths, type PairPath, pathsWhere, prepareZones } from './border.js'
import { outsidePaths } from './outside.js'
import type { Zones } from './zones.js'

/**
 * The border between zones of equal status: both treated, both untreated, or of equal dose. Undefined where no two such
 * zones share one. In a pair, the zone whose name sorts later stands on the treated side, and the land outside on the
 * untreated one: which is which says nothing. Units serve the borders of their own zone alone. Corners are those of all
 * borders, real ones among them. Zones that only face each other beyond snap have no such border, and are no problem.
 * Problems and errors otherwise as in `prepareBorder`.
 */
export function placeboBorder(zones: Zones, options: BorderOptions): Checked<Border> | undefined {
  const prepared = prepareZones(zones, options)
  if (!prepared.ok) return prepared
  const { roles, order, boundaries, nearness, metres } = prepared.value
  const { doses, treatedZone, outsideZone } = roles
  const statusOf = (zone: number) => (doses ? doses[zone] : treatedZone[zone])
  const zoneOf = [...order, outsideZone]
  const paths: PairPath[] = pathsWhere(boundaries, nearness, (own, other) => own > other, metres)
  if (outsideZone >= 0) {
    const every = new Uint8Array(order.length).fill(1)
    const all = pathsWhere(boundaries, nearness, () => true, metres)
    for (const path of outsidePaths(boundaries, nearness, every, all)) paths.push({ ...path, untreated: outsideZone })
  }
  const isEqual = ({ untreated, treated }: PairPath) => statusOf(zoneOf[untreated]) === statusOf(zoneOf[treated])
  if (!paths.some(isEqual)) return undefined
  const ready = { ...prepared.value, roles: { treatedZone, outsideZone } }
  return {
    ok: true,
    value: { ...borderOfPaths(zones, ready, options.pieceMetres, paths, isEqual), isEqualStatus: true },
  }
}
