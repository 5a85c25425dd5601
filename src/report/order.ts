/** The order of lines in figures: by cutoff where every line has one, else by label as a reader counts (2 before 10). */
import type { LineSummary } from '../results.js'

const collator = new Intl.Collator('en', { numeric: true })

type Named = Pick<LineSummary, 'line' | 'label' | 'cutoff'>

export function inReadingOrder<T>(items: readonly T[], lineOf: (item: T) => Named): T[] {
  const allCutoffs = items.every((item) => lineOf(item).cutoff !== undefined)
  return [...items].sort((a, b) => {
    const [first, second] = [lineOf(a), lineOf(b)]
    const byCutoff = allCutoffs ? (first.cutoff as number) - (second.cutoff as number) : 0
    return byCutoff || collator.compare(first.label, second.label) || collator.compare(first.line, second.line)
  })
}
