/** Predetermined columns at the line, one row each: none should jump. */
import { maxIndex } from 'd3-array'
import type { BalanceRow } from '../../results.js'
import { openCount } from '../csv.js'
import { fixed, pWords, sharedPlaces, significant } from '../numbers.js'
import { isEstimated, reasonText, type View } from '../view.js'
import { type Figure, figureOf } from './figure.js'
import { drawRows, type Row, type RowsLayout, rowAxis, rowScale } from './rows.js'

type Made = Exclude<BalanceRow, { readonly not_estimated: string }>

const width = 760

/** Nothing where the study names no predetermined column or asks for no checks. */
export function balanceFigure(view: View): Figure | undefined {
  const { balance } = view.results
  if (!balance || balance.length === 0) return undefined
  const made = balance.filter((row): row is Made => isEstimated<Made>(row as Made))
  const scaled = made.flatMap(({ standardised }) => (standardised ? [standardised] : []))
  const places = sharedPlaces(
    scaled.map(({ low, high }) => (high - low) / 4),
    scaled.map(({ estimate }) => estimate),
  )
  const layout: RowsLayout = { width, labelWidth: 170, places }
  const rows = balance.map((row): Row => {
    if ('not_estimated' in row) return { label: row.column, mark: 'line' }
    const says = `${row.standardised ? fixed(row.standardised.estimate, places) : '–'} sd; ${significant(row.estimate)}, ${pWords(row.p_holm)}`
    return { label: row.column, mark: 'line', says, ...(row.standardised ? { estimate: row.standardised } : {}) }
  })
  const lost = balance.flatMap((row) => ('not_estimated' in row ? [row] : []))
  return figureOf({
    name: 'balance',
    width,
    title: titleOf(view, made),
    lines: [
      `Squares: corrected jump in standard deviations of untreated units near the line; bars: ${view.words.level} intervals, one by one. Right: the jump in those, in the column’s own units, and p adjusted for ${made.length} columns (Holm).`,
    ],
    description: `${made.length} predetermined columns with their jumps. ${titleOf(view, made)}.`,
    caption: `Jumps of columns fixed before the rule could act, by the study’s own options with bandwidths of their own, in standard deviations of each column among untreated units within the bandwidth. None should jump.${made.length > 0 ? ` N runs from ${nWords(view, made)}.` : ''}${lost.map((row) => ` ${row.column}: not estimated, ${reasonText(view, row.not_estimated)}.`).join('')}`,
    data: {
      columns: [
        'column',
        'estimate',
        'standard_error',
        'low',
        'high',
        'p',
        'p_holm',
        'standard_deviation',
        'standardised_estimate',
        'standardised_low',
        'standardised_high',
        'units_untreated',
        'units_treated',
      ],
      rows: balance.map((row) => {
        if ('not_estimated' in row) return [row.column, ...Array<null>(12).fill(null)]
        const { standardised: scale } = row
        return [
          row.column,
          row.estimate,
          row.standard_error,
          row.low,
          row.high,
          row.p,
          row.p_holm,
          row.standard_deviation,
          scale?.estimate,
          scale?.low,
          scale?.high,
          openCount(view, row.units.untreated),
          openCount(view, row.units.treated),
        ]
      }),
    },
    draw: (top) => {
      const x = rowScale(rows, layout)
      const drawn = drawRows(rows, x, layout, top + 14)
      const axis = rowAxis(x, top + 14, drawn.end, 'Jump in standard deviations, treated minus untreated', width)
      return { marks: [...axis.marks, ...drawn.marks], end: axis.end }
    },
  })
}

function titleOf(view: View, made: readonly Made[]): string {
  if (made.length === 0) return 'No predetermined column could be tested'
  const alpha = 1 - view.choices.level
  const jumping = made.filter(({ p_holm: p }) => p < alpha)
  const most = made[maxIndex(made, ({ standardised }) => Math.abs(standardised?.estimate ?? 0))]
  const size = most.standardised
    ? `; the largest is ${significant(Math.abs(most.standardised.estimate))} standard deviations (${most.column})`
    : ''
  if (jumping.length === 0) {
    const none =
      made.length === 1
        ? 'The predetermined column does not jump'
        : `None of ${made.length} predetermined columns jumps`
    return `${none} by more than chance${size}`
  }
  return `${jumping.map(({ column }) => column).join(', ')} ${jumping.length === 1 ? 'jumps' : 'jump'} by more than chance among ${made.length} predetermined columns${size}`
}

function nWords(view: View, made: readonly Made[]): string {
  const all = made.map(({ units }) => units.untreated + units.treated)
  const [least, most] = [Math.min(...all), Math.max(...all)]
  const shown = (units: number) => (units < view.smallestCell ? `under ${view.smallestCell}` : significant(units))
  return `${shown(least)} to ${shown(most)} units`
}
