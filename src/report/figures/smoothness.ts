/** The bias-aware interval as the curves are allowed to bend more: how much curvature the finding survives. */
import { extent } from 'd3-array'
import { scaleLinear } from 'd3-scale'
import { area } from 'd3-shape'
import type { BiasAware, Jump } from '../../results.js'
import { fixed, type Places, significant } from '../numbers.js'
import { pooledPlaces } from '../pooledTable.js'
import { isEstimated, type OutcomeView, type View } from '../view.js'
import { baseLine, leftAxis, type Plane, roomForNumbers, tenth, upright } from './axes.js'
import { type Figure, figureOf } from './figure.js'
import { excludesZero, unitsWords } from './findings.js'
import { element, filled, stroked, textAt } from './svg.js'

type Curve = NonNullable<BiasAware['curve']>

const width = 720
const plotHeight = 240

/** Nothing where there is no bias-aware interval over a range of smoothness. */
export function smoothnessFigure(view: View, outcome: OutcomeView): Figure | undefined {
  const { pooled } = outcome.result
  const found = isEstimated<Jump>(pooled) ? pooled.bias_aware : undefined
  const curve = found?.curve?.filter(({ low, high }) => Number.isFinite(low) && Number.isFinite(high))
  if (!found || !curve || curve.length < 2) return undefined
  const places = pooledPlaces(outcome)
  const from = found.smoothness_from === 'rule' ? 'a rule of thumb takes from the data' : 'the study names'
  return figureOf({
    name: `${outcome.slug}-smoothness`,
    width,
    title: titleOf(outcome.result.outcome, curve),
    lines: [
      `Band: ${view.words.level} bias-aware interval at each bound on the second derivative, each at its own best bandwidth. Dot and bar: the bound that ${from}.`,
    ],
    description: `Bias-aware intervals for ${curve.length} bounds from ${significant(curve[0].smoothness)} to ${significant(curve[curve.length - 1].smoothness)}: the narrowest ${ends(curve[0], places)}, the widest ${ends(curve[curve.length - 1], places)}.`,
    caption: `How far the finding for ${outcome.result.outcome} depends on how smooth the curves are held to be. Right: curves may bend more, and the interval allows for more bias (Armstrong & Kolesár 2020). At the bound that ${from}, ${significant(found.smoothness)}, the interval is ${ends(found, places)}; N there: ${unitsWords(view, found.units_in_bandwidth)}.`,
    data: {
      columns: ['smoothness', 'low', 'high', 'estimate'],
      rows: [
        ...curve.map((one) => [one.smoothness, one.low, one.high, null]),
        [found.smoothness, found.low, found.high, found.estimate],
      ],
    },
    draw: (top) => {
      const plane = planeOf(curve, found, top + 14)
      const bottom = top + 14 + plotHeight
      return {
        marks: [
          ...leftAxis(plane, `Jump in ${outcome.result.outcome}`),
          bandMark(curve, plane),
          ...guides(plane),
          ...ownMarks(found, plane),
          ...curve.map(({ smoothness }) =>
            textAt(plane.x(Math.log2(smoothness)), bottom + 19, significant(smoothness), {
              anchor: 'middle',
              size: 11,
              color: 'muted',
            }),
          ),
          textAt(
            width / 2,
            bottom + 40,
            `Largest second derivative allowed, in ${outcome.result.outcome} per ${view.exhibits.xUnit}² (each step doubles it)`,
            {
              anchor: 'middle',
            },
          ),
        ],
        end: bottom + 50,
      }
    },
  })
}

function titleOf(outcome: string, curve: Curve): string {
  const includes = curve.filter((one) => !excludesZero(one))
  if (includes.length === 0)
    return `However much the curves bend in the range shown, the interval for ${outcome} excludes zero`
  if (includes.length === curve.length)
    return `However smooth the curves are held to be in the range shown, the interval for ${outcome} includes zero`
  const first = curve.find((one) => !excludesZero(one)) as Curve[number]
  return excludesZero(curve[0])
    ? `The interval for ${outcome} includes zero once the curves may bend by ${significant(first.smoothness)}`
    : `Whether the interval for ${outcome} includes zero depends on how much the curves may bend`
}

const ends = ({ low, high }: { low: number; high: number }, places: Places) =>
  `${fixed(low, places)} to ${fixed(high, places)}`

/** Bounds stand a doubling apart. */
function planeOf(curve: Curve, found: BiasAware, top: number): Plane {
  const [low, high] = extent([...curve, found].flatMap((one) => [one.low, one.high, 0])) as [number, number]
  const pad = 0.06 * (high - low || 1)
  const y = scaleLinear([low - pad, high + pad], [top + plotHeight, top])
  const logs = [...curve, found].map(({ smoothness }) => Math.log2(smoothness))
  const [first, last] = extent(logs) as [number, number]
  return { x: scaleLinear([first - 0.35, last + 0.35], [roomForNumbers(y), width - 12]), y }
}

function bandMark(curve: Curve, { x, y }: Plane): string {
  const path = area<Curve[number]>()
    .x(({ smoothness }) => x(Math.log2(smoothness)))
    .y0(({ low }) => y(low))
    .y1(({ high }) => y(high))
    .digits(1)(curve)
  return element('path', {
    d: path ?? '',
    class: 'f-band s-ink',
    fill: '#e4e6e9',
    stroke: '#1d2126',
    'stroke-width': 1.2,
  })
}

function guides({ x, y }: Plane): string[] {
  const [left, right] = x.range()
  return [
    element('path', { d: `M${tenth(left)} ${tenth(y(0))}H${tenth(right)}`, ...stroked('ink', 1.2) }),
    baseLine(left, right, y.range()[0]),
  ]
}

function ownMarks({ smoothness, estimate, low, high }: BiasAware, { x, y }: Plane): string[] {
  const at = x(Math.log2(smoothness))
  return [
    element('path', { d: upright(at, y(low), y(high)), ...stroked('treated', 2.6) }),
    element('circle', { cx: tenth(at), cy: y(estimate), r: 5, ...filled('treated') }),
  ]
}
