/** The dose of every zone: a number among its properties, such as a tax rate. */
import type { Problem } from '../problem.js'
import { listed, shown } from './geojson.js'
import type { Zones } from './zones.js'

/**
 * In the order of the file. Problems: a property that no zone has, zones where it is missing or no number (named),
 * the same dose everywhere. Text is no number: "0.5" may be a code.
 */
export function dosesOf({ file, names, properties }: Zones, property: string, problems: Problem[]): Float64Array {
  const say = (what: string, found: string, todo: string) => problems.push({ file, what, found, todo })
  const values = properties.map((own) => own[property])
  const doses = Float64Array.from(values, (value) => (typeof value === 'number' ? value : Number.NaN))
  if (values.every((value) => value === undefined)) {
    const existing = listed([...new Set(properties.flatMap((own) => Object.keys(own)))])
    say(`dose: no zone has ${shown(property)}`, 'nothing', `name a property that exists: ${existing}`)
    return doses
  }
  const missing = names.filter((_, i) => values[i] === undefined || values[i] === null)
  const wrong = names.filter((_, i) => values[i] !== undefined && values[i] !== null && !Number.isFinite(doses[i]))
  if (missing.length > 0)
    say(`dose: ${shown(property)} is missing`, `in ${listed(missing)}`, 'give these zones a dose, or take them out')
  if (wrong.length > 0) {
    const example = shown(values[names.indexOf(wrong[0])])
    say(
      `dose: ${shown(property)} is no number`,
      `${example} in ${listed(wrong)}`,
      'write numbers without quotation marks',
    )
  }
  if (missing.length + wrong.length === 0 && new Set(doses).size === 1)
    say(`dose: every zone has the same ${shown(property)}`, String(doses[0]), 'name a property that differs')
  return doses
}

/**
 * Zones split in two so that any two zones of different dose are apart in at least one of the splits: the binary digits
 * of the dose's rank.
 */
export function splitsByDose(doses: Float64Array): Uint8Array[] {
  const levels = [...new Set(doses)].sort((a, b) => a - b)
  const rank = new Map(levels.map((level, i) => [level, i]))
  const digits = Math.ceil(Math.log2(levels.length))
  return Array.from({ length: digits }, (_, digit) =>
    Uint8Array.from(doses, (dose) => ((rank.get(dose) as number) >> digit) & 1),
  )
}
