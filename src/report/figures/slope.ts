/** Effects against the height of their cutoffs, with the line fitted through them. */
import { extent, quantile } from 'd3-array'
import { scaleLinear } from 'd3-scale'
import type { Comparison, Jump } from '../../results.js'
import { intervalText } from '../lineTable.js'
import { fixed, pWords, sharedPlaces, significant } from '../numbers.js'
import { estimatedLines, howMany, type OutcomeView, type View } from '../view.js'
import { bottomAxis, fitRight, leftAxis, type Plane, roomForNumbers, tenth, upright } from './axes.js'
import { type Figure, figureOf } from './figure.js'
import { excludesZero } from './findings.js'
import { effectWords } from './forest.js'
import { element, filled, stroked } from './svg.js'

type Slope = Extract<NonNullable<Comparison['slope']>, { readonly estimate: number }>
type Line = Jump & { readonly line: string; readonly cutoff: number }

const width = 720
const plotHeight = 280

/** Nothing where effects are not related to the cutoff. */
export function slopeFigure(view: View, outcome: OutcomeView): Figure | undefined {
  const slope = outcome.result.comparison?.slope
  if (!slope || 'not_estimated' in slope || slope.attribute !== 'cutoff') return undefined
  const lines = estimatedLines(outcome.result).flatMap((line): Line[] => {
    const cutoff = view.lineOf.get(line.line)?.cutoff
    return cutoff === undefined ? [] : [{ ...line, cutoff }]
  })
  if (lines.length < 3) return undefined
  const { outcome: name } = outcome.result
  const places = sharedPlaces([slope.standard_error], [slope.estimate])
  const numbers = `${fixed(slope.estimate, places)} per unit of the cutoff (${view.words.level} interval ${intervalText(slope, places)}, ${pWords(slope.p)})`
  return figureOf({
    name: `${outcome.slug}-slope`,
    width,
    title: excludesZero(slope)
      ? `Effects on ${name} ${slope.estimate > 0 ? 'rise' : 'fall'} with the cutoff: ${numbers}`
      : `Effects on ${name} show no clear trend in the cutoff: ${numbers}`,
    lines: [
      `Dots: corrected estimates with ${view.words.level} intervals, cut at the edge. Dashed: the line fitted through them.`,
    ],
    description: `Effects at ${howMany(view, lines.length)} against their cutoffs. Slope ${numbers}.`,
    caption: `Effects on ${name} at ${howMany(view, lines.length)} against the cutoff itself, and the line fitted through them, true effects varying around it (τ² = ${significant(slope.tau_squared)}). Cutoffs differ in more than their height: the slope is no effect of raising one.`,
    data: {
      columns: ['line', 'cutoff', 'estimate', 'low', 'high'],
      rows: [
        ...lines.map((line) => [
          line.line,
          line.cutoff,
          line.corrected.estimate,
          line.corrected.low,
          line.corrected.high,
        ]),
        ['slope', null, slope.estimate, slope.low, slope.high],
        ['intercept', null, slope.intercept, null, null],
      ],
    },
    draw: (top) => {
      const plane = planeOf(lines, slope, top + 14)
      const [bottom] = plane.y.range()
      const [left, right] = plane.x.range()
      const zero = `M${tenth(left)} ${tenth(plane.y(0))}H${tenth(right)}`
      return {
        marks: [
          ...leftAxis(plane, effectWords(outcome)),
          ...bottomAxis(plane.x, bottom, 'Cutoff, in units of the score'),
          element('path', { d: zero, ...stroked('ink', 1.2) }),
          trendMark(lines, slope, plane),
          ...lines.flatMap((line) => pointMarks(line, plane)),
        ],
        end: bottom + 48,
      }
    },
  })
}

const at = (slope: Slope, cutoff: number) => slope.intercept + slope.estimate * cutoff

/** Every estimate and the fitted line are inside; the widest tenth of the intervals may run on. */
function planeOf(lines: readonly Line[], slope: Slope, top: number): Plane {
  const [first, last] = extent(lines, ({ cutoff }) => cutoff) as [number, number]
  const [low, high] = extent(
    [
      quantile(lines, 0.1, ({ corrected }) => corrected.low),
      quantile(lines, 0.9, ({ corrected }) => corrected.high),
      ...lines.map(({ corrected }) => corrected.estimate),
      at(slope, first),
      at(slope, last),
      0,
    ].filter((value) => value !== undefined && Number.isFinite(value)) as number[],
  ) as [number, number]
  const pad = 0.06 * (high - low || 1)
  const y = scaleLinear([low - pad, high + pad], [top + plotHeight, top]).clamp(true)
  const room = 0.04 * (last - first || 1)
  return { x: fitRight(scaleLinear().domain([first - room, last + room]), roomForNumbers(y), width), y }
}

function trendMark(lines: readonly Line[], slope: Slope, { x, y }: Plane): string {
  const [first, last] = extent(lines, ({ cutoff }) => cutoff) as [number, number]
  const d = `M${tenth(x(first))} ${tenth(y(at(slope, first)))}L${tenth(x(last))} ${tenth(y(at(slope, last)))}`
  return element('path', { d, ...stroked('treated', 2), 'stroke-dasharray': '8 4' })
}

function pointMarks({ cutoff, corrected }: Line, { x, y }: Plane): string[] {
  const { estimate, low, high } = corrected
  if (!Number.isFinite(estimate)) return []
  const bar = Number.isFinite(low) && Number.isFinite(high)
  return [
    ...(bar ? [element('path', { d: upright(x(cutoff), y(low), y(high)), ...stroked('muted', 1) })] : []),
    element('circle', { cx: tenth(x(cutoff)), cy: y(estimate), r: 3.6, ...filled('ink') }),
  ]
}
