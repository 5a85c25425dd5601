/** All lines of an outcome, one under another, above what they say together. */
import { extent, max, quantile } from 'd3-array'
import { type ScaleLinear, scaleLinear } from 'd3-scale'
import type { Interval, Jump, LineJump } from '../../results.js'
import { intervalText, linePlaces } from '../lineTable.js'
import { fixed, type Places, wholeNumber } from '../numbers.js'
import { inReadingOrder } from '../order.js'
import { targetWords } from '../pooledTable.js'
import { estimatedLines, howMany, isEstimated, labelOf, type OutcomeView, type View } from '../view.js'
import { drawing, element, filled, heading, hollow, type Ink, stroked, textAt, textWidth, wrapText } from './svg.js'

interface Row {
  readonly label: string
  readonly mark: 'line' | 'pooled' | 'target' | 'mean'
  readonly estimate?: { readonly estimate: number } & Interval
  readonly prediction?: Interval
}

type Scale = ScaleLinear<number, number>

const width = 760
const size = 12
const labelWidth = 220
const mostLabels = 200

export function forestFigure(view: View, outcome: OutcomeView, id: string): string {
  const places = linePlaces(outcome)
  const isLabelled = outcome.result.lines.length <= mostLabels
  const ordered = inReadingOrder(
    outcome.result.lines,
    (line) => view.lineOf.get(line.line) ?? { ...line, label: line.line, units: noUnits },
  )
  const rows = ordered.map((line) => lineRow(view, line)).filter((row) => isLabelled || row.estimate !== undefined)
  const together = togetherRows(view, outcome)
  const x = scaleOf([...rows, ...together], places)
  const top = heading(
    `${outcome.result.outcome}: jump at ${howMany(view, estimatedLines(outcome.result).length)}, and together`,
    [
      `Corrected estimates with ${view.words.level} intervals, ${orderWords(view)}. An arrow marks an interval that runs on past the edge.`,
      ...(isLabelled
        ? []
        : [`${outcome.result.lines.length} are too many to name here: labels are left out and lines.csv has them.`]),
    ],
    width,
  )
  const start = top.height + 14
  const first = drawRows(rows, x, places, start, isLabelled)
  const second = drawRows(together, x, places, first.end + 10, true)
  return drawing({
    id,
    width,
    height: second.end + 52,
    title: `${outcome.result.outcome}: jump at each ${view.words.line} and together`,
    description: describe(view, outcome, places),
    body: [
      ...top.marks,
      ...axis(x, start, second.end, outcome.result.outcome),
      element('path', { d: `M0 ${first.end + 5}H${width}`, ...stroked('muted', 1) }),
      ...first.marks,
      ...second.marks,
    ],
  })
}

const noUnits = { untreated: 0, treated: 0 }

function orderWords(view: View): string {
  return view.results.lines.every((line) => line.cutoff !== undefined)
    ? 'lowest cutoff first'
    : 'in order of their labels'
}

function lineRow(view: View, line: LineJump): Row {
  const label = labelWithCutoff(view, line.line)
  return isEstimated<Jump & { line: string }>(line)
    ? { label, mark: 'line', estimate: line.corrected }
    : { label, mark: 'line' }
}

/** The label, with the cutoff where it does not say it already. */
function labelWithCutoff(view: View, line: string): string {
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

/** Every point estimate and what stands for all of them is inside; the widest twentieth of the intervals may run on. */
function scaleOf(rows: readonly Row[], places: Places): Scale {
  const shown = rows.flatMap((row) => (row.estimate ? [row.estimate] : []))
  const finite = shown.filter((estimate) => Number.isFinite(estimate.low) && Number.isFinite(estimate.high))
  const edges = [
    quantile(finite, 0.05, (estimate) => estimate.low),
    quantile(finite, 0.95, (estimate) => estimate.high),
    ...shown.map((estimate) => estimate.estimate),
    ...rows.filter((row) => row.mark !== 'line').flatMap((row) => [row.estimate?.low, row.estimate?.high]),
    ...rows.flatMap((row) => [row.prediction?.low, row.prediction?.high]),
    0,
  ].filter((value): value is number => value !== undefined && Number.isFinite(value))
  const [low, high] = extent(edges) as [number, number]
  const pad = high > low ? 0.03 * (high - low) : 1
  const numbers = max(shown, (estimate) => textWidth(numbersText(estimate, places), size)) ?? 90
  return scaleLinear([low - pad, high + pad], [labelWidth + 12, width - Math.min(numbers, 260) - 14])
}

function numbersText(estimate: { readonly estimate: number } & Interval, places: Places): string {
  return `${fixed(estimate.estimate, places)} (${intervalText(estimate, places)})`
}

function drawRows(
  rows: readonly Row[],
  x: Scale,
  places: Places,
  from: number,
  isLabelled: boolean,
): { marks: string[]; end: number } {
  const marks: string[] = []
  let y = from
  for (const row of rows) {
    const lines = isLabelled ? wrapText(row.label, labelWidth, size) : []
    const height = isLabelled ? Math.max(lines.length * 15 + 4, 19) : 3
    const middle = y + height / 2
    lines.forEach((text, index) => {
      const at = middle + 4 + (index - (lines.length - 1) / 2) * 15
      marks.push(textAt(0, at, text, row.mark === 'line' ? {} : { weight: 'bold' }))
    })
    if (row.estimate) marks.push(...estimateMarks(row, row.estimate, x, middle, isLabelled))
    if (isLabelled) {
      const numbers = row.estimate ? numbersText(row.estimate, places) : 'not estimated'
      marks.push(textAt(width, middle + 4, numbers, { anchor: 'end', color: row.estimate ? 'ink' : 'muted' }))
    }
    y += height
  }
  return { marks, end: y }
}

function estimateMarks(
  row: Row,
  estimate: { readonly estimate: number } & Interval,
  x: Scale,
  y: number,
  isLabelled: boolean,
): string[] {
  const color: Ink = row.mark === 'line' ? 'ink' : 'treated'
  const marks: string[] = []
  if (!Number.isFinite(estimate.estimate)) return marks
  if (row.prediction) marks.push(...intervalMarks(row.prediction, x, y, color, 1))
  marks.push(...intervalMarks(estimate, x, y, color, row.mark === 'line' ? (isLabelled ? 1.3 : 0.8) : 2.6))
  const at = x(estimate.estimate)
  if (!isLabelled) return [...marks, element('circle', { cx: at, cy: y, r: 1.2, ...filled(color) })]
  if (row.mark === 'line')
    return [...marks, element('rect', { x: at - 3.5, y: y - 3.5, width: 7, height: 7, ...filled(color) })]
  if (row.mark === 'mean') return [...marks, element('circle', { cx: at, cy: y, r: 4.5, ...hollow(color, 1.8) })]
  const diamond = `M${at} ${y - 6.5}L${at + 6.5} ${y}L${at} ${y + 6.5}L${at - 6.5} ${y}Z`.replace(
    /\d+\.\d+/g,
    (digits) => Number(digits).toFixed(2),
  )
  return [...marks, element('path', { d: diamond, ...(row.mark === 'pooled' ? filled(color) : hollow(color, 1.8)) })]
}

/** The bar, cut at the edges of the plot, with an arrow head where it was cut. */
function intervalMarks(interval: Interval, x: Scale, y: number, color: Ink, thickness: number): string[] {
  if (!Number.isFinite(interval.low) || !Number.isFinite(interval.high)) return []
  const [left, right] = x.range()
  const isCutLeft = !(x(interval.low) >= left)
  const isCutRight = !(x(interval.high) <= right)
  const [from, to] = [isCutLeft ? left : x(interval.low), isCutRight ? right : x(interval.high)]
  const arrow = (at: number, step: number) =>
    `M${at + step} ${(y - 3).toFixed(2)}L${at} ${y.toFixed(2)}L${at + step} ${(y + 3).toFixed(2)}`
  return [
    element('path', { d: `M${from.toFixed(2)} ${y.toFixed(2)}H${to.toFixed(2)}`, ...stroked(color, thickness) }),
    ...(isCutLeft ? [element('path', { d: arrow(left, 4), ...stroked(color, 1.2) })] : []),
    ...(isCutRight ? [element('path', { d: arrow(right, -4), ...stroked(color, 1.2) })] : []),
  ]
}

function axis(x: Scale, top: number, bottom: number, outcome: string): string[] {
  const [left, right] = x.range()
  const base = bottom + 8
  const tickFormat = x.tickFormat(5)
  const ticks = x.ticks(5)
  return [
    ...ticks.map((tick) =>
      element('path', { d: `M${x(tick).toFixed(2)} ${top}V${base.toFixed(2)}`, ...stroked('grid', 1) }),
    ),
    element('path', { d: `M${x(0).toFixed(2)} ${top}V${base.toFixed(2)}`, ...stroked('ink', 1.4) }),
    element('path', { d: `M${left.toFixed(2)} ${base.toFixed(2)}H${right.toFixed(2)}`, ...stroked('ink', 1) }),
    ...ticks.map((tick) => textAt(x(tick), base + 16, tickFormat(tick), { anchor: 'middle', color: 'muted' })),
    textAt(
      (left + right) / 2,
      base + 34,
      wrapText(`Jump in ${outcome}, treated minus untreated`, right - left + 200, size)[0],
      { anchor: 'middle' },
    ),
  ]
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
