/** Estimates with intervals, one under another on one scale: label, bar, numbers. Forests, ladders and balance are made of them. */
import { extent, max, quantile } from 'd3-array'
import { scaleLinear } from 'd3-scale'
import type { Interval } from '../../results.js'
import { intervalText } from '../lineTable.js'
import { fixed, type Places } from '../numbers.js'
import { baseLine, type Scale, tenth, upright } from './axes.js'
import type { Point } from './findings.js'
import { element, filled, hollow, type Ink, stroked, textAt, textWidth, wrapText } from './svg.js'

export interface Row {
  readonly label: string
  /** A line's own estimate; what stands for all; a heading without an estimate. */
  readonly mark: 'line' | 'pooled' | 'target' | 'mean' | 'heading'
  readonly estimate?: Point
  readonly prediction?: Interval
  /** Drawn below the estimate. */
  readonly shrunken?: Point
  /** Beside the row, in place of estimate and interval. */
  readonly says?: string
}

export interface RowsLayout {
  readonly width: number
  readonly labelWidth: number
  readonly places: Places
  /** Height of a row without label and numbers; absent where rows are labelled. */
  readonly bare?: number
}

const size = 12
const lineHeight = 15

/** Every point estimate and what stands for all of them is inside; the widest twentieth of the intervals may run on. */
export function rowScale(rows: readonly Row[], layout: RowsLayout): Scale {
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
  const numbers = max(rows, (row) => textWidth(wordsOf(row, layout.places), size)) ?? 90
  return scaleLinear([low - pad, high + pad], [layout.labelWidth + 12, layout.width - Math.min(numbers, 260) - 14])
}

export function numbersText(estimate: Point, places: Places): string {
  return `${fixed(estimate.estimate, places)} (${intervalText(estimate, places)})`
}

function wordsOf(row: Row, places: Places): string {
  if (row.mark === 'heading') return ''
  return row.says ?? (row.estimate ? numbersText(row.estimate, places) : 'not estimated')
}

export function drawRows(
  rows: readonly Row[],
  x: Scale,
  layout: RowsLayout,
  from: number,
): { marks: string[]; end: number } {
  const marks: string[] = []
  let y = from
  for (const row of rows) {
    const isHeading = row.mark === 'heading'
    const room = isHeading ? layout.width : layout.labelWidth
    const lines = layout.bare === undefined ? wrapText(row.label, room, size) : []
    const least = row.shrunken ? 23 : 19
    const height = layout.bare ?? Math.max(lines.length * lineHeight + 4, isHeading ? 26 : least)
    const middle = isHeading ? y + height - 11 : y + height / 2
    lines.forEach((text, index) => {
      const at = middle + 4 + (index - (lines.length - 1) / 2) * lineHeight
      marks.push(textAt(0, at, text, row.mark === 'line' ? {} : { weight: 'bold' }))
    })
    if (row.estimate) marks.push(...estimateMarks(row, row.estimate, x, middle, layout.bare))
    if (layout.bare === undefined && !isHeading) {
      const color = row.estimate ? 'ink' : 'muted'
      marks.push(textAt(layout.width, middle + 4, wordsOf(row, layout.places), { anchor: 'end', color }))
    }
    y += height
  }
  return { marks, end: y }
}

function estimateMarks(row: Row, estimate: Point, x: Scale, middle: number, bare: number | undefined): string[] {
  const color: Ink = row.mark === 'line' ? 'ink' : 'treated'
  if (!Number.isFinite(estimate.estimate)) return []
  const at = x(estimate.estimate)
  if (bare !== undefined) {
    const thickness = Math.min(0.8, 0.5 * bare)
    const radius = Math.min(1.3, Math.max(0.5, 0.45 * bare))
    return [
      ...intervalMarks(estimate, x, middle, 'muted', thickness, bare < 3),
      element('circle', { cx: tenth(at), cy: middle, r: radius, ...filled(color) }),
    ]
  }
  const y = row.shrunken ? middle - 3 : middle
  const marks = row.prediction ? intervalMarks(row.prediction, x, y, color, 1) : []
  marks.push(...intervalMarks(estimate, x, y, color, row.mark === 'line' ? 1.3 : 2.6))
  if (row.shrunken) marks.push(...shrunkenMarks(row.shrunken, x, middle + 6))
  if (row.mark === 'line')
    return [...marks, element('rect', { x: at - 3.5, y: y - 3.5, width: 7, height: 7, ...filled(color) })]
  if (row.mark === 'mean') return [...marks, element('circle', { cx: at, cy: y, r: 4.5, ...hollow(color, 1.8) })]
  const [left, right] = [tenth(at - 6.5), tenth(at + 6.5)]
  const diamond = `M${tenth(at)} ${tenth(y - 6.5)}L${right} ${tenth(y)}L${tenth(at)} ${tenth(y + 6.5)}L${left} ${tenth(y)}Z`
  return [...marks, element('path', { d: diamond, ...(row.mark === 'pooled' ? filled(color) : hollow(color, 1.8)) })]
}

function shrunkenMarks(shrunken: Point, x: Scale, y: number): string[] {
  if (!Number.isFinite(shrunken.estimate)) return []
  return [
    ...intervalMarks(shrunken, x, y, 'untreated', 1, true, '2 2'),
    element('circle', { cx: tenth(x(shrunken.estimate)), cy: y, r: 2.6, ...hollow('untreated', 1.3) }),
  ]
}

/** The bar, cut at the edges of the plot, with an arrow head where it was cut. */
export function intervalMarks(
  interval: Interval,
  x: Scale,
  y: number,
  color: Ink,
  thickness: number,
  isPlain = false,
  dashes?: string,
): string[] {
  if (!Number.isFinite(interval.low) || !Number.isFinite(interval.high)) return []
  const [left, right] = x.range()
  const isCutLeft = !(x(interval.low) >= left)
  const isCutRight = !(x(interval.high) <= right)
  const [from, to] = [isCutLeft ? left : x(interval.low), isCutRight ? right : x(interval.high)]
  if (from > right || to < left) return []
  const arrow = (at: number, step: number) =>
    `M${tenth(at + step)} ${tenth(y - 3)}L${tenth(at)} ${tenth(y)}L${tenth(at + step)} ${tenth(y + 3)}`
  return [
    element('path', {
      d: `M${tenth(from)} ${tenth(y)}H${tenth(to)}`,
      ...stroked(color, thickness),
      'stroke-dasharray': dashes,
    }),
    ...(isCutLeft && !isPlain ? [element('path', { d: arrow(left, 4), ...stroked(color, 1.2) })] : []),
    ...(isCutRight && !isPlain ? [element('path', { d: arrow(right, -4), ...stroked(color, 1.2) })] : []),
  ]
}

/** Gridlines, zero and the numbers below; `title` is broken into lines where it is long. Drawn before the rows. */
export function rowAxis(
  x: Scale,
  top: number,
  bottom: number,
  title: string,
  width: number,
): { marks: string[]; end: number } {
  const [left, right] = x.range()
  const base = bottom + 8
  const format = x.tickFormat(5)
  const ticks = x.ticks(5)
  const words = wrapText(title, width, size)
  const widest = Math.max(...words.map((line) => textWidth(line, size)))
  const middle = Math.min(Math.max((left + right) / 2, widest / 2), width - widest / 2)
  return {
    marks: [
      ...ticks.map((tick) => element('path', { d: upright(x(tick), top, base), ...stroked('grid', 1) })),
      element('path', { d: upright(x(0), top, base), ...stroked('ink', 1.4) }),
      baseLine(left, right, base),
      ...ticks.map((tick) => textAt(x(tick), base + 16, format(tick), { anchor: 'middle', color: 'muted' })),
      ...words.map((line, i) => textAt(middle, base + 34 + 15 * i, line, { anchor: 'middle' })),
    ],
    end: base + 40 + 15 * (words.length - 1),
  }
}
