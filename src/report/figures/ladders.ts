/** The pooled estimate with a hole at the line, other orders and other kernels, one under another. */
import { extent } from 'd3-array'
import type { Jump, Rung } from '../../results.js'
import { openCount, type Value } from '../csv.js'
import { ladderPlaces, ownRung } from '../ladderTable.js'
import { fixed, significant } from '../numbers.js'
import { isEstimated, type OutcomeView, reasonText, type View } from '../view.js'
import { type Figure, type FigureData, figureOf } from './figure.js'
import { unitsWords } from './findings.js'
import { drawRows, type Row, type RowsLayout, rowAxis, rowScale } from './rows.js'

const width = 720

/** Nothing where no checks were run. */
export function laddersFigure(view: View, outcome: OutcomeView): Figure | undefined {
  const { ladders, pooled } = outcome.result
  if (!ladders || !isEstimated<Jump>(pooled)) return undefined
  const unit = view.exhibits.isBorder ? ` ${view.exhibits.xUnit}` : ''
  const parts = [
    {
      head: 'Without the nearest units',
      rungs: ladders.donut.map((rung) => [`nearer than ${significant(rung.donut)}${unit}`, rung] as const),
    },
    {
      head: 'Another order or kernel',
      rungs: ladders.order_kernel.map((rung) => [`order ${rung.order}, ${rung.kernel}`, rung] as const),
    },
  ].filter(({ rungs }) => rungs.length > 0)
  if (parts.length === 0) return undefined
  const layout: RowsLayout = { width, labelWidth: 190, places: ladderPlaces(outcome) }
  const own = ownRung(pooled)
  const rows: Row[] = [
    { label: 'The study', mark: 'pooled', estimate: own },
    ...parts.flatMap(({ head, rungs }): Row[] => [
      { label: head, mark: 'heading' },
      ...rungs.map(([label, rung]): Row => rowOf(label, rung)),
    ]),
  ]
  const made = parts.flatMap(({ rungs }) => rungs.flatMap(([, rung]) => ('not_estimated' in rung ? [] : [rung])))
  const lost = parts.flatMap(({ rungs }) => rungs.filter(([, rung]) => 'not_estimated' in rung))
  const [low, high] = extent(made, ({ estimate }) => estimate)
  const x = rowScale(rows, layout)
  const seen =
    low === undefined
      ? 'no other choice gives an estimate'
      : `from ${fixed(low, layout.places)} to ${fixed(high, layout.places)} where the study has ${fixed(own.estimate, layout.places)}`
  return figureOf({
    name: `${outcome.slug}-ladders`,
    width,
    title: `With a hole at the line, another order or another kernel the jump in ${outcome.result.outcome} runs ${seen}`,
    lines: [`Diamond: the study. Squares: one choice changed. Bars: ${view.words.level} intervals.`],
    description: `Pooled corrected estimates of the jump in ${outcome.result.outcome} with one choice changed: ${seen}. The table of ladders gives every number.`,
    caption: `The pooled jump in ${outcome.result.outcome} made again with one choice changed: units nearest to the line left out at the study’s own bandwidths, and other orders and kernels at bandwidths of their own. Corrected estimates with ${view.words.level} intervals; they share units and are not independent. N in the study’s own bandwidth: ${unitsWords(view, pooled.units_in_bandwidth)}.${lost.map(([label, rung]) => ` ${label}: none, ${'not_estimated' in rung ? reasonText(view, rung.not_estimated) : ''}.`).join('')}`,
    data: dataOf(view, [
      ['the study', 'the study', own],
      ...parts.flatMap(({ head, rungs }) => rungs.map(([label, rung]) => [head, label, rung] as const)),
    ]),
    draw: (top) => {
      const drawn = drawRows(rows, x, layout, top + 14)
      const axis = rowAxis(x, top + 14, drawn.end, `Jump in ${outcome.result.outcome}, treated minus untreated`, width)
      return { marks: [...axis.marks, ...drawn.marks], end: axis.end }
    },
  })
}

function rowOf(label: string, rung: Rung): Row {
  return 'not_estimated' in rung ? { label, mark: 'line' } : { label, mark: 'line', estimate: rung }
}

function dataOf(view: View, rungs: readonly (readonly [part: string, label: string, rung: Rung])[]): FigureData {
  return {
    columns: ['part', 'change', 'estimate', 'standard_error', 'low', 'high', 'p', 'units_untreated', 'units_treated'],
    rows: rungs.map(([part, label, rung]): Value[] =>
      'not_estimated' in rung
        ? [part, label, ...Array<null>(7).fill(null)]
        : [
            part,
            label,
            rung.estimate,
            rung.standard_error,
            rung.low,
            rung.high,
            rung.p,
            openCount(view, rung.units.untreated),
            openCount(view, rung.units.treated),
          ],
    ),
  }
}
