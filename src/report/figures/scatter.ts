/** Binned means on both sides of a line with their intervals, the line itself and the bandwidth; with the plain fit when asked for. */
import { extent } from 'd3-array'
import { scaleLinear } from 'd3-scale'
import { line as pathOf } from 'd3-shape'
import type { BySide, Jump, ScatterBin, ScatterExhibit } from '../../results.js'
import { capital } from '../lineTable.js'
import { cell, fixed, type Places } from '../numbers.js'
import { type View, widthText } from '../view.js'
import { bottomAxis, fitRight, leftAxis, type Plane, roomForNumbers, tenth, upright } from './axes.js'
import { type Figure, type FigureData, figureOf } from './figure.js'
import { unitsWords } from './findings.js'
import { element, filled, hollow, stroked, textAt, textWidth } from './svg.js'

export interface ScatterSubject {
  /** Part of file names. */
  readonly name: string
  /** What is averaged: the outcome or the take-up. */
  readonly column: string
  /** "24 cutoffs pooled", or the label of one line: what the units are taken from. */
  readonly of: string
  /** What is seen. */
  readonly title: string
  /** Whose bandwidth, units, order and kernel are shown. */
  readonly jump: Pick<Jump, 'bandwidth' | 'units_in_bandwidth' | 'order' | 'kernel'>
  readonly exhibit: ScatterExhibit
  readonly places: Places
}

const width = 720
const plotHeight = 330
const barFactor = 1.96

/** The bins first, without a curve that would lead the eye; the same with the fitted curves behind it. */
export function scatterFigure(view: View, subject: ScatterSubject): Figure {
  const bare = drawScatter(view, subject, false)
  const fitted = drawScatter(view, { ...subject, name: `${subject.name}-fit` }, true)
  return { ...bare, more: { says: 'with the fitted curves', figures: [fitted] } }
}

function drawScatter(view: View, subject: ScatterSubject, hasFit: boolean): Figure {
  const { jump, exhibit, column, title } = subject
  const bins = exhibit.bins.filter((bin) => bin.units >= view.smallestCell && Number.isFinite(bin.mean))
  const missing = exhibit.bins.length - bins.length
  const curves = `Curves: plain fit of order ${jump.order}, ${jump.kernel} kernel, dashed on the untreated side. `
  return figureOf({
    name: subject.name,
    width,
    title,
    lines: [
      `${capital(subject.of)}. Points: means of bins, bars ±1.96 standard errors. ${hasFit ? curves : ''}Grey dashes: bandwidth, ${widthText(view, jump.bandwidth)}.`,
    ],
    description: describe(view, subject, bins, hasFit),
    caption: captionOf(view, subject, hasFit, missing),
    data: dataOf(exhibit, bins, hasFit),
    draw: (top) => {
      const plotTop = top + 36
      const plane = planeOf(exhibit, bins, jump.bandwidth, plotTop)
      const bottom = plotTop + plotHeight
      const marks = [
        ...sideLegend(view, jump.units_in_bandwidth, top + 16),
        ...leftAxis(plane, `Mean ${column}`),
        ...bottomAxis(plane.x, bottom, view.words.axis),
        ...lineAndBandwidth(plane, jump.bandwidth),
        ...(hasFit ? sides.map((side) => fitMark(exhibit.fit[side], side, plane)) : []),
        ...bins.flatMap((bin) => binMarks(bin, plane)),
        ...(missing > 0
          ? [textAt(width, bottom + 56, withheldWords(missing, view), { size: 11, color: 'muted', anchor: 'end' })]
          : []),
      ]
      return { marks, end: bottom + (missing > 0 ? 64 : 48) }
    },
  })
}

const sides = ['untreated', 'treated'] as const

function withheldWords(bins: number, view: View): string {
  return `${bins === 1 ? '1 bin' : `${bins} bins`} with fewer than ${view.smallestCell} units not drawn.`
}

function captionOf(view: View, { column, of, jump }: ScatterSubject, hasFit: boolean, missing: number): string {
  const marks = 'Hollow circles: untreated side; filled: treated side; bars are ±1.96 standard errors of the mean.'
  const fit = hasFit
    ? ` The curves are a model, the plain local polynomial of order ${jump.order} on each side (${jump.kernel} kernel); look at the points first.`
    : ''
  const withheld = missing > 0 ? ` ${withheldWords(missing, view)}` : ''
  return `Mean ${column} by ${view.words.isBorder ? `distance to the border in ${view.exhibits.xUnit}` : `distance from ${view.words.theLine} in ${view.exhibits.xUnit}`}, ${of}; treated units at positive distances. ${marks} N within the bandwidth of ${widthText(view, jump.bandwidth)} (dashed): ${unitsWords(view, jump.units_in_bandwidth)}.${fit}${withheld}`
}

function describe(view: View, subject: ScatterSubject, bins: readonly ScatterBin[], hasFit: boolean): string {
  const words = sides.map((side) => {
    const here = bins.filter((bin) => bin.side === side)
    const [low, high] = extent(here, (bin) => bin.mean)
    const range =
      low === undefined
        ? 'no bin drawn'
        : `${here.length} bin means from ${fixed(low, subject.places)} to ${fixed(high, subject.places)}`
    return `${side} side: ${range}, ${cell(subject.jump.units_in_bandwidth[side], view.smallestCell)} units in the bandwidth`
  })
  return `Binned means of ${subject.column} by distance from ${view.words.theLine}${hasFit ? ', with a fitted curve on each side' : ''}. ${words.join('; ')}.`
}

function dataOf(exhibit: ScatterExhibit, bins: readonly ScatterBin[], hasFit: boolean): FigureData {
  const curves = hasFit
    ? sides.flatMap((side) =>
        exhibit.fit[side].x.map((x, i) => ['curve', side, null, null, x, exhibit.fit[side].y[i], null, null]),
      )
    : []
  return {
    columns: ['mark', 'side', 'low', 'high', 'x', 'y', 'standard_error', 'units'],
    rows: [
      ...bins.map((bin) => ['bin', bin.side, bin.low, bin.high, bin.x, bin.mean, bin.standardError, bin.units]),
      ...curves,
    ],
  }
}

/** The same with and without curves, so that the two can be laid over each other. */
function planeOf(exhibit: ScatterExhibit, bins: readonly ScatterBin[], bandwidth: BySide, plotTop: number): Plane {
  const xs = [
    ...bins.flatMap((bin) => [bin.low, bin.high]),
    ...exhibit.fit.untreated.x,
    ...exhibit.fit.treated.x,
    -bandwidth.untreated,
    bandwidth.treated,
    0,
  ].filter(Number.isFinite)
  const ys = [
    ...bins.flatMap((bin) => [bin.mean - barOf(bin), bin.mean + barOf(bin)]),
    ...exhibit.fit.untreated.y,
    ...exhibit.fit.treated.y,
  ].filter(Number.isFinite)
  const [low = 0, high = 1] = extent(ys)
  const pad = high > low ? 0.04 * (high - low) : Math.max(Math.abs(high) * 0.05, 0.5)
  const y = scaleLinear([low - pad, high + pad], [plotTop + plotHeight, plotTop])
  return { x: fitRight(scaleLinear().domain(extent(xs) as [number, number]), roomForNumbers(y), width), y }
}

function barOf(bin: ScatterBin): number {
  return Number.isFinite(bin.standardError) ? barFactor * bin.standardError : 0
}

function sideLegend(view: View, units: BySide, y: number): string[] {
  const untreated = `Untreated, ${cell(units.untreated, view.smallestCell)} units in the bandwidth`
  const treated = `Treated, ${cell(units.treated, view.smallestCell)} units in the bandwidth`
  const second = 34 + textWidth(untreated, 12)
  return [
    element('circle', { cx: 6, cy: y - 4, r: 4.5, ...hollow('untreated', 1.8) }),
    textAt(17, y, untreated),
    element('circle', { cx: second + 6, cy: y - 4, r: 5, ...filled('treated') }),
    textAt(second + 17, y, treated),
  ]
}

function lineAndBandwidth({ x, y }: Plane, bandwidth: BySide): string[] {
  const [bottom, top] = y.range()
  return [
    element('path', { d: upright(x(0), top, bottom), ...stroked('ink', 1.5) }),
    ...[-bandwidth.untreated, bandwidth.treated].map((at) =>
      element('path', { d: upright(x(at), top, bottom), ...stroked('muted', 1), 'stroke-dasharray': '5 4' }),
    ),
  ]
}

function binMarks(bin: ScatterBin, { x, y }: Plane): string[] {
  const at = x(bin.x)
  const bar = barOf(bin)
  const interval = upright(at, y(bin.mean - bar), y(bin.mean + bar))
  return [
    ...(bar > 0 ? [element('path', { d: interval, ...stroked(bin.side, 1.2) })] : []),
    bin.side === 'treated'
      ? element('circle', { cx: tenth(at), cy: y(bin.mean), r: 4.2, ...filled('treated') })
      : element('circle', { cx: tenth(at), cy: y(bin.mean), r: 3.8, ...hollow('untreated', 1.8) }),
  ]
}

function fitMark(fit: ScatterExhibit['fit']['treated'], side: 'untreated' | 'treated', { x, y }: Plane): string {
  const points = fit.x.map((value, index): [number, number] => [x(value), y(fit.y[index])])
  const path = pathOf<[number, number]>()
    .defined(([px, py]) => Number.isFinite(px) && Number.isFinite(py))
    .digits(2)(points)
  return element('path', {
    d: path ?? '',
    ...stroked(side, 2.2),
    ...(side === 'untreated' ? { 'stroke-dasharray': '8 4' } : {}),
  })
}
