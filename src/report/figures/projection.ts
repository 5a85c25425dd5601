/**
 * Degrees to the pixels of a small map: Lambert's azimuthal equal-area projection about the middle of the borders, on a
 * sphere of 6,371,008.8 m. Points are projected one by one, so ring winding and the 180th meridian play no part; edges are
 * straight in degrees (RFC 7946) and are filled in where they are long.
 */
import { geoAzimuthalEqualAreaRaw, geoRotation } from 'd3-geo'

export type Degrees = readonly number[]
export type Pixel = [number, number]

export interface MapFrame {
  readonly width: number
  readonly height: number
  readonly metresPerPixel: number
  readonly project: (point: Degrees) => Pixel
}

const earthRadiusMetres = 6371008.8
const radians = Math.PI / 180

/** A frame of the given width that holds all parts with a margin; its height follows their shape, within limits. */
export function frameAround(
  parts: readonly (readonly Degrees[])[],
  width: number,
  heights: readonly [number, number],
): MapFrame {
  const rotate = geoRotation(middleOf(parts))
  const raw = (point: Degrees): Pixel => {
    const [lon, lat] = rotate([point[0], point[1]])
    const [x, y] = geoAzimuthalEqualAreaRaw(lon * radians, lat * radians)
    return [x, -y]
  }
  let [left, top, right, bottom] = [Infinity, Infinity, -Infinity, -Infinity]
  for (const part of parts) {
    for (const point of part) {
      const [x, y] = raw(point)
      left = Math.min(left, x)
      right = Math.max(right, x)
      top = Math.min(top, y)
      bottom = Math.max(bottom, y)
    }
  }
  const margin = 0.1
  const [wide, tall] = [Math.max(right - left, 1e-9), Math.max(bottom - top, 1e-9)]
  const height = Math.min(heights[1], Math.max(heights[0], (width * tall) / wide))
  const scale = Math.min(width / (wide * (1 + 2 * margin)), height / (tall * (1 + 2 * margin)))
  const [middleX, middleY] = [(left + right) / 2, (top + bottom) / 2]
  return {
    width,
    height,
    metresPerPixel: earthRadiusMetres / scale,
    project: (point) => {
      const [x, y] = raw(point)
      return [width / 2 + scale * (x - middleX), height / 2 + scale * (y - middleY)]
    },
  }
}

/** The rotation that brings the mean direction of all points to the middle. */
function middleOf(parts: readonly (readonly Degrees[])[]): [number, number] {
  const sum = [0, 0, 0]
  for (const [lon, lat] of parts.flat()) {
    const across = Math.cos(lat * radians)
    sum[0] += across * Math.cos(lon * radians)
    sum[1] += across * Math.sin(lon * radians)
    sum[2] += Math.sin(lat * radians)
  }
  const lon = Math.atan2(sum[1], sum[0]) / radians
  const lat = Math.atan2(sum[2], Math.hypot(sum[0], sum[1])) / radians
  return [-lon, -lat]
}

const longestEdgeDegrees = 0.5
const finestPixels = 0.4

/** A line or ring in pixels: long edges filled in, vertices that no one could tell apart left out. */
export function projectLine(points: readonly Degrees[], project: MapFrame['project']): Pixel[] {
  const line: Pixel[] = []
  let kept: Pixel | undefined
  points.forEach((point, index) => {
    const before = index === 0 ? point : points[index - 1]
    const span = Math.max(Math.abs(point[0] - before[0]), Math.abs(point[1] - before[1]))
    const steps = span > 180 ? 1 : Math.max(1, Math.ceil(span / longestEdgeDegrees))
    for (let step = 1; step <= steps; step++) {
      const share = step / steps
      const pixel = project([before[0] + share * (point[0] - before[0]), before[1] + share * (point[1] - before[1])])
      const isLast = index === points.length - 1 && step === steps
      if (!kept || isLast || Math.hypot(pixel[0] - kept[0], pixel[1] - kept[1]) >= finestPixels) {
        line.push(pixel)
        kept = pixel
      }
    }
  })
  return line
}
