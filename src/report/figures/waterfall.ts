/** What each rule leaves: of the rows, from reading to the estimate, and of the border. */
import { max } from 'd3-array'
import { scaleLinear } from 'd3-scale'
import { capital } from '../lineTable.js'
import { count, significant } from '../numbers.js'
import type { View } from '../view.js'
import { tenth } from './axes.js'
import { type Figure, figureOf } from './figure.js'
import { element, filled, stroked, textAt, textWidth, wrapText } from './svg.js'

const width = 720
const labelWidth = 250
const barHeight = 15

interface Bar {
  readonly label: string
  readonly left: number
  readonly lost: number
  readonly says: string
}

/** From rows read to units used. */
export function ledgerFigure(view: View): Figure | undefined {
  const { ledger, placement } = view.results
  if (ledger.length === 0) return undefined
  const bars = ledger.map((step): Bar => {
    const lost = step.in - step.out
    return {
      label: step.step.includes(':') ? step.step : capital(step.step),
      left: step.out,
      lost,
      says: lost > 0 ? `${count(step.out)} (${count(lost)} set aside)` : count(step.out),
    }
  })
  return figureOf({
    name: 'ledger',
    width,
    title: `Of ${count(placement.read)} rows read ${count(placement.placed)} are placed against a line`,
    lines: ['Filled: what is left after a step. Hollow: what the step sets aside.'],
    description: `${ledger.length} steps from ${count(placement.read)} rows read to the units within each outcome’s bandwidth.`,
    caption:
      'From rows read to units used: what each step leaves (filled) and sets aside (hollow). The ledger gives the reasons.',
    data: {
      columns: ['step', 'in', 'out', 'set_aside'],
      rows: ledger.map((step) => [step.step, step.in, step.out, step.in - step.out]),
    },
    draw: (top) => {
      const drawn = drawBars(bars, top + 16, width)
      return { marks: drawn.marks, end: drawn.end }
    },
  })
}

/** Rule by rule, kilometres of border and units left; nothing for scores. */
export function waterfallFigure(view: View): Figure | undefined {
  const steps = view.results.border?.waterfall ?? []
  if (steps.length === 0) return undefined
  const [first, last] = [steps[0], steps[steps.length - 1]]
  const barsOf = (key: 'km' | 'units', format: (value: number) => string) =>
    steps.map((step, i): Bar => {
      const lost = i === 0 ? 0 : steps[i - 1][key] - step[key]
      return { label: capital(step.rule), left: step[key], lost: Math.max(0, lost), says: format(step[key]) }
    })
  const title =
    steps.length === 1
      ? `No rule sets border aside: ${significant(first.km)} km and ${count(first.units)} units are in use`
      : `The rules leave ${significant(last.km)} of ${significant(first.km)} km of border and ${count(last.units)} of ${count(first.units)} units`
  return figureOf({
    name: 'waterfall',
    width,
    title,
    lines: ['Filled: what is left after a rule. Hollow: what the rule took.'],
    description: `${title}, in ${steps.length} steps.`,
    caption: `What the rules leave of the border and of the units that would be placed on it, rule by rule in the order in which they apply: ${steps.map(({ rule }) => rule).join(', ')}.`,
    data: {
      columns: ['rule', 'pieces', 'km', 'pairs', 'units'],
      rows: steps.map((step) => [step.rule, step.pieces, step.km, step.pairs, step.units]),
    },
    draw: (top) => {
      const heads = (words: string, y: number) => textAt(0, y, words, { weight: 'bold' })
      const km = drawBars(
        barsOf('km', (value) => `${significant(value)} km`),
        top + 32,
        width,
      )
      const units = drawBars(barsOf('units', count), km.end + 30, width)
      return {
        marks: [heads('Border, km', top + 22), ...km.marks, heads('Units placed', km.end + 20), ...units.marks],
        end: units.end,
      }
    },
  })
}

function drawBars(bars: readonly Bar[], from: number, right: number): { marks: string[]; end: number } {
  const says = max(bars, (bar) => textWidth(bar.says, 12)) ?? 0
  const most = max(bars, (bar) => bar.left + bar.lost) ?? 1
  const x = scaleLinear([0, most || 1], [labelWidth + 10, right - says - 10])
  const marks: string[] = []
  let y = from
  for (const bar of bars) {
    const lines = wrapText(bar.label, labelWidth, 12)
    const height = Math.max(lines.length * 15 + 6, barHeight + 8)
    const middle = y + height / 2
    lines.forEach((line, i) => {
      marks.push(textAt(0, middle + 4 + (i - (lines.length - 1) / 2) * 15, line))
    })
    const [left, end, all] = [x(0), x(bar.left), x(bar.left + bar.lost)]
    marks.push(
      element('rect', {
        x: left,
        y: middle - barHeight / 2,
        width: Math.max(0, end - left),
        height: barHeight,
        ...filled('untreated'),
      }),
    )
    if (all - end > 0.5)
      marks.push(
        element('rect', {
          x: tenth(end),
          y: middle - barHeight / 2 + 0.5,
          width: all - end,
          height: barHeight - 1,
          ...stroked('untreated', 1),
          'stroke-dasharray': '3 2',
        }),
      )
    marks.push(textAt(Math.max(all, end) + 8, middle + 4, bar.says))
    y += height
  }
  return { marks, end: y + 6 }
}
