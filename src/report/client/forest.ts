/**
 * Every line at the chosen bandwidth, or at the nearest of its own, above the pooled estimate. The drawing is made once for
 * an outcome; a step of the slider moves its marks, so that hundreds of lines follow without delay.
 */
import { ticks } from 'd3-array'
import { drawing, element, hollow, ink, stroked, textAt, textWidth } from '../figures/svg.js'
import { fixed, type Places, significant } from '../numbers.js'
import type { Shown } from './model.js'

export interface ForestRow {
  readonly label: string
  readonly shown: Shown | undefined
}

export interface Forest {
  /** The pooled estimate last. */
  readonly rows: readonly ForestRow[]
  readonly outcome: string
  readonly lines: string
  readonly levelWords: string
  readonly places: Places
}

const width = 620
const step = 18
const labelWidth = 180

type Scale = (value: number) => number

/** Draws into the box, whose drawing it keeps. */
export function forestIn(box: HTMLElement): (forest: Forest) => void {
  let drawn = ''
  return (forest) => {
    const key = JSON.stringify([forest.outcome, forest.rows.map(({ label }) => label)])
    if (key !== drawn) box.innerHTML = skeleton(forest)
    drawn = key
    const [low, high] = rangeOf(forest.rows)
    const left = labelsOf(forest.rows)
    const inside = (value: number) => Math.min(Math.max(value, low), high)
    const x = (value: number) => left + ((inside(value) - low) / (high - low)) * (width - left - 14)
    const find = (name: string) => box.querySelector(`.${name}`) as Element
    find('ticks').innerHTML = tickMarks(forest.rows.length, ticks(low, high, 6), x)
    for (const [i, mark] of [...box.querySelectorAll('.row')].entries()) moveRow(mark, forest.rows[i], x)
    ;(box.querySelector('desc') as Element).textContent = described(forest)
  }
}

const bottomOf = (rows: number) => 16 + rows * step

function labelsOf(rows: readonly ForestRow[]): number {
  return Math.min(labelWidth, Math.max(...rows.map(({ label }) => textWidth(label, 12))) + 12)
}

function skeleton({ rows, outcome, lines }: Forest): string {
  const left = labelsOf(rows)
  const bottom = bottomOf(rows.length)
  const marks = rows.map(({ label }, i) => {
    const y = 8 + step * (i + 0.5)
    const short = textWidth(label, 12) > left - 8 ? `${label.slice(0, Math.floor(left / 7))}…` : label
    const isLast = i === rows.length - 1
    return element(
      'g',
      { class: 'row' },
      textAt(0, y + 4, short, { weight: isLast ? 'bold' : undefined }),
      textAt(left, y + 4, 'not made again here', { size: 11, color: 'muted' }),
      element('path', { transform: `translate(0 ${y})`, ...stroked('ink', 1.4) }),
      element('circle', { cy: y, r: 3.6, ...hollow('ink', 1.6) }),
    )
  })
  const body = [
    element('g', { class: 'ticks' }, ''),
    ...marks,
    textAt((left + width) / 2, bottom + 34, `Jump in ${outcome}`, { anchor: 'middle' }),
  ]
  const title = `${outcome}: ${lines} at this choice`
  return drawing({ id: 'what-if-forest', width, height: bottom + 42, title, description: '', body })
}

function tickMarks(rows: number, values: readonly number[], x: Scale): string {
  const bottom = bottomOf(rows)
  return values
    .flatMap((value) => [
      element('path', { d: `M${x(value).toFixed(1)} 8V${bottom}`, ...stroked(value === 0 ? 'ink' : 'grid', 1) }),
      textAt(x(value), bottom + 16, significant(value), { anchor: 'middle', color: 'muted' }),
    ])
    .join('')
}

function moveRow(mark: Element, { shown }: ForestRow, x: Scale): void {
  const [, none, bar, dot] = mark.children
  set(none, 'visibility', shown ? 'hidden' : 'visible')
  for (const one of [bar, dot]) set(one, 'visibility', shown ? 'visible' : 'hidden')
  if (!shown) return
  const { estimate, low, high } = shown.corrected
  set(bar, 'd', `M${x(low).toFixed(1)} 0H${x(high).toFixed(1)}`)
  set(dot, 'cx', x(estimate).toFixed(1))
  const color = low > 0 || high < 0 ? 'ink' : 'paper'
  set(dot, 'class', `f-${color} s-ink`)
  set(dot, 'fill', ink[color])
}

function set(element: Element, key: string, value: string): void {
  if (element.getAttribute(key) !== value) element.setAttribute(key, value)
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

function described({ rows, lines, levelWords, places }: Forest): string {
  const single = rows.slice(0, -1)
  const made = single.flatMap(({ shown }) => (shown ? [shown.corrected] : []))
  const excluding = made.filter(({ low, high }) => low > 0 || high < 0).length
  const estimates = made.map(({ estimate }) => estimate)
  const range =
    made.length > 0 ? `, from ${fixed(Math.min(...estimates), places)} to ${fixed(Math.max(...estimates), places)}` : ''
  return `${made.length} of ${single.length} ${lines} have an estimate here${range}; the ${levelWords} interval of ${excluding} excludes zero (filled).`
}
