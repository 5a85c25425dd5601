/** Jumps at cutoffs that moved, before and after. */
import type { Estimate, NotEstimated } from '../results.js'
import { intervalCell, intervalParts, intervalText } from './lineTable.js'
import { fixed, p, sharedPlaces, significant } from './numbers.js'
import { fixedCell, severalCell, significantCell, wholeCell } from './tableCells.js'
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
      ? severalCell(`${fixed(one.estimate, places)} (${intervalText(one, places)})`, [
          fixedCell(one.estimate, places),
          intervalCell(one, places),
        ])
      : reasonText(view, one.not_estimated)
  const parts = ['estimate', ...intervalParts]
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
      { head: 'Jump after', parts },
      { head: 'Jump there before', parts },
      { head: 'Difference', parts },
      { head: 'Old cutoff, after', parts },
    ],
    rows: found.moves.map((move) => [
      move.line,
      wholeCell(move.from),
      wholeCell(move.to),
      cell(move.after),
      cell(move.before),
      cell(move.difference),
      cell(move.old_cutoff),
    ]),
    notes: [`${pooled}${placebo}. No estimate uses units beyond the cutoff of their own time.`],
  }
}

/** Effects between two cutoffs; nothing where the study asks for none. */
export function awayTable(view: View, { result }: OutcomeView): TextTable | undefined {
  const found = result.away_from_line
  if (!found) return undefined
  const caption = `${result.outcome}: the effect between the cutoffs of ${found.low} and ${found.high}, for units of ${found.low}`
  const columns = [
    { head: 'Score' },
    { head: 'Effect' },
    { head: 'Standard error' },
    { head: `${view.words.level} band over all points`, parts: intervalParts },
  ]
  if ('not_estimated' in found) {
    return { caption, columns, rows: [], notes: [`Not estimated: ${reasonText(view, found.not_estimated)}.`] }
  }
  const { points, parallel } = found
  const places = sharedPlaces(
    points.map((point) => point.standard_error),
    points.map(({ estimate }) => estimate),
  )
  const test = parallel
    ? `Wald ${fixed(parallel.statistic, 1)} on ${parallel.df} degrees of freedom, p = ${p(parallel.p)}`
    : 'not testable here'
  return {
    caption,
    columns,
    rows: points.map(({ score, estimate, standard_error: error, uniform_low: low, uniform_high: high }) => [
      significantCell(score),
      fixedCell(estimate, places),
      fixedCell(error, places),
      intervalCell({ low, high }, places),
    ]),
    notes: [
      `They hold if the untreated curves of the two lines are parallel between the cutoffs, as they can be seen to be or not below the low one: ${test}. Local lines with bandwidth ${significant(found.bandwidth)}.`,
    ],
  }
}
