/** Zones drawn in metres around a place, for tests. */
import type { Feature, FeatureCollection, MultiPolygon, Polygon } from 'geojson'
import {
  type Border,
  type BorderOptions,
  type LineLayer,
  prepareBorder,
  readLineLayer,
  readZones,
  type Zones,
} from '../../src/borders/index.js'
import { problemText } from '../../src/problem.js'

export type Point = [number, number]
export type ZoneFeature = Feature<Polygon | MultiPolygon>

/**
 * Degrees from metres east and north of a place, by the usual series for the length of a degree on the ellipsoid
 * (Snyder 1987, Map Projections: A Working Manual, p. 25; right to about 1e-5).
 */
export function metresAround(lon: number, lat: number): (x: number, y: number) => Point {
  const phi = (lat * Math.PI) / 180
  const perLat = 111132.92 - 559.82 * Math.cos(2 * phi) + 1.175 * Math.cos(4 * phi)
  const perLon = 111412.84 * Math.cos(phi) - 93.5 * Math.cos(3 * phi) + 0.118 * Math.cos(5 * phi)
  return (x, y) => [lon + x / perLon, lat + y / perLat]
}

export function closed(points: readonly Point[]): Point[] {
  return [...points, points[0]]
}

/** Corners counter-clockwise from the south-west, closed. */
export function box(at: (x: number, y: number) => Point, x0: number, y0: number, x1: number, y1: number): Point[] {
  return closed([at(x0, y0), at(x1, y0), at(x1, y1), at(x0, y1)])
}

export function zone(name: string, ...rings: Point[][]): ZoneFeature {
  return { type: 'Feature', properties: { name }, geometry: { type: 'Polygon', coordinates: rings } }
}

export function multiZone(name: string, ...polygons: Point[][][]): ZoneFeature {
  return { type: 'Feature', properties: { name }, geometry: { type: 'MultiPolygon', coordinates: polygons } }
}

export function collection(...features: ZoneFeature[]): FeatureCollection {
  return { type: 'FeatureCollection', features }
}

export function zonesOf(...features: ZoneFeature[]): Zones {
  const read = readZones(collection(...features), 'zones.geojson', 'name')
  if (!read.ok) throw new Error(read.problems.map(problemText).join('\n'))
  return read.value
}

export function tryBorder(
  features: ZoneFeature[],
  treated: string[] | undefined,
  options: Partial<BorderOptions> = {},
) {
  return prepareBorder(zonesOf(...features), { treated, snapMetres: 2, pieceMetres: 1000, ...options })
}

export function borderOf(
  features: ZoneFeature[],
  treated: string[] | undefined,
  options: Partial<BorderOptions> = {},
): Border {
  const border = tryBorder(features, treated, options)
  if (!border.ok) throw new Error(border.problems.map(problemText).join('\n'))
  return border.value
}

export function problemsOf(
  features: ZoneFeature[],
  treated: string[] | undefined,
  options: Partial<BorderOptions> = {},
): string {
  const border = tryBorder(features, treated, options)
  return border.ok ? '' : border.problems.map(problemText).join('\n')
}

/** A zone with other properties beside its name. */
export function withProperties(feature: ZoneFeature, properties: Record<string, unknown>): ZoneFeature {
  return { ...feature, properties: { ...feature.properties, ...properties } }
}

/** Lines of a layer that must be readable. */
export function layerOf(file: string, ...lines: Point[][]): LineLayer {
  const features = lines.map((coordinates) => ({
    type: 'Feature',
    properties: {},
    geometry: { type: 'LineString', coordinates },
  }))
  const read = readLineLayer({ type: 'FeatureCollection', features }, file)
  if (!read.ok) throw new Error(read.problems.map(problemText).join('\n'))
  return read.value
}

/** Longitudes and latitudes of points, as columns. */
export function columns(points: readonly (readonly number[])[]): [lon: Float64Array, lat: Float64Array] {
  return [Float64Array.from(points, (p) => p[0]), Float64Array.from(points, (p) => p[1])]
}

/** Metres of border by pair of zones. */
export function lengths(border: Border): Record<string, number> {
  const sums: Record<string, number> = {}
  for (const { zones, lengthMetres } of border.pieces) {
    const pair = zones.join(' | ')
    sums[pair] = (sums[pair] ?? 0) + lengthMetres
  }
  return sums
}

/** Seeded numbers in [0, 1), good enough to draw shapes with (mulberry32). */
export function seeded(seed: number): () => number {
  let state = seed
  return () => {
    state = (state + 0x6d2b79f5) | 0
    let t = Math.imul(state ^ (state >>> 15), 1 | state)
    t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296
  }
}
