/** Small pictures of single lines: where a piece of border lies, and how the outcome runs up to a line. */
import { extent } from 'd3-array'
import { scaleLinear } from 'd3-scale'
import type { MapExhibit, ScatterExhibit } from '../../results.js'
import { escapeHtml } from '../escape.js'
import { frameAround, type MapFrame } from '../figures/projection.js'

const tenth = (value: number) => Math.round(value * 10) / 10
const groundId = 'passport-ground'

export interface Ground {
  readonly frame: MapFrame
  /** All pieces, drawn once; each passport refers to them. */
  readonly shared: string
}

/** The whole border as a faint background; undefined where there is none to draw. */
export function groundOf(map: MapExhibit | undefined): Ground | undefined {
  const parts = map?.pieces.flatMap(({ coordinates }) => coordinates) ?? []
  if (parts.length === 0) return undefined
  const frame = frameAround(parts, 180, [70, 140])
  const path = parts.map((part) => pathOf(part, frame)).join('')
  const shared = `<svg width="0" height="0" class="shared" aria-hidden="true"><defs><path id="${groundId}" d="${path}"/></defs></svg>`
  return { frame, shared }
}

/** One piece, thick, on the whole border. */
export function pieceMap(ground: Ground, piece: MapExhibit['pieces'][number], label: string): string {
  const { frame } = ground
  const path = piece.coordinates.map((part) => pathOf(part, frame)).join('')
  return `<svg viewBox="0 0 ${frame.width} ${tenth(frame.height)}" width="${frame.width}" height="${tenth(frame.height)}" role="img" aria-label="${escapeHtml(`Where ${label} lies along the border`)}"><use href="#${groundId}" class="s-muted" fill="none" stroke-width="1"/><path class="s-ink" fill="none" stroke-width="4" d="${path}"/></svg>`
}

function pathOf(points: readonly (readonly number[])[], frame: MapFrame): string {
  // a picture of 180 pixels does not tell nearer points apart
  const nearest = 1
  let last: readonly [number, number] | undefined
  return points.reduce((path, point, i) => {
    const [x, y] = frame.project(point)
    const isNear = last && Math.hypot(x - last[0], y - last[1]) < nearest
    if (isNear && i < points.length - 1) return path
    last = [x, y]
    return `${path}${path === '' ? 'M' : 'L'}${tenth(x)} ${tenth(y)}`
  }, '')
}

const width = 180
const height = 110
const most = 24

/** Binned means ±1.96 standard errors on both sides, hollow untreated and filled treated, the line between; numbers stand beside it. */
export function smallScatter(exhibit: ScatterExhibit, smallestCell: number, label: string): string {
  const bins = exhibit.bins.filter(({ units, mean }) => units >= smallestCell && Number.isFinite(mean))
  if (bins.length === 0) return ''
  const every = Math.max(1, Math.ceil(bins.length / most))
  const shown = bins.filter((_, i) => i % every === 0)
  const reach = Math.max(...shown.map(({ x }) => Math.abs(x)))
  const ends = ({ mean, standardError: error }: (typeof shown)[number]) =>
    [-1.96, 1.96].map((times) => mean + times * (Number.isFinite(error) ? error : 0))
  const [low, high] = extent(shown.flatMap(ends)) as [number, number]
  const x = scaleLinear([-reach, reach], [8, width - 8])
  const y = scaleLinear([low, high === low ? low + 1 : high], [height - 10, 10])
  const dots = shown.map((bin) => {
    const { side, x: at, mean } = bin
    const [from, to] = ends(bin).map((end) => tenth(y(end)))
    const bar = `<path class="s-${side}" d="M${tenth(x(at))} ${from}V${to}"/>`
    const mark = side === 'treated' ? 'class="f-treated"' : 'class="f-paper s-untreated" stroke-width="1.5"'
    return `${bar}<circle cx="${tenth(x(at))}" cy="${tenth(y(mean))}" r="3" ${mark}/>`
  })
  return `<svg viewBox="0 0 ${width} ${height}" width="${width}" height="${height}" role="img" aria-label="${escapeHtml(label)}"><path class="s-muted" fill="none" stroke-dasharray="3 3" d="M${tenth(x(0))} 4V${height - 4}"/>${dots.join('')}</svg>`
}
