import { closest, distance } from 'fastest-levenshtein'

/** The known name a slip of the hand would turn into `name`, if there is one. */
export function nearestName(name: string, known: readonly string[]): string | undefined {
  if (known.length === 0) return undefined
  const lower = name.toLowerCase()
  const sameLetters = known.find((other) => other.toLowerCase() === lower)
  if (sameLetters !== undefined) return sameLetters
  const nearest = closest(name, [...known])
  const slips = name.length < 2 ? 0 : Math.max(1, Math.floor(name.length / 3))
  return distance(name, nearest) <= slips ? nearest : undefined
}

/** What to do about a name that isn't there: the nearest, or the list of what there is. */
export function nameAdvice(name: string, known: readonly string[]): string {
  const nearest = nearestName(name, known)
  if (nearest !== undefined) return `write ${nearest}`
  const shown = known.slice(0, 12).join(', ')
  return `the columns are ${shown}${known.length > 12 ? ` and ${known.length - 12} more` : ''}`
}
