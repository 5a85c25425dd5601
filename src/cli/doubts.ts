/** What is doubtful about a placement before anything is estimated. Facts alone: nothing here refuses a study. */
import type { Placement } from '../placement.js'

/** A side with fewer units than this has no bandwidth of its own (METHODS section 5: the 20 nearest are always taken). */
const fewUnits = 20
const largeShareSetAside = 0.2
/** Fewer distinct distances than this share of the units: a score recorded in steps. */
const fewDistinct = 0.2
const named = 5

export interface UnitsBySide {
  readonly untreated: Float64Array
  readonly treated: Float64Array
}

/** Entries of every line by side; index = index of the line. */
export function unitsBySide(placement: Placement): UnitsBySide {
  const untreated = new Float64Array(placement.lines.length)
  const treated = new Float64Array(placement.lines.length)
  for (let e = 0; e < placement.line.length; e++)
    (placement.treated[e] === 1 ? treated : untreated)[placement.line[e]]++
  return { untreated, treated }
}

/** Lines that will have no estimate, or a weak one, for want of units. */
export function thinLines(placement: Placement, { untreated, treated }: UnitsBySide): string[] {
  const name = (i: number) => placement.lines[i].label
  const all = placement.lines.map((_, i) => i)
  const none = all.filter((i) => untreated[i] + treated[i] === 0)
  const oneSided = all.filter((i) => (untreated[i] === 0) !== (treated[i] === 0))
  const thin = all.filter((i) => {
    const least = Math.min(untreated[i], treated[i])
    return least > 0 && least < fewUnits
  })
  return [
    sentence(none, name, 'no units'),
    sentence(oneSided, name, 'units on one side alone'),
    sentence(thin, name, `fewer than ${fewUnits} units on a side`),
  ].filter((text) => text !== '')
}

/** A score recorded in steps: the same distances again and again. Empty where nearly all differ. */
export function repeatedDistances({ x }: Placement): string[] {
  const sorted = x.slice().sort()
  let distinct = sorted.length > 0 ? 1 : 0
  for (let i = 1; i < sorted.length; i++) if (sorted[i] !== sorted[i - 1]) distinct++
  if (x.length === 0 || distinct >= fewDistinct * x.length) return []
  return [`the score takes ${count(distinct)} distinct distances among ${count(x.length)} units: ties at every step`]
}

/** More units than this are not searched: a Map holds 2^24 keys. */
const mostSearched = 10_000_000

/** Units that stand at one and the same point, as addresses and geocoded centres do. */
export function repeatedPositions(lon: Float64Array, lat: Float64Array): string[] {
  if (lon.length > mostSearched) return []
  const points = new Map<number, Set<number>>()
  let units = 0
  let repeated = 0
  for (let i = 0; i < lon.length; i++) {
    if (Number.isNaN(lon[i]) || Number.isNaN(lat[i])) continue
    units++
    const there = points.get(lon[i])
    if (there === undefined) points.set(lon[i], new Set([lat[i]]))
    else if (there.has(lat[i])) repeated++
    else there.add(lat[i])
  }
  return repeated === 0 ? [] : [`${count(repeated)} of ${count(units)} units stand where another one does`]
}

export function largeSetAside(placed: number, kept: number): string[] {
  if (kept === 0 || kept - placed <= largeShareSetAside * kept) return []
  return [`${Math.round((100 * (kept - placed)) / kept)}% of the rows kept are not placed`]
}

function sentence(lines: readonly number[], name: (line: number) => string, says: string): string {
  if (lines.length === 0) return ''
  const shown = lines.slice(0, named).map(name).join('; ')
  const more = lines.length > named ? ` and ${count(lines.length - named)} more` : ''
  return `${count(lines.length)} ${lines.length === 1 ? 'line has' : 'lines have'} ${says}: ${shown}${more}`
}

/** A whole number with commas between thousands, whatever the language of the machine. */
export function count(value: number): string {
  return String(value).replace(/\B(?=(\d{3})+$)/g, ',')
}
