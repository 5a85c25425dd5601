/** Axes of figures with a plane: gridlines and numbers on the left, ticks and numbers below, titles with units. */
import type { ScaleLinear } from 'd3-scale'
import { element, stroked, textAt, textWidth, wrapText } from './svg.js'

export type Scale = ScaleLinear<number, number>

export interface Plane {
  readonly x: Scale
  readonly y: Scale
}

/** Coordinates in paths are written to a tenth of a pixel. */
export function tenth(value: number): number {
  return Math.round(value * 10) / 10
}

/** Room on the left for the numbers of an axis and its turned title. */
export function roomForNumbers(y: Scale): number {
  const format = y.tickFormat(6)
  return Math.max(...y.ticks(6).map((tick) => textWidth(format(tick), 12))) + 38
}

/** Gridlines with numbers, and the title turned beside them, broken where the axis is shorter. */
export function leftAxis({ x, y }: Plane, title: string): string[] {
  const [left, right] = x.range()
  const [bottom, top] = y.range()
  const format = y.tickFormat(6)
  const words = wrapText(title, bottom - top, 12)
  return [
    ...y
      .ticks(6)
      .flatMap((tick) => [
        element('path', { d: `M${tenth(left)} ${tenth(y(tick))}H${tenth(right)}`, ...stroked('grid', 1) }),
        textAt(left - 8, y(tick) + 4, format(tick), { anchor: 'end', color: 'muted' }),
      ]),
    textAt(13, (top + bottom) / 2, words.length > 1 ? `${words[0]}…` : words[0], { anchor: 'middle', turned: true }),
  ]
}

/** The base line with ticks, numbers and the title below. */
export function bottomAxis(x: Scale, bottom: number, title: string): string[] {
  const [left, right] = x.range()
  const format = x.tickFormat(8)
  return [
    baseLine(left, right, bottom),
    ...x
      .ticks(8)
      .flatMap((tick) => [
        element('path', { d: `M${tenth(x(tick))} ${tenth(bottom)}v5`, ...stroked('ink', 1) }),
        textAt(x(tick), bottom + 19, format(tick), { anchor: 'middle', color: 'muted' }),
      ]),
    textAt((left + right) / 2, bottom + 38, title, { anchor: 'middle' }),
  ]
}

export function baseLine(left: number, right: number, at: number): string {
  return element('path', { d: `M${tenth(left)} ${tenth(at)}H${tenth(right)}`, ...stroked('ink', 1) })
}

/** Ends a horizontal scale so that its last number does not run off the figure. */
export function fitRight(x: Scale, left: number, right: number): Scale {
  x.range([left, right - 12])
  const last = x.ticks(8).map(x.tickFormat(8)).at(-1) ?? ''
  return x.range([left, right - Math.max(12, textWidth(last, 12) / 2)])
}

export function upright(x: number, top: number, bottom: number): string {
  return `M${tenth(x)} ${tenth(top)}V${tenth(bottom)}`
}
