/** Zones of the map: planar paths clipped to the frame, and names where they fit. */
import { geoIdentity, geoPath } from 'd3-geo'
import type { MultiPolygon } from 'geojson'
import type { MapExhibit } from '../../results.js'
import type { MapFrame, Pixel } from './projection.js'
import { projectLine } from './projection.js'
import { element, textAt, textWidth } from './svg.js'

const labelSize = 12

/** Fills first, then names: two layers, so that borders can be drawn between them. `patternId`: hatch of treated zones. */
export function zoneMarks(map: MapExhibit, frame: MapFrame, patternId?: string): { fills: string[]; names: string[] } {
  const clip = geoIdentity().clipExtent([
    [-2, -2],
    [frame.width + 2, frame.height + 2],
  ])
  const path = geoPath(clip).digits(1)
  const obstacles = map.barriers.flatMap((barrier) => barrier.coordinates.flatMap((part) => dotted(part, frame)))
  const fills: string[] = []
  const names: string[] = []
  for (const zone of map.zones) {
    const shape = pixelShape(zone.polygons, frame)
    const d = path(shape)
    if (!d) continue
    fills.push(element('path', { d, class: 'f-land s-zone', fill: '#f3f1ec', stroke: '#a9a59b', 'stroke-width': 1 }))
    if (zone.treated && patternId !== undefined) fills.push(element('path', { d, fill: `url(#${patternId})` }))
    const place = placeForName(zone.name, shape, path.centroid(shape), frame, obstacles)
    if (place) names.push(nameMark(zone.name, place))
  }
  return { fills, names }
}

/** Points along a barrier, close enough that none of its bends is missed. */
function dotted(part: readonly (readonly number[])[], frame: MapFrame): Pixel[] {
  const line = projectLine(part, frame.project)
  return line.flatMap((pixel, index): Pixel[] => {
    const before = line[Math.max(0, index - 1)]
    const steps = Math.min(2000, Math.max(1, Math.ceil(Math.hypot(pixel[0] - before[0], pixel[1] - before[1]) / 4)))
    return Array.from({ length: steps }, (_, step) => {
      const share = (step + 1) / steps
      return [before[0] + share * (pixel[0] - before[0]), before[1] + share * (pixel[1] - before[1])]
    })
  })
}

/** Rings in pixels, outer rings one way round and holes the other, as the clipping needs. */
function pixelShape(polygons: MapExhibit['zones'][number]['polygons'], frame: MapFrame): MultiPolygon {
  const coordinates = polygons.map((polygon) =>
    polygon.map((ring, index) => {
      const line = projectLine(ring, frame.project)
      return signedArea(line) > 0 === (index === 0) ? line : line.reverse()
    }),
  )
  return { type: 'MultiPolygon', coordinates }
}

function signedArea(ring: readonly Pixel[]): number {
  let sum = 0
  for (let index = 0; index < ring.length; index++) {
    const [x0, y0] = ring[index]
    const [x1, y1] = ring[(index + 1) % ring.length]
    sum += x0 * y1 - x1 * y0
  }
  return sum / 2
}

/** Parallel strokes that mark treated zones without colour. */
export function hatchPattern(id: string): string {
  return element(
    'pattern',
    { id, width: 7, height: 7, patternUnits: 'userSpaceOnUse', patternTransform: 'rotate(45)' },
    element('rect', { width: 7, height: 7, class: 'f-landtreated', fill: '#e4dfd3' }),
    element('path', { d: 'M0 0V7', class: 's-hatch', stroke: '#bdb5a3', 'stroke-width': 2.4 }),
  )
}

/** The middle of a box for the name that lies wholly inside the zone and the frame, clear of obstacles: the centroid, else the nearest such point of a grid. */
function placeForName(
  name: string,
  shape: MultiPolygon,
  centroid: [number, number],
  frame: MapFrame,
  obstacles: readonly Pixel[],
): Pixel | undefined {
  const wide = textWidth(name, labelSize) + 12
  const tall = labelSize + 12
  const fits = ([x, y]: Pixel) =>
    !obstacles.some(([px, py]) => Math.abs(px - x) < wide / 2 && Math.abs(py - y) < tall / 2) &&
    [-1, -0.5, 0, 0.5, 1].every((across) =>
      [-1, 1].every((up) => {
        const [px, py] = [x + (across * wide) / 2, y + (up * tall) / 2]
        return px > 0 && px < frame.width && py > 0 && py < frame.height && isInside(shape, px, py)
      }),
    )
  if (Number.isFinite(centroid[0]) && fits(centroid)) return centroid
  const cells = 24
  const candidates: Pixel[] = []
  for (let row = 1; row < cells; row++) {
    for (let column = 1; column < cells; column++) {
      candidates.push([(column / cells) * frame.width, (row / cells) * frame.height])
    }
  }
  const away = ([x, y]: Pixel) => Math.hypot(x - centroid[0], y - centroid[1])
  return candidates.sort((a, b) => away(a) - away(b)).find(fits)
}

function isInside(shape: MultiPolygon, x: number, y: number): boolean {
  let inside = false
  for (const ring of shape.coordinates.flat()) {
    for (let index = 0, before = ring.length - 1; index < ring.length; before = index++) {
      const [x0, y0] = ring[index]
      const [x1, y1] = ring[before]
      if (y0 > y !== y1 > y && x < ((x1 - x0) * (y - y0)) / (y1 - y0) + x0) inside = !inside
    }
  }
  return inside
}

function nameMark(name: string, [x, y]: Pixel): string {
  return textAt(x, y + 4, name, { anchor: 'middle', size: labelSize })
}
