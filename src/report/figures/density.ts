/** How many units there are on each side near the line, bin by bin, and the two densities at the line itself. */
import { max } from 'd3-array'
import { scaleLinear } from 'd3-scale'
import type { DensityExhibit } from '../../results.js'
import { fixed, pWords, sharedPlaces, significant } from '../numbers.js'
import type { View } from '../view.js'
import { bottomAxis, fitRight, leftAxis, type Plane, roomForNumbers, tenth, upright } from './axes.js'
import { type Figure, figureOf } from './figure.js'
import { unitsWords } from './findings.js'
import { element, filled, hollow, stroked, textAt, textWidth } from './svg.js'

const width = 720
const plotHeight = 270
const barFactor = 1.96
const sides = ['untreated', 'treated'] as const

/** Nothing where no checks were run or the test could not be made. */
export function densityFigure(view: View): Figure | undefined {
  const found = view.exhibits.density
  if (!found) return undefined
  const per = found.perSquareKm ? 'units per km²' : `units per unit of ${view.exhibits.xUnit}`
  const isBeyond = found.p < 1 - view.choices.level
  const blank = found.bins.filter(({ density }) => density === null).length
  const places = sharedPlaces(
    sides.map((side) => found.atLine[side].standardError),
    sides.map((side) => found.atLine[side].density),
  )
  const atLine = sides.map((side) => `${fixed(found.atLine[side].density, places)} ${side}`).join(', ')
  return figureOf({
    name: 'density',
    width,
    title: `${isBeyond ? 'Units pile up on one side' : 'Units do not pile up on either side'}: at ${view.words.theLine} the treated side has ${fixed(found.ratio, 2)} times as many ${per} (${pWords(found.p)})`,
    lines: [
      `Steps: ${per} in bins. Marks at 0: density at the line by the test, bars ±1.96 standard errors.${blank > 0 ? ` Blank: bins with fewer than ${view.smallestCell} units${found.perSquareKm ? ' or too little land' : ''}.` : ''}`,
    ],
    description: `Bins of ${per} by distance from ${view.words.theLine}. At the line: ${atLine}.`,
    caption: `Density of units by distance, in ${per}${found.perSquareKm ? ', land measured with random points placed by the study’s own rules' : ''}; all lines together. At ${view.words.theLine}: ${atLine}, by the local polynomial density estimator (Cattaneo, Jansson & Ma 2020) with bandwidth ${significant(found.bandwidth)}${view.exhibits.isBorder ? ` ${view.exhibits.xUnit}` : ''}; N within it: ${unitsWords(view, found.units)}. A jump would say that units chose their side.${blank > 0 ? ` ${blank} bins are blank.` : ''}`,
    data: {
      columns: ['mark', 'side', 'low', 'high', 'units', 'density', 'standard_error'],
      rows: [
        ...found.bins.map((bin) => ['bin', bin.side, bin.low, bin.high, bin.units, bin.density, null]),
        ...sides.map((side) => [
          'at_line',
          side,
          0,
          0,
          null,
          found.atLine[side].density,
          found.atLine[side].standardError,
        ]),
      ],
    },
    draw: (top) => {
      const plotTop = top + 36
      const plane = planeOf(found, plotTop)
      return {
        marks: [
          ...legend(top + 16),
          ...leftAxis(plane, `${per.charAt(0).toUpperCase()}${per.slice(1)}`),
          ...found.bins.flatMap((bin) => stepMark(bin, plane)),
          ...bottomAxis(plane.x, plotTop + plotHeight, view.words.axis),
          element('path', { d: upright(plane.x(0), plotTop, plotTop + plotHeight), ...stroked('ink', 1.5) }),
          ...sides.flatMap((side) => lineMark(found, side, plane)),
        ],
        end: plotTop + plotHeight + 48,
      }
    },
  })
}

function planeOf({ bins, atLine }: DensityExhibit, plotTop: number): Plane {
  const most = max([
    ...bins.map(({ density }) => density ?? 0),
    ...sides.map((side) => atLine[side].density + barFactor * atLine[side].standardError),
  ])
  const y = scaleLinear([0, (most || 1) * 1.05], [plotTop + plotHeight, plotTop])
  const reach = max(bins, ({ low, high }) => Math.max(Math.abs(low), Math.abs(high))) ?? 1
  return { x: fitRight(scaleLinear().domain([-reach, reach]), roomForNumbers(y), width), y }
}

function legend(y: number): string[] {
  const second = 50 + textWidth('Untreated', 12)
  return [
    element('rect', { x: 0, y: y - 10, width: 16, height: 11, ...hollow('untreated', 1.5) }),
    textAt(24, y, 'Untreated'),
    element('rect', { x: second, y: y - 10, width: 16, height: 11, ...filled('treated'), 'fill-opacity': '0.55' }),
    textAt(second + 24, y, 'Treated'),
  ]
}

function stepMark({ side, low, high, density }: DensityExhibit['bins'][number], { x, y }: Plane): string[] {
  if (density === null) return []
  const box = { x: tenth(x(low)), y: y(density), width: Math.max(0, x(high) - x(low) - 1), height: y(0) - y(density) }
  return [
    side === 'treated'
      ? element('rect', { ...box, ...filled('treated'), 'fill-opacity': '0.55' })
      : element('rect', { ...box, ...hollow('untreated', 1.5) }),
  ]
}

/** A little off the line, so that the two do not cover each other. */
function lineMark({ atLine }: DensityExhibit, side: 'untreated' | 'treated', { x, y }: Plane): string[] {
  const { density, standardError } = atLine[side]
  const at = x(0) + (side === 'treated' ? 7 : -7)
  const bar = upright(at, y(Math.max(0, density - barFactor * standardError)), y(density + barFactor * standardError))
  return [
    element('path', { d: bar, ...stroked('ink', 2) }),
    element('circle', {
      cx: tenth(at),
      cy: y(density),
      r: 4.5,
      ...(side === 'treated' ? filled('ink') : hollow('ink', 1.8)),
    }),
  ]
}
