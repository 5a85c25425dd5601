/** Where units are, counted in squares of a grid: squares with few units are blank, and no unit is drawn. */
import { ascending, max, quantileSorted, range } from 'd3-array'
import type { UnitCells } from '../../results.js'
import { count, significant } from '../numbers.js'
import type { View } from '../view.js'
import { type Figure, figureOf } from './figure.js'
import { framed, piecePath } from './map.js'
import { keyRows, northArrow, scaleBar } from './mapKey.js'
import { frameAround, type MapFrame } from './projection.js'
import { element, filled, stroked } from './svg.js'
import { zoneMarks } from './zones.js'

const width = 760
const shades = [0.1, 0.2, 0.32, 0.46, 0.62]

/** Nothing where there is no map, or no square with units enough. */
export function unitsMapFigure(view: View): Figure | undefined {
  const map = view.exhibits.map
  const cells = map?.cells
  if (!map || !cells) return undefined
  const frame = frameAround(
    map.pieces.flatMap((piece) => piece.coordinates),
    width,
    [300, 620],
  )
  const limits = limitsOf(cells)
  const side = cells.sideMetres >= 1000 ? `${cells.sideMetres / 1000} km` : `${cells.sideMetres} m`
  const perKm = (units: number) => units / (cells.sideMetres / 1000) ** 2
  const most = max(cells.cells, ({ units }) => units) ?? 0
  return figureOf({
    name: 'units-map',
    width,
    title: `${count(cells.shown)} of ${count(cells.units)} units stand in ${count(cells.cells.length)} squares of ${side}, up to ${significant(perKm(most))} per km²`,
    lines: [`Squares with fewer than ${Math.max(view.smallestCell, 1)} units are blank. No unit is drawn.`],
    description: `A grid of ${cells.cells.length} squares of ${side} over the zones, shaded more strongly where there are more units.`,
    caption: `Units placed, counted in squares of ${side}; the stronger the shade, the more. Squares with fewer than ${Math.max(view.smallestCell, 1)} units are blank, so that no one can be found on the map. N = ${count(cells.units)}, ${count(cells.units - cells.shown)} of them in blank squares. Solid line: border in use; dashes: border set aside.`,
    data: {
      columns: ['west', 'south', 'east', 'north', 'units'],
      rows: cells.cells.map((cell) => [cell.west, cell.south, cell.east, cell.north, cell.units]),
    },
    draw: (top, id) => {
      const zones = zoneMarks(map, frame)
      const key = keyRows(
        shades.map((shade, i) => ({
          label: `${i === 0 ? Math.max(view.smallestCell, 1) : count(limits[i - 1] + 1)}–${count(i < limits.length ? limits[i] : most)} units`,
          swatch: (x: number, y: number) =>
            element('rect', { x, y, width: 26, height: 14, ...filled('ink'), 'fill-opacity': String(shade) }),
        })),
        width - 220,
        top + frame.height + 26,
      )
      const inside = [
        ...zones.fills,
        ...cells.cells.map((cell) => cellMark(cell, shadeOf(cell.units, limits), frame)),
        ...map.pieces.flatMap((piece) => pieceMarks(piecePath(piece, frame), piece.line !== null)),
      ]
      return {
        marks: [
          ...framed(frame, top + 8, `${id}-frame`, [], inside),
          ...key.marks,
          ...scaleBar(frame.metresPerPixel, view.exhibits.xUnit, width - 34, top + frame.height + 22),
          ...northArrow(width - 10, top + frame.height + 22),
        ],
        end: Math.max(key.end, top + frame.height + 64) + 2,
      }
    },
  })
}

/** On a pale casing, so that the line is seen on dark squares too. */
function pieceMarks(d: string, isUsed: boolean): string[] {
  return [
    element('path', { d, class: 's-paper', fill: 'none', stroke: '#ffffff', 'stroke-width': 6 }),
    element('path', { d, ...stroked(isUsed ? 'ink' : 'muted', 2.6), 'stroke-dasharray': isUsed ? undefined : '6 5' }),
  ]
}

/** Single units, where the study asks for their coordinates; nothing else shows one. */
export function pointsMapFigure(view: View): Figure | undefined {
  const map = view.exhibits.map
  if (!map?.points || map.points.length === 0) return undefined
  const { points } = map
  const frame = frameAround(
    map.pieces.flatMap((piece) => piece.coordinates),
    width,
    [300, 620],
  )
  const shown = pixelsOf(points, frame)
  return figureOf({
    name: 'points-map',
    width,
    title: `Units stand at ${count(points.length)} places; the study asks that they be shown`,
    lines: ['Dots: places of units. Whoever sees this map can find them.'],
    description: `A map of the zones and the border with a dot for each of ${points.length} places of units.`,
    caption: `Places of the units placed against the border, drawn because the study sets disclosure.coordinates. Solid line: border in use; dashes: border set aside. N = ${count(points.length)} places. Leave this figure and its numbers out of what others see.`,
    data: { columns: ['lon', 'lat'], rows: points.map(([lon, lat]) => [lon, lat]) },
    draw: (top, id) => {
      const d = shown.map(([x, y]) => `M${x} ${y}h0`).join('')
      const inside = [
        ...zoneMarks(map, frame).fills,
        element('path', { d, ...stroked('untreated', 2.4), 'stroke-linecap': 'round' }),
        ...map.pieces.flatMap((piece) => pieceMarks(piecePath(piece, frame), piece.line !== null)),
      ]
      const below = top + frame.height + 22
      return {
        marks: [
          ...framed(frame, top + 8, `${id}-frame`, [], inside),
          ...scaleBar(frame.metresPerPixel, view.exhibits.xUnit, width - 34, below),
          ...northArrow(width - 10, below),
        ],
        end: below + 42,
      }
    },
  })
}

/** Each pixel of the map that has a unit, once. */
function pixelsOf(points: readonly (readonly [number, number])[], frame: MapFrame): [number, number][] {
  const found = new Map<number, [number, number]>()
  for (const point of points) {
    const [x, y] = frame.project(point).map(Math.round)
    if (x >= 0 && x <= frame.width && y >= 0 && y <= frame.height) found.set(y * (width + 1) + x, [x, y])
  }
  return [...found.values()]
}

/** Upper ends of all classes but the last: fifths of the squares. */
function limitsOf({ cells }: UnitCells): number[] {
  const sorted = cells.map(({ units }) => units).sort(ascending)
  return range(1, shades.length).map((fifth) => Math.floor(quantileSorted(sorted, fifth / shades.length) as number))
}

function shadeOf(units: number, limits: readonly number[]): number {
  const at = limits.findIndex((limit) => units <= limit)
  return shades[at < 0 ? shades.length - 1 : at]
}

function cellMark({ west, south, east, north }: UnitCells['cells'][number], shade: number, frame: MapFrame): string {
  const corners = [
    [west, south],
    [east, south],
    [east, north],
    [west, north],
  ].map(frame.project)
  const d = corners.map(([x, y], i) => `${i === 0 ? 'M' : 'L'}${x.toFixed(1)} ${y.toFixed(1)}`).join('')
  return element('path', { d: `${d}Z`, ...filled('ink'), 'fill-opacity': String(shade) })
}
