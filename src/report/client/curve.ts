/** The estimate against the bandwidth, with its interval, the study's own and where the slider stands. */
import { drawing, element, filled, stroked, textAt, textWidth } from '../figures/svg.js'
import { fixed, type Places, significant } from '../numbers.js'
import { type Axes, axesOf } from './axes.js'
import type { Shown } from './model.js'

export interface CurvePoint {
  readonly bandwidth: number
  readonly estimate: number
  readonly low: number
  readonly high: number
}

export interface Curve {
  readonly points: readonly CurvePoint[]
  readonly shown: Shown | undefined
  /** Of the side that moves. */
  readonly at: number | undefined
  readonly own: Shown | undefined
  readonly outcome: string
  readonly unit: string
  readonly xUnit: string
  readonly levelWords: string
  readonly places: Places
}

const width = 620
const height = 300

export function curveFigure(curve: Curve): string {
  const { points, shown, at, own, outcome, unit, xUnit, levelWords, places } = curve
  const title = `${outcome}: corrected estimate against bandwidth in ${xUnit}`
  const log = Math.log
  const ends = points
    .flatMap(({ low, high }) => [low, high])
    .concat(own ? [own.corrected.low, own.corrected.high] : [], 0)
  const axes = axesOf({
    x: [log(points[0].bandwidth), log(points[points.length - 1].bandwidth)],
    y: [Math.min(...ends), Math.max(...ends)],
    xTicks: ticksOf(points).map((value) => ({ at: log(value), label: significant(value) })),
    xTitle: `Bandwidth in ${xUnit}`,
    yTitle: `Jump in ${outcome}`,
    width,
    height,
  })
  const { x, y } = axes
  const path = (values: readonly (readonly [number, number])[]) =>
    values
      .map(([bandwidth, value], i) => `${i === 0 ? 'M' : 'L'}${x(log(bandwidth)).toFixed(1)} ${y(value).toFixed(1)}`)
      .join('')
  const upper = points.map(({ bandwidth, high }) => [bandwidth, high] as const)
  const lower = points.map(({ bandwidth, low }) => [bandwidth, low] as const).reverse()
  const body = [
    element('path', { d: `${path([...upper, ...lower])}Z`, ...filled('grid') }),
    ...axes.marks,
    element('path', { d: `M${axes.left} ${y(0).toFixed(1)}H${axes.right}`, ...stroked('ink', 1) }),
    element('path', {
      d: path(points.map(({ bandwidth, estimate }) => [bandwidth, estimate])),
      ...stroked('ink', 1.8),
    }),
    ...points.map(({ bandwidth, estimate }) =>
      element('circle', { cx: x(log(bandwidth)), cy: y(estimate), r: 2.2, ...filled('ink') }),
    ),
    ...ownMarks(own, axes),
    ...nowMarks(shown, at, axes),
  ]
  return drawing({ id: 'what-if-curve', width, height, title, description: described(), body })

  function described(): string {
    const first = points[0]
    const last = points[points.length - 1]
    const excluding = points.filter(({ low, high }) => low > 0 || high < 0).length
    const one = ({ bandwidth, estimate, low, high }: CurvePoint) =>
      `${fixed(estimate, places)} (${fixed(low, places)} to ${fixed(high, places)}) at ${significant(bandwidth)}${unit}`
    return `Shaded: ${levelWords} interval. From ${one(first)} to ${one(last)}; the interval excludes zero at ${excluding} of ${points.length} bandwidths. Diamond: the study’s own. Ring: the bandwidth chosen.`
  }
}

function ticksOf(points: readonly CurvePoint[]): number[] {
  const ticks: number[] = []
  let end = Number.NEGATIVE_INFINITY
  const span = Math.log(points[points.length - 1].bandwidth / points[0].bandwidth) || 1
  for (const { bandwidth } of points) {
    const at = (Math.log(bandwidth / points[0].bandwidth) / span) * (width - 110)
    const half = textWidth(significant(bandwidth), 12) / 2 + 6
    if (at - half < end) continue
    ticks.push(bandwidth)
    end = at + half
  }
  return ticks
}

function ownMarks(own: Shown | undefined, { x, y, left, right }: Axes): string[] {
  if (!own) return []
  const { untreated, treated } = own.bandwidth
  const at = x(Math.log(Math.sqrt(untreated * treated)))
  const level = y(own.corrected.estimate)
  return [
    element('path', { d: `M${left} ${level.toFixed(1)}H${right}`, ...stroked('muted', 1), 'stroke-dasharray': '2 3' }),
    element('path', {
      d: `M${at.toFixed(1)} ${(level - 7).toFixed(1)}l7 7l-7 7l-7 -7Z`,
      ...filled('muted'),
    }),
  ]
}

function nowMarks(shown: Shown | undefined, at: number | undefined, { x, y, top, bottom }: Axes): string[] {
  if (!shown || at === undefined) return []
  const [px, py] = [x(Math.log(at)), y(shown.corrected.estimate)]
  return [
    element('path', { d: `M${px.toFixed(1)} ${top}V${bottom}`, ...stroked('ink', 1), 'stroke-dasharray': '5 4' }),
    element('circle', { cx: px, cy: py, r: 6.5, ...stroked('ink', 2.2) }),
    textAt(px, top - 4, significant(at), { anchor: 'middle', size: 11 }),
  ]
}
