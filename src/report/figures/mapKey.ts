/** Below the map: what the colours and strokes mean, a scale bar in the study's own system, and north. */
import { range } from 'd3-array'
import { fixed, type Places, wholeNumber } from '../numbers.js'
import type { ColorScale } from './map.js'
import { element, filled, stroked, textAt, textWidth } from './svg.js'

export interface KeyItem {
  readonly label: string
  /** Marks of a swatch 26 wide and 14 high, its corner at x, y. */
  readonly swatch: (x: number, y: number) => string
}

/** Items in rows, each as wide as it needs; returns the marks and where they end. */
export function keyRows(items: readonly KeyItem[], width: number, top: number): { marks: string[]; end: number } {
  const marks: string[] = []
  let [x, y] = [0, top]
  for (const item of items) {
    const wide = 34 + textWidth(item.label, 12) + 18
    if (x > 0 && x + wide > width) {
      x = 0
      y += 22
    }
    marks.push(item.swatch(x, y), textAt(x + 33, y + 11, item.label))
    x += wide
  }
  return { marks, end: y + 22 }
}

const barWidth = 260

/** The colour bar with its ends and, where it lies between them, zero. */
export function colorKey(scale: ColorScale, title: string, places: Places, top: number): string[] {
  const cells = 52
  const at = (value: number) => ((value - scale.low) / (scale.high - scale.low)) * barWidth
  const ends: [number, string, 'start' | 'end'][] = [
    [0, `${scale.isCutLow ? '≤ ' : ''}${fixed(scale.low, places)}`, 'start'],
    [barWidth, `${scale.isCutHigh ? '≥ ' : ''}${fixed(scale.high, places)}`, 'end'],
  ]
  const zero = at(0)
  const endWidth = Math.max(...ends.map(([, text]) => textWidth(text, 12)))
  return [
    textAt(0, top + 12, title, { weight: 'bold' }),
    ...range(cells).map((index) =>
      element('rect', {
        x: (index / cells) * barWidth,
        y: top + 20,
        width: barWidth / cells + 0.5,
        height: 12,
        fill: scale.color(scale.low + ((index + 0.5) / cells) * (scale.high - scale.low)),
      }),
    ),
    element('rect', { x: 0, y: top + 20, width: barWidth, height: 12, ...stroked('ink', 1) }),
    ...ends.map(([x, text, anchor]) => textAt(x, top + 47, text, { anchor })),
    ...(zero > 0 && zero < barWidth
      ? [element('path', { d: `M${zero.toFixed(2)} ${top + 16}v20`, ...stroked('ink', 2) })]
      : []),
    ...(zero > endWidth + 12 && zero < barWidth - endWidth - 12
      ? [textAt(zero, top + 47, '0', { anchor: 'middle' })]
      : []),
  ]
}

const metresPerMile = 1609.344
const metresPerFoot = 0.3048

/** A bar of a round length no longer than 150 pixels; xUnit settles kilometres or miles. */
export function scaleBar(metresPerPixel: number, xUnit: string, right: number, top: number): string[] {
  const isImperial = xUnit === 'ft' || xUnit === 'mi'
  const longest = 150 * metresPerPixel
  const large = isImperial ? metresPerMile : 1000
  const small = isImperial ? metresPerFoot : 1
  const [unit, name] = longest >= large ? [large, isImperial ? 'mi' : 'km'] : [small, isImperial ? 'ft' : 'm']
  const length = roundDown(longest / unit)
  const wide = (length * unit) / metresPerPixel
  const left = right - wide
  return [
    textAt(right, top + 12, `${wholeNumber(length)} ${name}`, { anchor: 'end' }),
    element('path', { d: `M${left.toFixed(2)} ${top + 20}v8H${right.toFixed(2)}v-8`, ...stroked('ink', 1.5) }),
  ]
}

/** 1, 2 or 5 times a power of ten, at most the value. */
function roundDown(value: number): number {
  const power = 10 ** Math.floor(Math.log10(value))
  const lead = [5, 2, 1].find((step) => step * power <= value * (1 + 1e-12)) ?? 1
  return Number((lead * power).toPrecision(1))
}

export function northArrow(x: number, top: number): string[] {
  return [
    element('path', { d: `M${x} ${top}l6 18l-6 -4l-6 4Z`, ...filled('ink') }),
    textAt(x, top + 32, 'N', { anchor: 'middle', size: 11 }),
  ]
}
