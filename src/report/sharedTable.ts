/** Lines that share units. */
import { cell, count } from './numbers.js'
import { unitsCell } from './tableCells.js'
import type { TextTable } from './tables.js'
import { howMany, labelOf, type View } from './view.js'

const pairsShown = 30

/** Nothing where no two lines share any. */
export function sharedTable(view: View): TextTable | undefined {
  const shared = view.results.shared_units
  if (!shared) return undefined
  const what = shared.by === 'id' ? 'ids' : 'units'
  const rest = shared.pairs.length - pairsShown
  const accounted =
    shared.by === 'unit'
      ? 'Variances sum over units, so that a unit counts once wherever it serves.'
      : 'Name the id as records.cluster, so that variances take its rows together.'
  return {
    caption: `Which ${view.words.lines} share ${what}`,
    columns: [{ head: 'First', isText: true }, { head: 'Second', isText: true }, { head: `${what} at both` }],
    rows: shared.pairs
      .slice(0, pairsShown)
      .map(({ lines, count: shares }) => [
        labelOf(view, lines[0]),
        labelOf(view, lines[1]),
        unitsCell(shares, view.smallestCell),
      ]),
    notes: [
      `${cell(shared.serving_several, view.smallestCell)} ${what} serve more than one of ${howMany(view, view.results.lines.length)}. ${accounted}${rest > 0 ? ` ${count(rest)} more pairs are in results.json.` : ''}`,
    ],
  }
}
