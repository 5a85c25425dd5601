/** Effects at points along the border: estimates, pointwise intervals, the band for the whole curve, blanks. */
import { extent, quantile } from 'd3-array'
import { type ScaleLinear, scaleLinear } from 'd3-scale'
import type { AlongResult } from '../../results.js'
import { isEstimated, type OutcomeView, type View } from '../view.js'
import { drawing, element, filled, heading, stroked, textAt, textWidth, wrapText } from './svg.js'

const width = 720
const plotHeight = 300

/** One group of points for each pair of zones, in the order of the border. */
interface Group {
  readonly name: string
  readonly from: number
  readonly to: number
}

export function alongFigure(view: View, outcome: OutcomeView, id: string): string | undefined {
  const points = outcome.result.along
  const drawn = points?.filter(({ estimate }) => estimate !== null) ?? []
  if (!points || drawn.length === 0) return undefined
  const title = `${outcome.result.outcome}: jump at ${points.length} points along the border`
  const blanks = points.length - drawn.length
  const top = heading(
    title,
    [
      `Thick: ${view.words.level} interval of each point. Thin: band for all points at once. Dashed: pooled estimate against distance alone. ${blanks > 0 ? `Crosses: ${blanks} points without enough units. ` : ''}Bars are cut at the edge.`,
    ],
    width,
  )
  const plotTop = top.height + 14
  const scales = scalesOf(points, plotTop)
  const groups = groupsOf(view, points)
  const body = [
    ...top.marks,
    ...grid(scales, outcome.result.outcome),
    ...groups.flatMap((group) => groupMarks(group, scales, plotTop)),
    ...pooledMark(outcome, scales),
    ...points.flatMap((point, i) => pointMarks(point, i, scales)),
  ]
  const [low, high] = extent(drawn, ({ estimate }) => estimate as number)
  const description = `Estimates at ${drawn.length} points from ${low?.toPrecision(3)} to ${high?.toPrecision(3)}; ${blanks} points are blank. Points stand in the order of the border between ${groups.map(({ name }) => name).join(', ')}.`
  return drawing({ id, width, height: plotTop + plotHeight + 76, title, description, body })
}

interface Scales {
  readonly x: ScaleLinear<number, number>
  readonly y: ScaleLinear<number, number>
}

/** The vertical range follows the pointwise intervals, the widest tenth left aside. */
function scalesOf(points: readonly AlongResult[], plotTop: number): Scales {
  const lows = points.flatMap(({ low }) => (low === null ? [] : [low]))
  const highs = points.flatMap(({ high }) => (high === null ? [] : [high]))
  const estimates = points.flatMap(({ estimate }) => (estimate === null ? [] : [estimate]))
  const [least = -1, most = 1] = extent([quantile(lows, 0.1) ?? 0, quantile(highs, 0.9) ?? 0, 0, ...estimates])
  const pad = 0.06 * (most - least || 1)
  const y = scaleLinear([least - pad, most + pad], [plotTop + plotHeight, plotTop]).clamp(true)
  const left = Math.max(...y.ticks(6).map((tick) => textWidth(y.tickFormat(6)(tick), 12))) + 38
  return { x: scaleLinear([-0.5, points.length - 0.5], [left, width - 12]), y }
}

function groupsOf(view: View, points: readonly AlongResult[]): Group[] {
  const groups: { name: string; from: number; to: number }[] = []
  points.forEach(({ piece }, i) => {
    const name = view.lineOf.get(piece)?.zones?.join(' | ') ?? piece
    const last = groups.at(-1)
    if (last?.name === name) last.to = i
    else groups.push({ name, from: i, to: i })
  })
  return groups
}

function grid({ x, y }: Scales, outcome: string): string[] {
  const [left, right] = x.range()
  const format = y.tickFormat(6)
  const across = (at: number) => `M${left} ${Math.round(at * 10) / 10}H${right}`
  const [bottom, top] = y.range()
  return [
    ...y
      .ticks(6)
      .flatMap((tick) => [
        element('path', { d: across(y(tick)), ...stroked('grid', 1) }),
        textAt(left - 8, y(tick) + 4, format(tick), { anchor: 'end', color: 'muted' }),
      ]),
    element('path', { d: across(y(0)), ...stroked('ink', 1.2) }),
    textAt(13, (top + bottom) / 2, `Jump in ${outcome}`, { anchor: 'middle', turned: true }),
    textAt(
      (left + right) / 2,
      bottom + 50,
      'Points in the order of the border, by pair of zones (untreated | treated)',
      {
        anchor: 'middle',
      },
    ),
  ]
}

function groupMarks({ name, from, to }: Group, { x, y }: Scales, plotTop: number): string[] {
  const [bottom] = y.range()
  const room = x(to + 0.5) - x(from - 0.5)
  const lines = wrapText(name, room - 6, 10.5)
  const middle = (x(from - 0.5) + x(to + 0.5)) / 2
  const fits = lines.length <= 3
  return [
    element('path', {
      d: `M${Math.round(x(from - 0.5) * 10) / 10} ${plotTop}V${bottom + 8}`,
      ...stroked('grid', 1),
    }),
    ...(fits
      ? lines.map((line, i) =>
          textAt(middle, bottom + 18 + 13 * i, line, { anchor: 'middle', size: 10.5, color: 'muted' }),
        )
      : []),
  ]
}

function pooledMark({ result }: OutcomeView, { x, y }: Scales): string[] {
  if (!isEstimated(result.pooled)) return []
  const at = Math.round(y(result.pooled.corrected.estimate) * 10) / 10
  const [left, right] = x.range()
  return [element('path', { d: `M${left} ${at}H${right}`, ...stroked('muted', 1.2), 'stroke-dasharray': '5 4' })]
}

function pointMarks(point: AlongResult, i: number, { x, y }: Scales): string[] {
  const at = Math.round(x(i) * 10) / 10
  const { estimate, low, high, uniform_low: uniformLow, uniform_high: uniformHigh } = point
  if (estimate === null || low === null || high === null || uniformLow === null || uniformHigh === null) {
    const zero = y(0)
    return [
      element('path', {
        d: `M${at - 3} ${zero - 3}l6 6M${at - 3} ${zero + 3}l6 -6`,
        ...stroked('muted', 1.2),
      }),
    ]
  }
  const bar = (from: number, to: number) => `M${at} ${Math.round(y(from) * 10) / 10}V${Math.round(y(to) * 10) / 10}`
  return [
    element('path', { d: bar(uniformLow, uniformHigh), ...stroked('muted', 0.8) }),
    element('path', { d: bar(low, high), ...stroked('treated', 2.2) }),
    element('circle', { cx: at, cy: y(estimate), r: 3.4, ...filled('ink') }),
  ]
}
