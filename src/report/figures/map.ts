/**
 * The border pieces on the ground, coloured by the first outcome's corrected estimate. Colour runs from dark to light, so
 * it survives grey printing. No unit and no coordinate is shown.
 */
import { extent, quantile } from 'd3-array'
import { interpolateCividis } from 'd3-scale-chromatic'
import type { Jump, MapExhibit } from '../../results.js'
import { linePlaces } from '../lineTable.js'
import { isEstimated, type OutcomeView, type View } from '../view.js'
import { type Figure, figureOf } from './figure.js'
import { colorKey, type KeyItem, keyRows, northArrow, scaleBar } from './mapKey.js'
import { describeMap, mapCaption, mapData, mapTitle, type Piece } from './mapWords.js'
import { frameAround, type MapFrame, projectLine } from './projection.js'
import { element, stroked } from './svg.js'
import { hatchPattern, zoneMarks } from './zones.js'

export interface ColorScale {
  readonly low: number
  readonly high: number
  /** Whether estimates run on past the end of the scale. */
  readonly isCutLow: boolean
  readonly isCutHigh: boolean
  readonly color: (value: number) => string
}

const width = 760

/** Nothing where there is no piece to draw. */
export function mapFigure(view: View): Figure | undefined {
  const map = view.exhibits.map
  const outcome = view.outcomes[0]
  if (!map || !outcome || map.pieces.every((piece) => piece.coordinates.length === 0)) return undefined
  const frame = frameAround(
    map.pieces.flatMap((piece) => piece.coordinates),
    width,
    [300, 620],
  )
  const estimates = estimatesByLine(outcome)
  const scale = colorScale([...estimates.values()])
  return figureOf({
    name: 'map',
    width,
    title: mapTitle(map, outcome, estimates),
    lines: [],
    description: describeMap(map, outcome, estimates.size),
    caption: mapCaption(map, outcome),
    data: mapData(map, outcome),
    draw: (top, id) => {
      const hatch = `${id}-hatch`
      const zones = zoneMarks(map, frame, hatch)
      const key = keyMarks(view, outcome, map, scale, frame, hatch, top + 8 + frame.height + 14)
      const inside = [
        ...zones.fills,
        ...map.barriers.flatMap((barrier) => barrier.coordinates.map((part) => barrierMark(pathThrough(part, frame)))),
        ...map.pieces.filter((piece) => piece.line === null).map((piece) => setAsideMark(piecePath(piece, frame))),
        ...usedMarks(map, frame, estimates, scale),
        ...zones.names,
      ]
      return {
        marks: [...framed(frame, top + 8, `${id}-frame`, [hatchPattern(hatch)], inside), ...key.marks],
        end: key.end,
      }
    },
  })
}

/** Marks cut at the edge of the map, and the edge. */
export function framed(
  frame: MapFrame,
  top: number,
  clip: string,
  definitions: readonly string[],
  inside: readonly string[],
): string[] {
  return [
    element(
      'defs',
      {},
      ...definitions,
      element('clipPath', { id: clip }, element('rect', { width: frame.width, height: frame.height })),
    ),
    element('g', { transform: `translate(0 ${top})`, 'clip-path': `url(#${clip})` }, ...inside),
    element('rect', { x: 0.5, y: top, width: frame.width - 1, height: frame.height, ...stroked('muted', 1) }),
  ]
}

function estimatesByLine(outcome: OutcomeView): Map<string, number> {
  return new Map(
    outcome.result.lines.flatMap((line): [string, number][] =>
      isEstimated<Jump & { line: string }>(line) && Number.isFinite(line.corrected.estimate)
        ? [[line.line, line.corrected.estimate]]
        : [],
    ),
  )
}

/** From the smallest to the largest estimate; with 20 or more, from the 5th to the 95th percentile. */
function colorScale(estimates: readonly number[]): ColorScale | undefined {
  const [least, most] = extent(estimates)
  if (least === undefined) return undefined
  const isLong = estimates.length >= 20
  let low = isLong ? (quantile(estimates, 0.05) as number) : least
  let high = isLong ? (quantile(estimates, 0.95) as number) : most
  if (!(high > low))
    [low, high] = [least - Math.max(Math.abs(least) * 0.1, 1e-9), least + Math.max(Math.abs(least) * 0.1, 1e-9)]
  const share = (value: number) => Math.min(1, Math.max(0, (value - low) / (high - low)))
  return {
    low,
    high,
    isCutLow: least < low,
    isCutHigh: most > high,
    color: (value) => interpolateCividis(share(value)),
  }
}

function pathThrough(part: readonly (readonly number[])[], frame: MapFrame): string {
  return projectLine(part, frame.project)
    .map(([x, y], index) => `${index === 0 ? 'M' : 'L'}${x.toFixed(1)} ${y.toFixed(1)}`)
    .join('')
}

export function piecePath(piece: Piece, frame: MapFrame): string {
  return piece.coordinates.map((part) => pathThrough(part, frame)).join('')
}

const barrierMark = (d: string) =>
  element('path', {
    d,
    class: 's-barrier',
    fill: 'none',
    stroke: '#8fb9cf',
    'stroke-width': 6,
    'stroke-linecap': 'round',
    'stroke-linejoin': 'round',
  })
const setAsideMark = (d: string) => element('path', { d, ...stroked('muted', 3), 'stroke-dasharray': '6 5' })
const casingMark = (d: string) => element('path', { d, ...stroked('ink', 6.5), 'stroke-linejoin': 'round' })
const blankMark = (d: string) =>
  element('path', {
    d,
    class: 's-paper',
    fill: 'none',
    stroke: '#ffffff',
    'stroke-width': 4.5,
    'stroke-linejoin': 'round',
  })
const colorMark = (d: string, color: string) =>
  element('path', { d, fill: 'none', stroke: color, 'stroke-width': 4.5, 'stroke-linejoin': 'round' })

/** One dark casing under all pieces, so that light colours stand out on light ground; then each piece. */
function usedMarks(
  map: MapExhibit,
  frame: MapFrame,
  estimates: ReadonlyMap<string, number>,
  scale: ColorScale | undefined,
): string[] {
  const used = map.pieces
    .filter((piece) => piece.line !== null)
    .map((piece) => ({ line: piece.line as string, d: piecePath(piece, frame) }))
  return [
    casingMark(used.map((piece) => piece.d).join('')),
    ...used.map((piece) => {
      const estimate = estimates.get(piece.line)
      return estimate === undefined || !scale ? blankMark(piece.d) : colorMark(piece.d, scale.color(estimate))
    }),
  ]
}

function keyMarks(
  view: View,
  outcome: OutcomeView,
  map: MapExhibit,
  scale: ColorScale | undefined,
  frame: MapFrame,
  hatch: string,
  top: number,
): { marks: string[]; end: number } {
  const square = (x: number, y: number, attributes: Record<string, string | number>) =>
    element('rect', { x, y, width: 26, height: 14, stroke: '#a9a59b', 'stroke-width': 1, ...attributes })
  const across = (x: number, y: number) => `M${x} ${y + 7}h26`
  const hasBlank = map.pieces.some((piece) => piece.line !== null && !estimatesByLine(outcome).has(piece.line))
  const items: KeyItem[] = [
    { label: 'Treated zone', swatch: (x, y) => square(x, y, { class: 's-zone', fill: `url(#${hatch})` }) },
    { label: 'Untreated zone', swatch: (x, y) => square(x, y, { class: 'f-land s-zone', fill: '#f3f1ec' }) },
    ...(hasBlank
      ? [
          {
            label: 'Used, no estimate',
            swatch: (x: number, y: number) => casingMark(across(x, y)) + blankMark(across(x, y)),
          },
        ]
      : []),
    ...(map.pieces.some((piece) => piece.line === null)
      ? [{ label: 'Set aside', swatch: (x: number, y: number) => setAsideMark(across(x, y)) }]
      : []),
    ...map.barriers.map((barrier) => ({
      label: barrier.name,
      swatch: (x: number, y: number) => barrierMark(across(x, y)),
    })),
  ]
  const colorHeight = 58
  const rows = keyRows(items, width, top + colorHeight)
  return {
    marks: [
      ...(scale ? colorKey(scale, `Jump in ${outcome.result.outcome}, corrected`, linePlaces(outcome), top) : []),
      ...scaleBar(frame.metresPerPixel, view.exhibits.xUnit, width - 34, top),
      ...northArrow(width - 10, top),
      ...rows.marks,
    ],
    end: rows.end + 2,
  }
}
