/** The real effect among effects where there should be none: lines that are none, and borders that change nothing. */
import { extent } from 'd3-array'
import { scaleLinear } from 'd3-scale'
import type { Jump } from '../../results.js'
import { openCount } from '../csv.js'
import { ladderPlaces, ownRung, type RungMade } from '../ladderTable.js'
import { fixed, pWords, sharedPlaces } from '../numbers.js'
import { isEstimated, type OutcomeView, reasonText, type View } from '../view.js'
import { bottomAxis, fitRight, leftAxis, type Plane, roomForNumbers, tenth, upright } from './axes.js'
import { type Figure, figureOf } from './figure.js'
import { excludesZero, type Point } from './findings.js'
import { drawRows, type Row, type RowsLayout, rowAxis, rowScale } from './rows.js'
import { element, filled, hollow, stroked, textAt, textWidth } from './svg.js'

const width = 720
const plotHeight = 260

type PlaceboLine = Point & {
  readonly at: number
  readonly side: string
  readonly standard_error: number
  readonly p: number
  readonly units: number
}

/** Estimates at lines that are none, by their place; nothing where there are none. */
export function placeboLinesFigure(view: View, outcome: OutcomeView): Figure | undefined {
  const { pooled } = outcome.result
  if (!isEstimated<Jump>(pooled)) return undefined
  const { made: lines, lost } = placeboLinesOf(outcome)
  if (lines.length === 0) return undefined
  const own: PlaceboLine = { at: 0, side: 'the line', ...withUnits(ownRung(pooled)) }
  const clear = lines.filter(excludesZero).length
  const places = ladderPlaces(outcome)
  const seen = clear === 0 ? 'no interval' : clear === 1 ? '1 interval' : `${clear} intervals`
  const { outcome: name } = outcome.result
  return figureOf({
    name: `${outcome.slug}-placebo-lines`,
    width,
    title: `Of ${lines.length} lines that are none ${seen} exclude${clear > 1 ? '' : 's'} zero for ${name}; at the real one the jump is ${fixed(own.estimate, places)}`,
    lines: [
      `Filled: the real line. Hollow: lines drawn inside one side, from its units alone. Bars: ${view.words.level} intervals.`,
    ],
    description: `Estimates of the jump in ${name} at ${lines.length} lines that are none and at the real one, by their distance from it.`,
    caption: `The pooled jump in ${name} at the real line (filled, at 0) and at lines that are none, ${view.words.isBorder ? 'the border shifted into either side' : 'drawn a quarter, half and three quarters into the units of each side'}, estimated from the units of that side alone at bandwidths of their own. Nothing should jump there. Corrected estimates with ${view.words.level} intervals.${lost.map((rung) => ` On the ${rung.side} side one has no estimate: ${reasonText(view, rung.reason)}.`).join('')}`,
    data: {
      columns: ['at', 'side', 'estimate', 'standard_error', 'low', 'high', 'p', 'units'],
      rows: [own, ...lines].map((one) => [
        one.at,
        one.side,
        one.estimate,
        one.standard_error,
        one.low,
        one.high,
        one.p,
        openCount(view, one.units),
      ]),
    },
    draw: (top) => {
      const all = [own, ...lines]
      const plane = planeOf(all, top + 14)
      const bottom = top + 14 + plotHeight
      const [left, right] = plane.x.range()
      return {
        marks: [
          ...leftAxis(plane, `Jump in ${name}`),
          ...bottomAxis(
            plane.x,
            bottom,
            `Place of the line: ${view.words.axis.charAt(0).toLowerCase()}${view.words.axis.slice(1)}`,
          ),
          element('path', { d: `M${tenth(left)} ${tenth(plane.y(0))}H${tenth(right)}`, ...stroked('ink', 1.2) }),
          ...all.flatMap((one) => pointMarks(one, plane)),
        ],
        end: bottom + 48,
      }
    },
  })
}

/** Lines drawn through the scores of one side, or shifted into one side of the border; and why others have no estimate. */
function placeboLinesOf({ result: { ladders, shifted_lines: shifted } }: OutcomeView) {
  const rungs = ladders?.placebo_lines ?? []
  return {
    made: [
      ...rungs.flatMap((rung): PlaceboLine[] => ('not_estimated' in rung ? [] : [{ ...rung, ...withUnits(rung) }])),
      ...(shifted?.shifted ?? []),
    ],
    lost: [
      ...rungs.flatMap(({ side, ...rung }) => ('not_estimated' in rung ? [{ side, reason: rung.not_estimated }] : [])),
      ...(shifted?.not_estimated ?? []),
    ],
  }
}

function withUnits(rung: RungMade) {
  return { ...rung, units: rung.units.untreated + rung.units.treated }
}

function planeOf(
  all: readonly { readonly at: number; readonly low: number; readonly high: number }[],
  top: number,
): Plane {
  const [low, high] = extent(all.flatMap((one) => [one.low, one.high, 0])) as [number, number]
  const pad = 0.06 * (high - low || 1)
  const y = scaleLinear([low - pad, high + pad], [top + plotHeight, top])
  const [first, last] = extent(all, ({ at }) => at) as [number, number]
  const room = 0.06 * (last - first || 1)
  return { x: fitRight(scaleLinear().domain([first - room, last + room]), roomForNumbers(y), width), y }
}

function pointMarks(
  { at, estimate, low, high }: { at: number; estimate: number; low: number; high: number },
  { x, y }: Plane,
): string[] {
  const isOwn = at === 0
  return [
    element('path', { d: upright(x(at), y(low), y(high)), ...stroked(isOwn ? 'treated' : 'ink', isOwn ? 2.6 : 1.4) }),
    element('circle', { cx: tenth(x(at)), cy: y(estimate), r: 5, ...(isOwn ? filled('treated') : hollow('ink', 1.8)) }),
  ]
}

/** Named below this many. */
const mostNamed = 60
const tallest = 700

/** The real effect and those of borders that change nothing, by size against their error; nothing where there are none. */
export function placeboBordersFigure(view: View, outcome: OutcomeView): Figure | undefined {
  const { placebo_borders: found, pooled } = outcome.result
  if (!found || found.placebos.length === 0 || !isEstimated<Jump>(pooled)) return undefined
  const real = ownRung(pooled)
  const places = sharedPlaces(
    found.placebos.map((effect) => effect.standard_error),
    found.placebos.map(({ estimate }) => estimate),
  )
  const size = (one: { readonly estimate: number; readonly standard_error: number }) =>
    Math.abs(one.estimate / one.standard_error)
  const sorted = [
    ...found.placebos.map((effect) => ({ ...effect, pair: effect.pair.join(' | ') })),
    { ...real, pair: 'The real borders', units: real.units.untreated + real.units.treated },
  ].sort((a, b) => size(b) - size(a))
  const isNamed = sorted.length <= mostNamed
  const rows = sorted.map(
    (one): Row => ({ label: one.pair, mark: one.pair === 'The real borders' ? 'pooled' : 'line', estimate: one }),
  )
  const named: RowsLayout = { width, labelWidth: 210, places }
  const layout = isNamed ? named : { ...named, bare: Math.min(3, tallest / sorted.length) }
  const { outcome: name } = outcome.result
  const place =
    found.rank === undefined || found.of === undefined
      ? `The effect on ${name} stands beside ${found.placebos.length} borders that change nothing, too few for a rank`
      : `Among ${found.of - 1} borders that change nothing the real effect on ${name} ranks ${found.rank} of ${found.of} by size against its error (${pWords(found.p)})`
  return figureOf({
    name: `${outcome.slug}-placebo-borders`,
    width,
    title: place,
    lines: [
      `Diamond: the real borders, pooled. Squares: borders between zones of equal status. Largest |t| first. Bars: ${view.words.level} intervals.`,
    ],
    description: `Effects on ${name} at ${found.placebos.length} borders between zones of equal status and the real one. ${place}.`,
    caption: `Effects on ${name} at borders between two zones of equal status, where nothing changes, estimated by the study’s own options, and the pooled real effect (diamond). Which of two such zones counts as treated is arbitrary: read sizes, not signs.${found.not_estimated.length > 0 ? ` ${found.not_estimated.length} more borders could not be estimated.` : ''}`,
    data: {
      columns: ['border', 'estimate', 'standard_error', 'low', 'high', 'p', 'units'],
      rows: sorted.map((one) => [
        one.pair,
        one.estimate,
        one.standard_error,
        one.low,
        one.high,
        one.p,
        openCount(view, one.units),
      ]),
    },
    draw: (top) => {
      const x = rowScale(rows, named)
      const drawn = drawRows(rows, x, layout, top + 14)
      const axis = rowAxis(x, top + 14, drawn.end, `Effect on ${name}`, width)
      const at = rows.findIndex(({ mark }) => mark === 'pooled')
      const label = isNamed ? [] : realLabel(top + 14 + (at + 0.5) * (layout.bare as number))
      return { marks: [...axis.marks, ...drawn.marks, ...label], end: axis.end }
    },
  })
}

function realLabel(y: number): string[] {
  const words = 'The real borders'
  return [
    textAt(0, y + 4, words, { weight: 'bold' }),
    element('path', { d: `M${tenth(textWidth(words, 13) + 8)} ${tenth(y)}H214`, ...stroked('muted', 1) }),
  ]
}
