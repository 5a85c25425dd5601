/** Which zones are treated, by their names or by a property. */
import { distance } from 'fastest-levenshtein'
import type { Problem } from '../problem.js'
import { listed, shown } from './geojson.js'
import type { Zones } from './zones.js'

/** Names of the treated zones, or the property and value that mark them. */
export type Treated = readonly string[] | { readonly property: string; readonly equals: string | number | boolean }

/**
 * 1 for a treated zone, in the order of the file. Problems: a name that is no zone, a property or value that no zone
 * has, nothing treated, and nothing untreated unless the land outside is (`isOutsideUntreated`).
 */
export function treatedZones(
  zones: Zones,
  treated: Treated,
  isOutsideUntreated: boolean,
  problems: Problem[],
): Uint8Array {
  const { file, names, properties } = zones
  const say = (what: string, found: string, todo: string) => problems.push({ file, what, found, todo })
  let isTreated: Uint8Array
  if ('property' in treated) {
    const { property, equals } = treated
    isTreated = Uint8Array.from(properties, (own) => (own[property] === equals ? 1 : 0))
    const values = [...new Set(properties.map((own) => own[property]).filter((value) => value !== undefined))]
    if (values.length === 0) {
      const existing = listed([...new Set(properties.flatMap((own) => Object.keys(own)))])
      say(`treated.property: no zone has ${shown(property)}`, 'nothing', `name one that exists: ${existing}`)
      return isTreated
    }
    if (!isTreated.includes(1)) {
      const todo = `name a value that exists: ${listed(values.map(shown))}`
      say(`treated.equals: no zone has this ${property}`, shown(equals), todo)
      return isTreated
    }
  } else {
    const known = new Set(names)
    const before = problems.length
    for (const name of treated) {
      if (known.has(name)) continue
      const near = nearestName(name, names)
      say('treated: no zone has this name', shown(name), near ? `did you mean ${shown(near)}?` : 'name a zone')
    }
    isTreated = Uint8Array.from(names, (name) => (treated.includes(name) ? 1 : 0))
    if (problems.length > before) return isTreated
    if (!isTreated.includes(1)) say('treated: no zone is treated', 'an empty list', `name zones: ${listed(names)}`)
  }
  if (!isTreated.includes(0) && !isOutsideUntreated)
    say('treated: every zone is treated', `${names.length} zones`, 'leave at least one zone untreated')
  return isTreated
}

/** The zone name with the fewest letters to change, if that is less than half of them; case is no difference. */
function nearestName(name: string, names: readonly string[]): string | undefined {
  const wanted = name.toLowerCase()
  let best: string | undefined
  let least = Math.max(1, Math.ceil(name.length / 2))
  for (const candidate of names) {
    const changes = distance(wanted, candidate.toLowerCase())
    if (changes < least) {
      best = candidate
      least = changes
    }
  }
  return best
}
