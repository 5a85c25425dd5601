/**
 * Are these numbers longitudes and latitudes? Checked over a whole file at once, because a file in the wrong
 * coordinates is one fault, not one fault per position.
 */
import type { Problem } from '../problem.js'
import { placeText } from './geojson.js'

/** Half the width of the Web Mercator map in metres: π times its sphere's radius. */
const MERCATOR_EDGE = 20037508.342789244
const MERCATOR_RADIUS = 6378137

/** Extremes of the positions of a file; `first` is the first position found out of range. */
export interface Extent {
  minLon: number
  maxLon: number
  minLat: number
  maxLat: number
  outOfRange: number
  first: { lon: number; lat: number; feature: number; place: string } | undefined
}

export function emptyExtent(): Extent {
  return { minLon: Infinity, maxLon: -Infinity, minLat: Infinity, maxLat: -Infinity, outOfRange: 0, first: undefined }
}

/** Longitudes up to ±360 are let through: files with 0 to 360, or rings drawn on past 180, use them. */
export function inRange(lon: number, lat: number): boolean {
  return Math.abs(lon) <= 360 && Math.abs(lat) <= 90
}

export function extend(extent: Extent, lon: number, lat: number, feature: number, place: string): void {
  if (lon < extent.minLon) extent.minLon = lon
  if (lon > extent.maxLon) extent.maxLon = lon
  if (lat < extent.minLat) extent.minLat = lat
  if (lat > extent.maxLat) extent.maxLat = lat
  if (inRange(lon, lat)) return
  extent.outOfRange++
  extent.first ??= { lon, lat, feature, place }
}

/** The one problem of a file whose positions are not longitudes and latitudes, with the likeliest cause. */
export function rangeProblem(extent: Extent, file: string): Problem | undefined {
  const first = extent.first
  if (!first) return undefined
  const { what, todo } = likelyFault(extent, first)
  const others = extent.outOfRange > 1 ? `, and ${extent.outOfRange - 1} more` : ''
  const found = `[${first.lon}, ${first.lat}] at ${first.place}${others}`
  return { file, feature: first.feature, what, found, todo }
}

function likelyFault(extent: Extent, first: { lon: number; lat: number }): { what: string; todo: string } {
  const { minLon, maxLon, minLat, maxLat } = extent
  const largest = Math.max(-minLon, maxLon, -minLat, maxLat)
  if (minLon >= -90 && maxLon <= 90 && minLat >= -180 && maxLat <= 180)
    return {
      what: 'latitude beyond 90 degrees; the axes look swapped (latitude first)',
      todo: 'write each position as [longitude, latitude]',
    }
  if (largest > 1000 && largest <= MERCATOR_EDGE * 1.001) {
    const { lon, lat } = fromMercator(first.lon, first.lat)
    return {
      what: 'positions are not degrees; they look like Web Mercator metres (EPSG:3857) or another projection',
      todo: `reproject the file to longitude and latitude, EPSG:4326 (as Web Mercator the position is ${placeText(lon, lat)})`,
    }
  }
  if (largest > 1000)
    return { what: 'positions are not degrees; they look projected', todo: 'reproject the file to EPSG:4326' }
  return { what: 'longitude beyond 360 or latitude beyond 90 degrees', todo: 'correct the position' }
}

function fromMercator(x: number, y: number): { lon: number; lat: number } {
  const degrees = 180 / Math.PI
  return {
    lon: (x / MERCATOR_RADIUS) * degrees,
    lat: (2 * Math.atan(Math.exp(y / MERCATOR_RADIUS)) - Math.PI / 2) * degrees,
  }
}
