/** What each zone is to the border: treated or untreated, or of some dose; and which pairs of zones are parted by it. */
import type { Problem } from '../problem.js'
import type { Border, BorderOptions } from './border.js'
import { dosesOf } from './dose.js'
import type { Relevance } from './sharedBorders.js'
import { treatedZones } from './treated.js'
import type { Zones } from './zones.js'

/** Name of the land outside every zone, where it is treated as one. */
export const outsideName = 'outside'

export type Roles = Pick<Border, 'treatedZone' | 'doses' | 'outsideZone'>

/** In the order of the file, the land outside last; adds what is wrong to `problems`. */
export function rolesOf(zones: Zones, options: BorderOptions, problems: Problem[]): Roles {
  const { treated, dose } = options
  const isOutsideUntreated = options.outside === 'untreated'
  const { file, names } = zones
  const outsideZone = isOutsideUntreated ? names.length : -1
  if (isOutsideUntreated && names.includes(outsideName)) {
    const found = `a zone named "${outsideName}"`
    problems.push({ file, what: 'outside: untreated takes the name of a zone', found, todo: 'rename the zone' })
  }
  if (treated !== undefined && dose === undefined) {
    const treatedZone = treatedZones(zones, treated, isOutsideUntreated, problems)
    return { treatedZone: isOutsideUntreated ? Uint8Array.from([...treatedZone, 0]) : treatedZone, outsideZone }
  }
  if (treated !== undefined || dose === undefined) throw new RangeError('give either treated or dose')
  if (isOutsideUntreated) {
    const todo = 'leave outside out, or name treated zones instead of a dose'
    problems.push({ file, what: 'outside: the land outside has no dose', found: 'untreated', todo })
  }
  const doses = dosesOf(zones, dose, problems)
  const lowest = doses.reduce((least, next) => Math.min(least, next), Infinity)
  return { treatedZone: Uint8Array.from(doses, (own) => (own > lowest ? 1 : 0)), doses, outsideZone }
}

/** Roles of the zones in the order of their names. */
export function sortedRoles({ treatedZone, doses }: Roles, order: readonly number[]) {
  const isTreated = Uint8Array.from(order, (zone) => treatedZone[zone])
  const sorted = doses && Float64Array.from(order, (zone) => doses[zone])
  const isRelevant: Relevance = sorted
    ? (own, other) => sorted[own] > sorted[other]
    : (own, other) => isTreated[own] > isTreated[other]
  return { isTreated, isRelevant }
}
