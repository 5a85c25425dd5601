/** Every line at the chosen bandwidth, or at the nearest of its own, above the pooled estimate. */
import { ticks } from 'd3-array'
import { drawing, element, filled, hollow, stroked, textAt, textWidth } from '../figures/svg.js'
import { fixed, type Places, significant } from '../numbers.js'
import type { Shown } from './model.js'

export interface ForestRow {
  readonly label: string
  readonly shown: Shown | undefined
}

export interface Forest {
  readonly rows: readonly ForestRow[]
  readonly pooled: Shown | undefined
  readonly outcome: string
  readonly lines: string
  readonly levelWords: string
  readonly unit: string
  readonly places: Places
}

const width = 620
const step = 18
const labelWidth = 180

export function forestFigure(forest: Forest): string {
  const { rows, pooled, outcome, lines, levelWords, places } = forest
  const all = [...rows, ...(pooled ? [{ label: 'pooled', shown: pooled }] : [])]
  const made = rows.flatMap(({ shown }) => (shown ? [shown] : []))
  const [low, high] = rangeOf(all)
  const labels = Math.min(labelWidth, Math.max(...all.map(({ label }) => textWidth(label, 12))) + 12)
  const x = (value: number) =>
    labels + ((Math.min(Math.max(value, low), high) - low) / (high - low)) * (width - labels - 14)
  const bottom = 16 + all.length * step
  const body = [
    ...ticks(low, high, 6).flatMap((value) => [
      element('path', { d: `M${x(value).toFixed(1)} 8V${bottom}`, ...stroked(value === 0 ? 'ink' : 'grid', 1) }),
      textAt(x(value), bottom + 16, significant(value), { anchor: 'middle', color: 'muted' }),
    ]),
    ...all.flatMap((row, i) => rowMarks(row, 8 + step * (i + 0.5), x, labels)),
    textAt((labels + width) / 2, bottom + 34, `Jump in ${outcome}`, { anchor: 'middle' }),
  ]
  const excluding = made.filter(({ corrected }) => corrected.low > 0 || corrected.high < 0).length
  const estimates = made.map(({ corrected }) => corrected.estimate)
  const range =
    made.length > 0 ? `, from ${fixed(Math.min(...estimates), places)} to ${fixed(Math.max(...estimates), places)}` : ''
  return drawing({
    id: 'what-if-forest',
    width,
    height: bottom + 42,
    title: `${outcome}: ${lines} at this choice`,
    description: `${made.length} of ${rows.length} ${lines} have an estimate here${range}; the ${levelWords} interval of ${excluding} excludes zero (filled).`,
    body,
  })
}

/** Where nine in ten of the intervals lie, and zero: a few wild lines do not squeeze the rest. */
function rangeOf(rows: readonly ForestRow[]): readonly [number, number] {
  const shown = rows.flatMap((row) => (row.shown ? [row.shown.corrected] : []))
  const sorted = (values: number[]) => values.sort((a, b) => a - b)
  const lows = sorted(shown.map(({ low }) => low))
  const highs = sorted(shown.map(({ high }) => high))
  const low = Math.min(0, lows[Math.floor(0.05 * lows.length)] ?? 0)
  const high = Math.max(0, highs[Math.ceil(0.95 * highs.length) - 1] ?? 0)
  return high > low ? [low, high] : [-1, 1]
}

function rowMarks({ label, shown }: ForestRow, y: number, x: (value: number) => number, labels: number): string[] {
  const most = Math.floor(labels / 7)
  const short = textWidth(label, 12) > labels - 8 ? `${label.slice(0, most)}…` : label
  const name = textAt(0, y + 4, short, {
    color: shown ? 'ink' : 'muted',
    weight: label === 'pooled' ? 'bold' : undefined,
  })
  if (!shown) return [name, textAt(labels, y + 4, 'not made again here', { size: 11, color: 'muted' })]
  const { estimate, low, high } = shown.corrected
  const isClear = low > 0 || high < 0
  return [
    name,
    element('path', { d: `M${x(low).toFixed(1)} ${y}H${x(high).toFixed(1)}`, ...stroked('ink', 1.4) }),
    element('circle', { cx: x(estimate), cy: y, r: 3.6, ...(isClear ? filled('ink') : hollow('ink', 1.6)) }),
  ]
}
