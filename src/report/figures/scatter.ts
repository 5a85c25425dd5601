/** Binned means on both sides of a line, their intervals, the plain fit, the line itself and the bandwidth. */
import { extent } from 'd3-array'
import { type ScaleLinear, scaleLinear } from 'd3-scale'
import { line as pathOf } from 'd3-shape'
import type { BySide, Jump, ScatterBin, ScatterExhibit } from '../../results.js'
import { cell, fixed, sharedPlaces } from '../numbers.js'
import { type View, widthText } from '../view.js'
import { drawing, element, filled, heading, hollow, stroked, textAt, textWidth } from './svg.js'

export interface ScatterSubject {
  readonly id: string
  readonly outcome: string
  /** "all 24 cutoffs pooled", or the label of one line. */
  readonly of: string
  readonly jump: Jump
  readonly exhibit: ScatterExhibit
}

type Scale = ScaleLinear<number, number>

const width = 720
const plotHeight = 330
const barFactor = 1.96

export function scatterFigure(view: View, subject: ScatterSubject): string {
  const { jump, exhibit } = subject
  const bins = exhibit.bins.filter((bin) => bin.units >= view.smallestCell && Number.isFinite(bin.mean))
  const places = sharedPlaces([jump.plain.standard_error], [jump.plain.estimate])
  const means = `${fixed(jump.at_line.untreated, places)} untreated, ${fixed(jump.at_line.treated, places)} treated`
  const title = `${subject.outcome}, ${subject.of}: ${means} at ${view.words.theLine}`
  const top = heading(
    title,
    [
      `Points: means of bins${bins.length > 0 ? ', bars ±1.96 standard errors' : ''}. Curves: plain fit of order ${jump.order}, ${jump.kernel} kernel. Dashed: bandwidth, ${widthText(view, jump.bandwidth)}.`,
    ],
    width,
  )
  const legend = sideLegend(view, jump.units_in_bandwidth, top.height + 16)
  const plotTop = top.height + 36
  const scales = scalesOf(exhibit, bins, jump.bandwidth, plotTop)
  const missingBins = exhibit.bins.length - bins.length
  const body = [
    ...top.marks,
    ...legend,
    ...axes(scales, view.words.axis, subject.outcome, plotTop),
    ...lineAndBandwidth(scales.x, jump.bandwidth, plotTop),
    ...bins.flatMap((bin) => binMarks(bin, scales)),
    ...(['untreated', 'treated'] as const).map((side) => fitMark(exhibit.fit[side], side, scales)),
    ...(missingBins > 0
      ? [
          textAt(width, plotTop + plotHeight + 56, withheldWords(missingBins, view), {
            size: 11,
            color: 'muted',
            anchor: 'end',
          }),
        ]
      : []),
  ]
  return drawing({
    id: subject.id,
    width,
    height: plotTop + plotHeight + (missingBins > 0 ? 64 : 48),
    title,
    description: describe(view, subject, bins),
    body,
  })
}

function withheldWords(bins: number, view: View): string {
  return `${bins === 1 ? '1 bin' : `${bins} bins`} with fewer than ${view.smallestCell} units not drawn.`
}

function describe(view: View, { jump, outcome }: ScatterSubject, bins: readonly ScatterBin[]): string {
  const sides = (['untreated', 'treated'] as const).map((side) => {
    const here = bins.filter((bin) => bin.side === side)
    const [low, high] = extent(here, (bin) => bin.mean)
    const places = sharedPlaces([jump.plain.standard_error], [jump.plain.estimate])
    const range =
      low === undefined
        ? 'no bin drawn'
        : `${here.length} bin means from ${fixed(low, places)} to ${fixed(high, places)}`
    return `${side} side: ${range}, ${cell(jump.units_in_bandwidth[side], view.smallestCell)} units in the bandwidth`
  })
  return `Binned means of ${outcome} by distance from ${view.words.theLine}, with a fitted curve on each side. ${sides.join('; ')}.`
}

function scalesOf(exhibit: ScatterExhibit, bins: readonly ScatterBin[], bandwidth: BySide, plotTop: number) {
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
  const labels = y.ticks(6).map(y.tickFormat(6))
  const left = Math.max(...labels.map((label) => textWidth(label, 12))) + 38
  const x = scaleLinear(extent(xs) as [number, number], [left, width - 12])
  const lastTick = x.ticks(8).map(x.tickFormat(8)).at(-1) ?? ''
  x.range([left, width - Math.max(12, textWidth(lastTick, 12) / 2)])
  return { x, y }
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

function axes({ x, y }: { x: Scale; y: Scale }, xTitle: string, yTitle: string, plotTop: number): string[] {
  const [left, right] = x.range()
  const bottom = plotTop + plotHeight
  const yTick = y.tickFormat(6)
  const xTick = x.tickFormat(8)
  const shortTitle = textWidth(yTitle, 12) > plotHeight ? `${yTitle.slice(0, 40)}…` : yTitle
  return [
    ...y
      .ticks(6)
      .flatMap((tick) => [
        element('path', { d: `M${round1(left)} ${round1(y(tick))}H${round1(right)}`, ...stroked('grid', 1) }),
        textAt(left - 8, y(tick) + 4, yTick(tick), { anchor: 'end', color: 'muted' }),
      ]),
    element('path', { d: `M${round1(left)} ${round1(bottom)}H${round1(right)}`, ...stroked('ink', 1) }),
    ...x
      .ticks(8)
      .flatMap((tick) => [
        element('path', { d: `M${round1(x(tick))} ${round1(bottom)}v5`, ...stroked('ink', 1) }),
        textAt(x(tick), bottom + 19, xTick(tick), { anchor: 'middle', color: 'muted' }),
      ]),
    textAt((left + right) / 2, bottom + 38, xTitle, { anchor: 'middle' }),
    textAt(13, (plotTop + bottom) / 2, shortTitle, { anchor: 'middle', turned: true }),
  ]
}

function lineAndBandwidth(x: Scale, bandwidth: BySide, plotTop: number): string[] {
  const upright = (at: number) => `M${round1(x(at))} ${round1(plotTop)}V${round1(plotTop + plotHeight)}`
  return [
    element('path', { d: upright(0), ...stroked('ink', 1.5) }),
    ...[-bandwidth.untreated, bandwidth.treated].map((at) =>
      element('path', { d: upright(at), ...stroked('muted', 1), 'stroke-dasharray': '5 4' }),
    ),
  ]
}

function binMarks(bin: ScatterBin, { x, y }: { x: Scale; y: Scale }): string[] {
  const at = x(bin.x)
  const bar = barOf(bin)
  const interval = `M${round1(at)} ${round1(y(bin.mean - bar))}V${round1(y(bin.mean + bar))}`
  return [
    ...(bar > 0 ? [element('path', { d: interval, ...stroked(bin.side, 1.2) })] : []),
    bin.side === 'treated'
      ? element('circle', { cx: at, cy: y(bin.mean), r: 4.2, ...filled('treated') })
      : element('circle', { cx: at, cy: y(bin.mean), r: 3.8, ...hollow('untreated', 1.8) }),
  ]
}

function fitMark(
  fit: ScatterExhibit['fit']['treated'],
  side: 'untreated' | 'treated',
  { x, y }: { x: Scale; y: Scale },
): string {
  const points = fit.x.map((value, index): [number, number] => [x(value), y(fit.y[index])])
  const path = pathOf<[number, number]>()
    .defined(([px, py]) => Number.isFinite(px) && Number.isFinite(py))
    .digits(2)(points)
  return element('path', { d: path ?? '', ...stroked(side, 2.2) })
}

function round1(value: number): number {
  return Math.round(value * 10) / 10
}
