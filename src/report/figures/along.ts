/** Effects at points along the border: estimates, pointwise intervals, the band for the whole curve, blanks. */
import { extent, quantile } from 'd3-array'
import { scaleLinear } from 'd3-scale'
import type { AlongResult } from '../../results.js'
import { openCount } from '../csv.js'
import { significant } from '../numbers.js'
import { isEstimated, type OutcomeView, type View, widthText } from '../view.js'
import { leftAxis, type Plane, roomForNumbers, type Scale, tenth, upright } from './axes.js'
import { type Figure, type FigureData, figureOf } from './figure.js'
import { element, filled, stroked, textAt, wrapText } from './svg.js'

const width = 720
const plotHeight = 300

/** One group of points for each pair of zones, in the order of the border. */
interface Group {
  readonly name: string
  readonly from: number
  readonly to: number
}

/** Nothing where no point has an estimate. */
export function alongFigure(view: View, outcome: OutcomeView): Figure | undefined {
  const points = outcome.result.along
  const drawn = points?.filter(({ estimate }) => estimate !== null) ?? []
  if (!points || drawn.length === 0) return undefined
  const blanks = points.length - drawn.length
  const [low, high] = extent(drawn, ({ estimate }) => estimate as number)
  const groups = groupsOf(view, points)
  return figureOf({
    name: `${outcome.slug}-along`,
    width,
    title: titleOf(outcome, drawn),
    lines: [
      `Thick: ${view.words.level} interval of each point. Thin, with ends: band for all points at once. Dashed: pooled estimate against distance alone. ${blanks > 0 ? `Crosses: ${blanks} points without enough units. ` : ''}Bars without an end run on past the edge.`,
    ],
    description: `Estimates at ${drawn.length} points from ${low?.toPrecision(3)} to ${high?.toPrecision(3)}; ${blanks} points are blank. Points stand in the order of the border between ${groups.map(({ name }) => name).join(', ')}.`,
    caption: captionOf(view, outcome, drawn.length, blanks),
    data: dataOf(view, points),
    draw: (top) => {
      const plotTop = top + 14
      const scales = scalesOf(points, plotTop)
      const marks = [
        ...leftAxis(scales, `Jump in ${outcome.result.outcome}`),
        ...xAxis(scales),
        ...groups.flatMap((group) => groupMarks(group, scales)),
        ...pooledMark(outcome, scales),
        ...points.flatMap((point, i) => pointMarks(point, i, scales)),
      ]
      return { marks, end: plotTop + plotHeight + 76 }
    },
  })
}

/** Where the band for the whole curve leaves zero, that holds for all points at once. */
function titleOf({ result }: OutcomeView, drawn: readonly AlongResult[]): string {
  const clear = drawn.filter(
    ({ uniform_low: low, uniform_high: high }) => (low !== null && low > 0) || (high !== null && high < 0),
  ).length
  const seen =
    clear === 0
      ? `at none of ${drawn.length} points along the border does the band exclude zero`
      : `the band excludes zero at ${clear} of ${drawn.length} points along the border`
  return `${result.outcome}: ${seen}`
}

function captionOf(view: View, { result }: OutcomeView, drawn: number, blanks: number): string {
  const average = result.along_average?.length
  const width = result.along_bandwidth
  const mean =
    average && 'estimate' in average
      ? ` Weighted by length of border the points average ${significant(average.estimate)} (${significant(average.low)} to ${significant(average.high)}).`
      : ''
  const rule = width ? ` Bandwidth ${widthText(view, width)}: ${width.rule}.` : ''
  const critical = result.along_critical_value
  const band = critical
    ? ` The band reaches ${significant(critical)} standard errors and covers all points at once.`
    : ''
  return `The jump in ${result.outcome} at ${drawn} points along the border, fitted in two coordinates, which bends of the border do not bias as they do distance alone; treated minus untreated.${band}${mean}${rule}${blanks > 0 ? ` ${blanks} points lack units for an estimate.` : ''}`
}

/** By piece and place along it; no coordinate. */
function dataOf(view: View, points: readonly AlongResult[]): FigureData {
  return {
    columns: [
      'piece',
      'position_m',
      'estimate',
      'standard_error',
      'low',
      'high',
      'uniform_low',
      'uniform_high',
      'units_untreated',
      'units_treated',
    ],
    rows: points.map((point) => [
      point.piece,
      point.position_m,
      point.estimate,
      point.standard_error,
      point.low,
      point.high,
      point.uniform_low,
      point.uniform_high,
      openCount(view, point.units.untreated),
      openCount(view, point.units.treated),
    ]),
  }
}

/** The vertical range follows the pointwise intervals, the widest tenth left aside. */
function scalesOf(points: readonly AlongResult[], plotTop: number): Plane {
  const lows = points.flatMap(({ low }) => (low === null ? [] : [low]))
  const highs = points.flatMap(({ high }) => (high === null ? [] : [high]))
  const estimates = points.flatMap(({ estimate }) => (estimate === null ? [] : [estimate]))
  const [least = -1, most = 1] = extent([quantile(lows, 0.1) ?? 0, quantile(highs, 0.9) ?? 0, 0, ...estimates])
  const pad = 0.06 * (most - least || 1)
  const y = scaleLinear([least - pad, most + pad], [plotTop + plotHeight, plotTop]).clamp(true)
  return { x: scaleLinear([-0.5, points.length - 0.5], [roomForNumbers(y), width - 12]), y }
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

function xAxis({ x, y }: Plane): string[] {
  const [left, right] = x.range()
  const [bottom] = y.range()
  return [
    element('path', { d: `M${tenth(left)} ${tenth(y(0))}H${tenth(right)}`, ...stroked('ink', 1.2) }),
    textAt(
      (left + right) / 2,
      bottom + 66,
      'Points in the order of the border, by pair of zones (untreated | treated)',
      { anchor: 'middle' },
    ),
  ]
}

function groupMarks({ name, from, to }: Group, { x, y }: Plane): string[] {
  const [bottom, top] = y.range()
  const room = x(to + 0.5) - x(from - 0.5)
  const lines = wrapText(name, room - 6, 10.5)
  const middle = (x(from - 0.5) + x(to + 0.5)) / 2
  const fits = lines.length <= 3
  return [
    element('path', {
      d: upright(x(from - 0.5), top, bottom + 8),
      ...stroked('grid', 1),
    }),
    ...(fits
      ? lines.map((line, i) =>
          textAt(middle, bottom + 18 + 13 * i, line, { anchor: 'middle', size: 10.5, color: 'muted' }),
        )
      : []),
  ]
}

function pooledMark({ result }: OutcomeView, { x, y }: Plane): string[] {
  if (!isEstimated(result.pooled)) return []
  const at = Math.round(y(result.pooled.corrected.estimate) * 10) / 10
  const [left, right] = x.range()
  return [element('path', { d: `M${left} ${at}H${right}`, ...stroked('muted', 1.2), 'stroke-dasharray': '5 4' })]
}

function pointMarks(point: AlongResult, i: number, { x, y }: Plane): string[] {
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
  const bar = (from: number, to: number) => upright(at, y(from), y(to))
  const end = (value: number) => (isInside(value, y) ? `M${at - 3} ${tenth(y(value))}h6` : '')
  return [
    element('path', {
      d: `${bar(uniformLow, uniformHigh)}${end(uniformLow)}${end(uniformHigh)}`,
      ...stroked('muted', 1),
    }),
    element('path', { d: bar(low, high), ...stroked('treated', 3) }),
    element('circle', { cx: at, cy: y(estimate), r: 3.4, ...filled('ink') }),
  ]
}

function isInside(value: number, y: Scale): boolean {
  const [low, high] = y.domain()
  return value >= low && value <= high
}
