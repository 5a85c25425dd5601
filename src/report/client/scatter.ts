/** Means of the cells between neighbouring bandwidths, with the bandwidths and the hole in use. */
import { drawing, element, filled, hollow, stroked } from '../figures/svg.js'
import { count, fixed, type Places, significant } from '../numbers.js'
import type { Subject } from './again.js'
import { axesOf } from './axes.js'
import type { Shown } from './model.js'

export interface Scatter {
  readonly subject: Subject
  readonly shown: Shown | undefined
  readonly donut: number
  readonly outcome: string
  readonly axis: string
  readonly unit: string
  readonly places: Places
  /** Curves to draw, by side, from the hole to the bandwidth. */
  readonly curves: readonly ScatterCurve[]
}

export interface ScatterCurve {
  readonly side: 'untreated' | 'treated'
  readonly to: number
  readonly at: (t: number) => number
}

interface Dot {
  readonly side: 'untreated' | 'treated'
  readonly x: number
  readonly mean: number
  readonly bar: number
}

const width = 620
const height = 300
const barFactor = 1.96
const sides = ['untreated', 'treated'] as const

export function scatterFigure(scatter: Scatter): string {
  const { subject, shown, donut, outcome, axis } = scatter
  const dots = sides.flatMap((side) => dotsOf(subject, side))
  const last = subject.bandwidths[subject.bandwidths.length - 1]
  const axes = axesOf({
    x: [-last, last],
    y: [Math.min(...dots.map(({ mean, bar }) => mean - bar)), Math.max(...dots.map(({ mean, bar }) => mean + bar))],
    xTitle: axis,
    yTitle: outcome,
    width,
    height,
  })
  const { x, y, top, bottom } = axes
  const upright = (at: number) => `M${x(at).toFixed(1)} ${top}V${bottom}`
  const body = [
    ...(donut > 0
      ? [
          element('rect', {
            x: x(-donut),
            y: top,
            width: x(donut) - x(-donut),
            height: bottom - top,
            ...filled('grid'),
          }),
        ]
      : []),
    ...axes.marks,
    element('path', { d: upright(0), ...stroked('ink', 1.5) }),
    ...(shown ? [-shown.bandwidth.untreated, shown.bandwidth.treated] : []).map((at) =>
      element('path', { d: upright(at), ...stroked('muted', 1), 'stroke-dasharray': '5 4' }),
    ),
    ...scatter.curves.map(({ side, to, at }) => {
      const sign = side === 'treated' ? 1 : -1
      const points = Array.from({ length: 33 }, (_, i) => (to * i) / 32)
      const path = points.map((t) => `${x(sign * t).toFixed(1)} ${y(at(t)).toFixed(1)}`).join('L')
      return element('path', { d: `M${path}`, ...stroked(side, 2.2) })
    }),
    ...dots.flatMap(({ side, x: at, mean, bar }) => [
      element('path', {
        d: `M${x(at).toFixed(1)} ${y(mean - bar).toFixed(1)}V${y(mean + bar).toFixed(1)}`,
        ...stroked(side, 1.2),
      }),
      element('circle', { cx: x(at), cy: y(mean), r: 3.6, ...(side === 'treated' ? filled(side) : hollow(side, 1.8)) }),
    ]),
  ]
  const title = `Mean ${outcome} between neighbouring bandwidths`
  return drawing({ id: 'what-if-scatter', width, height, title, description: described(scatter, dots), body })
}

function dotsOf({ cells, units }: Subject, side: 'untreated' | 'treated'): Dot[] {
  const { x, mean, standardError } = cells[side]
  return Array.from(x, (at, i) => ({
    side,
    x: side === 'treated' ? at : -at,
    mean: mean[i],
    bar: barFactor * standardError[i],
  })).filter((_, i) => unitsOf(units[side], i) > 0)
}

/** Units of a cell: those within its outer bandwidth and not within its inner one. */
function unitsOf(units: readonly number[], cell: number): number {
  return units[2 * cell] - (cell > 0 ? units[2 * cell - 2] : 0)
}

function described({ subject, places, unit }: Scatter, dots: readonly Dot[]): string {
  const parts = sides.map((side) => {
    const here = dots.filter((dot) => dot.side === side)
    const means = here.map(({ mean }) => mean)
    const sizes = here.map((_, cell) => unitsOf(subject.units[side], cell))
    return `${side} side: ${here.length} means from ${fixed(Math.min(...means), places)} to ${fixed(Math.max(...means), places)}, of ${count(Math.min(...sizes))} to ${count(Math.max(...sizes))} units each`
  })
  const last = subject.bandwidths[subject.bandwidths.length - 1]
  return `Bars: ±1.96 standard errors. Hollow: untreated; filled: treated; out to ${significant(last)}${unit}. Dashed: the bandwidth in use; shaded: units left out. ${parts.join('; ')}.`
}
