/** The pooled estimate at narrower and wider bandwidths, on one axis of bandwidths in the study's unit. */
import { extent } from 'd3-array'
import { scaleLinear } from 'd3-scale'
import type { BySide, Jump } from '../../results.js'
import { openCount } from '../csv.js'
import { ladderPlaces, ownRung, type RungMade } from '../ladderTable.js'
import { cell, fixed, significant } from '../numbers.js'
import { isEstimated, type OutcomeView, reasonText, type View, widthText } from '../view.js'
import { baseLine, leftAxis, type Plane, roomForNumbers, tenth, upright } from './axes.js'
import { type Figure, type FigureData, figureOf } from './figure.js'
import { excludesZero } from './findings.js'
import { element, filled, hollow, stroked, textAt } from './svg.js'

type Step = { readonly scale: number } & RungMade

const width = 720
const plotHeight = 260

/** Nothing where no checks were run or no other bandwidth gives an estimate. */
export function bandwidthFigure(view: View, outcome: OutcomeView): Figure | undefined {
  const { ladders, pooled } = outcome.result
  if (!ladders || !isEstimated<Jump>(pooled)) return undefined
  const own = { scale: 1, ...ownRung(pooled) }
  const others = ladders.bandwidth.filter((rung): rung is Step => !('not_estimated' in rung))
  if (others.length === 0) return undefined
  const steps = [...others, own].sort((a, b) => a.scale - b.scale)
  const places = ladderPlaces(outcome)
  const [low = 0, high = 0] = extent(steps, ({ estimate }) => estimate)
  const lost = ladders.bandwidth.filter((rung) => 'not_estimated' in rung)
  const range = `from ${fixed(low, places)} to ${fixed(high, places)}`
  const clear = steps.filter(excludesZero).length
  const span = `${significant(steps[0].scale)} to ${significant(steps[steps.length - 1].scale)} times the bandwidth`
  return figureOf({
    name: `${outcome.slug}-bandwidth`,
    width,
    title: `Over ${span} the jump in ${outcome.result.outcome} runs ${range}; ${clear === steps.length ? 'every' : clear === 0 ? 'no' : `${clear} of ${steps.length}`} interval${clear > 0 && clear < steps.length ? 's' : ''} exclude${clear > 0 && clear < steps.length ? '' : 's'} zero`,
    lines: [
      `Filled: the study’s own bandwidth, ${widthText(view, pooled.bandwidth)}; its estimate is dashed across. Bars: ${view.words.level} intervals. Below: times the bandwidth, and N on both sides together.`,
    ],
    description: `Pooled corrected estimates of the jump in ${outcome.result.outcome} at ${steps.length} bandwidths, ${range}.`,
    caption: `The pooled jump in ${outcome.result.outcome} made again at narrower and wider bandwidths, the bias bandwidth scaled with it; corrected estimates with ${view.words.level} intervals. The estimates share units, so they are not independent.${lost.map((rung) => ` At ${rung.scale} times there is none: ${'not_estimated' in rung ? reasonText(view, rung.not_estimated) : ''}.`).join('')}`,
    data: dataOf(view, steps),
    draw: (top) => {
      const plane = planeOf(steps, top + 14)
      const bottom = top + 14 + plotHeight
      const isUneven = pooled.bandwidth.untreated !== pooled.bandwidth.treated
      const unit = view.exhibits.isBorder
        ? `Bandwidth in ${view.exhibits.xUnit}`
        : `Bandwidth in units of ${view.exhibits.xUnit}`
      const title = `${unit}${isUneven ? ', mean of both sides' : ''}; times the study’s own; N`
      return {
        marks: [
          ...leftAxis(plane, `Jump in ${outcome.result.outcome}`),
          ...guides(plane, own.estimate),
          ...steps.flatMap((step) => stepMarks(view, step, plane, bottom)),
          textAt(width / 2, bottom + 68, title, { anchor: 'middle' }),
        ],
        end: bottom + 78,
      }
    },
  })
}

const widthOf = ({ untreated, treated }: BySide) => (untreated + treated) / 2

function planeOf(steps: readonly Step[], top: number): Plane {
  const [low, high] = extent(steps.flatMap((step) => [step.low, step.high, 0])) as [number, number]
  const pad = 0.06 * (high - low || 1)
  const y = scaleLinear([low - pad, high + pad], [top + plotHeight, top])
  const [narrowest, widest] = extent(steps, ({ bandwidth }) => widthOf(bandwidth)) as [number, number]
  const room = 0.07 * (widest - narrowest)
  return { x: scaleLinear([narrowest - room, widest + room], [roomForNumbers(y), width - 12]), y }
}

function guides({ x, y }: Plane, own: number): string[] {
  const [left, right] = x.range()
  const across = (at: number) => `M${tenth(left)} ${tenth(y(at))}H${tenth(right)}`
  return [
    element('path', { d: across(0), ...stroked('ink', 1.2) }),
    element('path', { d: across(own), ...stroked('muted', 1.2), 'stroke-dasharray': '5 4' }),
    baseLine(left, right, y.range()[0]),
  ]
}

function stepMarks(view: View, step: Step, { x, y }: Plane, bottom: number): string[] {
  const at = x(widthOf(step.bandwidth))
  const isOwn = step.scale === 1
  const units = step.units.untreated + step.units.treated
  return [
    element('path', { d: upright(at, y(step.low), y(step.high)), ...stroked('ink', isOwn ? 2.4 : 1.4) }),
    element('circle', { cx: tenth(at), cy: y(step.estimate), r: 5, ...(isOwn ? filled('ink') : hollow('ink', 1.8)) }),
    element('path', { d: `M${tenth(at)} ${tenth(bottom)}v5`, ...stroked('ink', 1) }),
    ...[significant(widthOf(step.bandwidth)), `× ${significant(step.scale)}`, cell(units, view.smallestCell)].map(
      (text, row) =>
        textAt(at, bottom + 18 + 15 * row, text, { anchor: 'middle', size: 11, color: row === 0 ? 'ink' : 'muted' }),
    ),
  ]
}

function dataOf(view: View, steps: readonly Step[]): FigureData {
  return {
    columns: [
      'scale',
      'bandwidth_untreated',
      'bandwidth_treated',
      'estimate',
      'standard_error',
      'low',
      'high',
      'p',
      'units_untreated',
      'units_treated',
    ],
    rows: steps.map((step) => [
      step.scale,
      step.bandwidth.untreated,
      step.bandwidth.treated,
      step.estimate,
      step.standard_error,
      step.low,
      step.high,
      step.p,
      openCount(view, step.units.untreated),
      openCount(view, step.units.treated),
    ]),
  }
}
