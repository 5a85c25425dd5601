/** All lines of an outcome, one under another, above what they say together; page by page where they are many. */
import { extent } from 'd3-array'
import type { Jump, LineJump } from '../../results.js'
import { linePlaces } from '../lineTable.js'
import { fixed, type Places, wholeNumber } from '../numbers.js'
import { inReadingOrder } from '../order.js'
import { targetWords } from '../pooledTable.js'
import { estimatedLines, howMany, isEstimated, labelOf, type OutcomeView, type View } from '../view.js'
import { type Figure, type FigureData, figureOf } from './figure.js'
import { differenceWords, excludesZero, unitsWords } from './findings.js'
import { drawRows, numbersText, type Row, type RowsLayout, rowAxis, rowScale } from './rows.js'
import { element, stroked, textAt } from './svg.js'

const width = 760
const labelWidth = 220
/** More lines than this are named page by page, behind a view of all. */
const mostOnOne = 60
const onPage = 50
const mostPages = 10
/** Height that the bare rows of all lines fill at most. */
const tallest = 900

type Numbered = Row & { readonly line: LineJump }

export function forestFigure(view: View, outcome: OutcomeView): Figure {
  const layout: RowsLayout = { width, labelWidth, places: linePlaces(outcome) }
  const rows = inReadingOrder(
    outcome.result.lines,
    (line) => view.lineOf.get(line.line) ?? { line: line.line, label: line.line },
  ).map((line) => lineRow(view, outcome, line))
  const name = `${outcome.slug}-forest`
  if (rows.length <= mostOnOne) return forestOf(view, outcome, name, rows, layout, layout)
  const estimated = rows.filter((row) => row.estimate !== undefined)
  const bare = Math.min(3, tallest / Math.max(estimated.length, 1))
  const all = forestOf(view, outcome, name, estimated, layout, { ...layout, bare })
  const pages = Array.from({ length: Math.ceil(rows.length / onPage) }, (_, page) =>
    rows.slice(page * onPage, (page + 1) * onPage),
  )
  const figures = pages.slice(0, mostPages).map((part, page) =>
    forestOf(view, outcome, `${name}-${page + 1}`, part, layout, layout, rows, {
      page: page + 1,
      of: pages.length,
    }),
  )
  const left = pages.length > mostPages ? `, the first ${mostPages * onPage}; lines.csv has the others` : ''
  return { ...all, more: { says: `every ${view.words.line} by name${left}`, figures } }
}

interface Page {
  readonly page: number
  readonly of: number
}

/** `scaled`: rows that settle the scale, so that all pages share it. */
function forestOf(
  view: View,
  outcome: OutcomeView,
  name: string,
  rows: readonly Numbered[],
  named: RowsLayout,
  layout: RowsLayout,
  scaled: readonly Row[] = rows,
  page?: Page,
): Figure {
  const together = togetherRows(view, outcome)
  const x = rowScale([...scaled, ...together], named)
  const isBare = layout.bare !== undefined
  const hasShrunken = !isBare && rows.some((row) => row.shrunken)
  const total = outcome.result.lines.length
  return figureOf({
    name,
    width,
    title: titleOf(view, outcome, page),
    lines: [
      `Corrected estimates with ${view.words.level} intervals, ${orderWords(view)}. An arrow marks an interval that runs on past the edge.`,
      ...(hasShrunken
        ? ['Circle and dots below each: the effect shrunken towards the mean of all, with its interval.']
        : []),
      ...(isBare ? [`${total} are too many to name here: the pages of this figure and lines.csv name them.`] : []),
    ],
    description: describe(view, outcome, named.places),
    caption: captionOf(view, outcome, hasShrunken, isBare, page),
    data: dataOf(rows, together),
    draw: (top) => {
      const start = top + 14
      const first = drawRows(rows, x, layout, start)
      const second = drawRows(together, x, named, first.end + 10)
      const axis = rowAxis(x, start, second.end, `${effectWords(outcome)}, treated minus untreated`, width)
      const rule = element('path', { d: `M0 ${first.end + 5}H${width}`, ...stroked('muted', 1) })
      const shown = rows.length
      const names = isBare
        ? [textAt(0, start + 12, `${view.words.lines}:`), textAt(0, start + 28, `${shown} with an estimate`)]
        : []
      return { marks: [...axis.marks, rule, ...names, ...first.marks, ...second.marks], end: axis.end }
    },
  })
}

function orderWords(view: View): string {
  return view.results.lines.every((line) => line.cutoff !== undefined)
    ? 'lowest cutoff first'
    : 'in order of their labels'
}

function titleOf(view: View, outcome: OutcomeView, page: Page | undefined): string {
  const { comparison } = outcome.result
  const lines = estimatedLines(outcome.result)
  const above = lines.filter(({ corrected }) => corrected.estimate > 0).length
  const clear = lines.filter(({ corrected }) => excludesZero(corrected)).length
  const part = page ? `, page ${page.page} of ${page.of}` : ''
  if (lines.length === 0) return `${outcome.result.outcome}: no ${view.words.line} could be estimated${part}`
  const differ = comparison ? `; they ${differenceWords(view, comparison)}` : ''
  return `${outcome.result.outcome} rises at ${above} of ${howMany(view, lines.length)} and falls at ${lines.length - above}; ${clearWords(clear)}${differ}${part}`
}

/** With take-up, lines are compared by their effects per unit of it. */
export function effectWords({ result }: OutcomeView): string {
  const isRatio = [...result.lines, result.pooled].some((jump) => 'take_up' in jump)
  return isRatio ? `Effect on ${result.outcome} per unit of take-up` : `Jump in ${result.outcome}`
}

function clearWords(clear: number): string {
  if (clear === 0) return 'no interval excludes zero'
  return clear === 1 ? '1 interval excludes zero' : `${clear} intervals exclude zero`
}

function lineRow(view: View, { result }: OutcomeView, line: LineJump): Numbered {
  const label = labelWithCutoff(view, line.line)
  if (!isEstimated<Jump & { line: string }>(line)) return { label, mark: 'line', line }
  const shrunken = result.comparison?.shrunken.find((effect) => effect.line === line.line)
  return { label, mark: 'line', line, estimate: line.corrected, ...(shrunken ? { shrunken } : {}) }
}

/** The label, with the cutoff where it does not say it already. */
export function labelWithCutoff(view: View, line: string): string {
  const label = labelOf(view, line)
  const cutoff = view.lineOf.get(line)?.cutoff
  if (cutoff === undefined) return label
  const written = wholeNumber(cutoff)
  return label.includes(String(cutoff)) || label.includes(written) ? label : `${label} (${written})`
}

function togetherRows(view: View, outcome: OutcomeView): Row[] {
  const { pooled, target, comparison } = outcome.result
  return [
    {
      label: 'Pooled',
      mark: 'pooled',
      ...(isEstimated<Jump & { weights: unknown }>(pooled) ? { estimate: pooled.corrected } : {}),
    },
    {
      label: isEstimated(target) ? `Target: ${view.words.lines} ${targetWords(target.kind)}` : 'Target',
      mark: 'target',
      ...(isEstimated(target) ? { estimate: target } : {}),
    },
    ...(comparison
      ? [
          {
            label: `Random-effects mean${comparison.prediction ? ` (thin: ${view.words.level} prediction)` : ''}`,
            mark: 'mean' as const,
            estimate: comparison.random_effects,
            ...(comparison.prediction ? { prediction: comparison.prediction } : {}),
          },
        ]
      : []),
  ]
}

function captionOf(view: View, outcome: OutcomeView, hasShrunken: boolean, isBare: boolean, page?: Page): string {
  const { lines, pooled, comparison } = outcome.result
  const missing = lines.length - estimatedLines(outcome.result).length
  const lost = missing === 0 ? '' : ` ${howMany(view, missing)} could not be estimated; the table says why.`
  const shrunken = hasShrunken
    ? ' Hollow circles: each effect shrunken towards the mean, fit for ranking where the raw estimates are not.'
    : ''
  const n = isEstimated<Jump>(pooled)
    ? ` N within the pooled bandwidth: ${unitsWords(view, pooled.units_in_bandwidth)}.`
    : ''
  const prediction = comparison?.prediction
    ? ` The thin bar is the ${view.words.level} interval for the effect at one more ${view.words.line} like these.`
    : ''
  const part = page ? ` Page ${page.page} of ${page.of}, all on one scale.` : ''
  return `${effectWords(outcome)} at every ${view.words.line}, each with its own bandwidth (${isBare ? 'dots' : 'filled squares'}, corrected estimates, ${view.words.level} intervals), above three ways of taking them together: pooled in one fit (filled diamond), the stated target (hollow diamond) and the random-effects mean (hollow circle).${prediction}${shrunken}${n}${lost}${part}`
}

function dataOf(rows: readonly Numbered[], together: readonly Row[]): FigureData {
  const cells = (row: Row) => [
    row.estimate?.estimate,
    row.estimate?.low,
    row.estimate?.high,
    row.shrunken?.estimate,
    row.shrunken?.low,
    row.shrunken?.high,
    row.prediction?.low,
    row.prediction?.high,
  ]
  return {
    columns: [
      'row',
      'line',
      'label',
      'estimate',
      'low',
      'high',
      'shrunken_estimate',
      'shrunken_low',
      'shrunken_high',
      'prediction_low',
      'prediction_high',
    ],
    rows: [
      ...rows.map((row) => ['line', row.line.line, row.label, ...cells(row)]),
      ...together.map((row) => [row.mark, null, row.label, ...cells(row)]),
    ],
  }
}

function describe(view: View, outcome: OutcomeView, places: Places): string {
  const lines = estimatedLines(outcome.result).map((line) => line.corrected.estimate)
  const [low, high] = extent(lines)
  const pooled = outcome.result.pooled
  const range =
    low === undefined
      ? 'No line has an estimate.'
      : `Estimates run from ${fixed(low, places)} to ${fixed(high, places)}.`
  const all = isEstimated<Jump & { weights: unknown }>(pooled)
    ? ` Pooled: ${numbersText(pooled.corrected, places)}.`
    : ''
  return `${howMany(view, outcome.result.lines.length)} with corrected estimates and ${view.words.level} intervals. ${range}${all} The table of lines gives every number.`
}
