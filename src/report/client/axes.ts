/** The frame of a plot: two linear scales, grid lines, ticks and titles. */
import { ticks } from 'd3-array'
import { element, stroked, textAt, textWidth } from '../figures/svg.js'
import { significant } from '../numbers.js'

export interface Frame {
  readonly x: readonly [number, number]
  readonly y: readonly [number, number]
  /** Else round numbers. */
  readonly xTicks?: readonly { readonly at: number; readonly label: string }[]
  readonly xTitle: string
  readonly yTitle: string
  readonly width: number
  readonly height: number
}

export interface Axes {
  readonly x: (value: number) => number
  readonly y: (value: number) => number
  readonly left: number
  readonly right: number
  readonly top: number
  readonly bottom: number
  readonly marks: readonly string[]
}

export function axesOf({ x: [x0, x1], y: [y0, y1], xTicks, xTitle, yTitle, width, height }: Frame): Axes {
  const pad = y1 > y0 ? 0.05 * (y1 - y0) : Math.abs(y1) * 0.05 || 0.5
  const [low, high] = [y0 - pad, y1 + pad]
  const levels = ticks(low, high, 5)
  const left = Math.max(...levels.map((value) => textWidth(significant(value), 12))) + 34
  const [right, top, bottom] = [width - 16, 22, height - 46]
  const span = x1 > x0 ? x1 - x0 : 1
  const x = (value: number) => left + 10 + ((value - x0) / span) * (right - left - 20)
  const y = (value: number) => bottom - ((value - low) / (high - low)) * (bottom - top)
  const across = xTicks ?? ticks(x0, x1, 7).map((value) => ({ at: value, label: significant(value) }))
  const short = textWidth(yTitle, 12) > bottom - top ? `${yTitle.slice(0, 30)}…` : yTitle
  const marks = [
    ...levels.flatMap((value) => [
      element('path', { d: `M${left.toFixed(1)} ${y(value).toFixed(1)}H${right}`, ...stroked('grid', 1) }),
      textAt(left - 7, y(value) + 4, significant(value), { anchor: 'end', color: 'muted' }),
    ]),
    element('path', { d: `M${left.toFixed(1)} ${bottom}H${right}`, ...stroked('ink', 1) }),
    ...across.flatMap(({ at, label }) => [
      element('path', { d: `M${x(at).toFixed(1)} ${bottom}v5`, ...stroked('ink', 1) }),
      textAt(x(at), bottom + 19, label, { anchor: 'middle', color: 'muted' }),
    ]),
    textAt((left + right) / 2, bottom + 38, xTitle, { anchor: 'middle' }),
    textAt(13, (top + bottom) / 2, short, { anchor: 'middle', turned: true }),
  ]
  return { x, y, left, right, top, bottom, marks }
}
