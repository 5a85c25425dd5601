/** Jumps at cutoffs that moved, before and after. */
import type { Estimate, NotEstimated } from '../results.js'
import { intervalText } from './lineTable.js'
import { fixed, p, sharedPlaces, wholeNumber } from './numbers.js'
import type { TextTable } from './tables.js'
import { isEstimated, type OutcomeView, reasonText, type View } from './view.js'

/** Nothing where no cutoff moves. */
export function movedTable(view: View, { result }: OutcomeView): TextTable | undefined {
  const found = result.moved_cutoffs
  if (!found) return undefined
  const all = found.moves.flatMap(({ after, before, difference }) => [after, before, difference])
  const made = all.flatMap((one) => (isEstimated<Estimate>(one) ? [one] : []))
  const places = sharedPlaces(
    made.map((one) => one.standard_error),
    made.map(({ estimate }) => estimate),
  )
  const cell = (one: Estimate | NotEstimated) =>
    isEstimated<Estimate>(one)
      ? `${fixed(one.estimate, places)} (${intervalText(one, places)})`
      : reasonText(view, one.not_estimated)
  const { difference, old_cutoff: old } = found.pooled
  const pooled = isEstimated(difference)
    ? `By precision the differences average ${fixed(difference.estimate, places)} (${intervalText(difference, places)}, p = ${p(difference.p)})`
    : 'The differences have no average'
  const placebo = isEstimated(old)
    ? `; at the old cutoffs, where nothing should jump any more, ${fixed(old.estimate, places)} (${intervalText(old, places)}, p = ${p(old.p)})`
    : ''
  return {
    caption: `${result.outcome}: cutoffs that moved`,
    columns: [
      { head: 'Move', isText: true },
      { head: 'From' },
      { head: 'To' },
      { head: 'Jump after' },
      { head: 'Jump there before' },
      { head: 'Difference' },
      { head: 'Old cutoff, after' },
    ],
    rows: found.moves.map((move) => [
      move.line,
      wholeNumber(move.from),
      wholeNumber(move.to),
      cell(move.after),
      cell(move.before),
      cell(move.difference),
      cell(move.old_cutoff),
    ]),
    notes: [`${pooled}${placebo}. No estimate uses units beyond the cutoff of their own time.`],
  }
}
