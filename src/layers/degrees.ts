/**
 * Positions to longitudes and latitudes on WGS 84. Vertices are moved and none is added: an edge that was straight in a
 * projection is afterwards straight between the same two vertices in degrees, as RFC 7946 has it, and how far that takes
 * it from where it was is told.
 */
import type { Feature, GeometryCollection } from 'geojson'
import type { Checked, Problem } from '../problem.js'
import { type CoordinateSystem, isUnderstood, understandCrs, wgs84 } from './crs.js'
import { type Extent, extentOf } from './extent.js'
import type { RawLayer } from './raw.js'
import { type Box, lookOf, unlabelled } from './suspicions.js'

export interface LayerFacts {
  readonly format: string
  /** `EPSG:5070 (NAD83 / Conus Albers)`. */
  readonly crs: string
  /** Who says so: `states.prj`, `line.zones.crs`, `its numbers`. */
  readonly from: string
  /** How its datum was brought to WGS 84. */
  readonly datum: string
  /** The farthest that an edge lies from where it was straight in the projection; 0 for degrees. */
  readonly edgeMetres: number
}

export interface InDegrees {
  readonly content: unknown
  readonly facts: LayerFacts
}

const samplesOfEdges = 20_000

export interface DegreesRequest {
  readonly shownAs: string
  readonly askedBy: string
  /** The study's own word for the coordinate system. */
  readonly crs?: string
  /** Where the study's units are, in degrees. */
  readonly units?: Box
}

export function toDegrees(raw: RawLayer, { shownAs, askedBy, crs, units }: DegreesRequest): Checked<InDegrees> {
  const refuse = (what: string, found: string, todo: string, feature?: number): Checked<never> => {
    const problem: Problem = { file: shownAs, ...(feature === undefined ? {} : { feature }), what, found, todo }
    return { ok: false, problems: [problem] }
  }
  const extent = extentOf(raw.features)
  const chosen = systemOf(raw, `${askedBy.replace(/\.file$/, '')}.crs`, crs, extent, units, refuse)
  if (!chosen.ok) return chosen
  const { system, from } = chosen.value
  const facts = { format: raw.format, crs: system.name, from, datum: system.datum, edgeMetres: 0 }
  if (system.isDegrees && extent?.strange) return labelledWrongly(extent, system.name, from, refuse)
  if (!system.isDegrees && extent && !extent.strange)
    return refuse(
      'positions look like degrees',
      `${extent.minX}, ${extent.minY} to ${extent.maxX}, ${extent.maxY}, though ${from} says ${system.name}`,
      'correct the label, or write the key crs: EPSG:4326 where there is none',
    )
  if (system.isWgs84) {
    const content = raw.content ?? { type: 'FeatureCollection', features: raw.features }
    return { ok: true, value: { content, facts } }
  }
  const moved = moveAll(raw.features, system)
  if (moved.bad)
    return refuse(
      `${askedBy}: positions outside the coordinate system`,
      `${moved.bad.x}, ${moved.bad.y} is no place in ${system.name}`,
      'check that the file really is in that system',
      moved.bad.feature,
    )
  const content = { type: 'FeatureCollection', features: moved.features }
  return { ok: true, value: { content, facts: { ...facts, edgeMetres: moved.edgeMetres } } }
}

type Refuse = (what: string, found: string, todo: string, feature?: number) => Checked<never>

/** The study's word, then the file's; without either, numbers that can be degrees are degrees. */
function systemOf(
  raw: RawLayer,
  key: string,
  crs: string | undefined,
  extent: Extent | undefined,
  units: Box | undefined,
  refuse: Refuse,
): Checked<{ system: CoordinateSystem; from: string }> {
  const own = raw.crs && understandCrs(raw.crs.text)
  if (crs !== undefined) {
    const asked = understandCrs(crs)
    if (!isUnderstood(asked)) return refuse(`${key}: the coordinate system`, asked.found, asked.todo)
    if (own && isUnderstood(own) && extent && areApart(own, asked, extent)) {
      const found = `the study says ${asked.name}, ${raw.crs?.where} says ${own.name}`
      return refuse(`${key}: two coordinate systems`, found, 'leave the key out, or correct the file')
    }
    return { ok: true, value: { system: asked, from: key } }
  }
  if (own && raw.crs) {
    if (isUnderstood(own)) return { ok: true, value: { system: own, from: raw.crs.where } }
    return refuse(`the coordinate system of ${raw.crs.where}`, own.found, own.todo)
  }
  if (extent?.strange) {
    const { found, todo } = unlabelled(extent, raw.without, key, units)
    return refuse('the coordinate system is missing', found, todo, extent.strange.feature)
  }
  return { ok: true, value: { system: wgs84, from: 'its numbers' } }
}

/** Do two systems put the corners of the layer more than a metre apart? */
function areApart(a: CoordinateSystem, b: CoordinateSystem, { minX, minY, maxX, maxY }: Extent): boolean {
  return [
    [minX, minY],
    [maxX, maxY],
  ].some(([x, y]) => {
    const [first, second] = [a.toLonLat(x, y), b.toLonLat(x, y)]
    return !(Math.abs(first[0] - second[0]) < 1e-5 && Math.abs(first[1] - second[1]) < 1e-5)
  })
}

function labelledWrongly(extent: Extent, name: string, from: string, refuse: Refuse): Checked<never> {
  const { strange } = extent
  const place = `${strange?.x}, ${strange?.y}`
  const look = lookOf(extent)
  return refuse(
    'positions are no degrees',
    `${place}, though ${from} says ${name}${look ? `; ${look}` : ''}`,
    'name the coordinate system that the numbers are in',
    strange?.feature,
  )
}

interface Moved {
  readonly features: Feature[]
  readonly edgeMetres: number
  readonly bad?: { readonly x: number; readonly y: number; readonly feature: number }
}

function moveAll(features: readonly Feature[], system: CoordinateSystem): Moved {
  let bad: Moved['bad']
  let edgeMetres = 0
  let edges = 0
  const position = (at: readonly number[], feature: number): number[] => {
    const [lon, lat] = system.toLonLat(at[0], at[1])
    if (!(Math.abs(lat) <= 90 && Number.isFinite(lon))) bad ??= { x: at[0], y: at[1], feature }
    return [lon, lat, ...at.slice(2)]
  }
  const coordinates = (nested: unknown, feature: number): unknown => {
    if (!Array.isArray(nested)) return nested
    if (typeof nested[0] === 'number') return position(nested, feature)
    const moved = nested.map((part) => coordinates(part, feature)) as number[][]
    for (let i = 1; i < nested.length && edges < samplesOfEdges; i++) {
      if (typeof nested[i][0] !== 'number') break
      edges++
      edgeMetres = Math.max(edgeMetres, departure(nested[i - 1], nested[i], moved[i - 1], moved[i], system))
    }
    return moved
  }
  const geometry = (own: Feature['geometry'] | null, feature: number): Feature['geometry'] | null => {
    if (own === null || own === undefined) return null
    if (own.type === 'GeometryCollection') {
      const geometries = own.geometries.map((part) => geometry(part, feature)) as GeometryCollection['geometries']
      return { ...own, geometries }
    }
    return { ...own, coordinates: coordinates(own.coordinates, feature) } as Feature['geometry']
  }
  const moved = features.map((feature, i) => ({ ...feature, geometry: geometry(feature.geometry, i) }) as Feature)
  return { features: moved, edgeMetres, ...(bad ? { bad } : {}) }
}

const metresPerDegree = 111_320

/** From the middle of an edge in degrees to the middle of the same edge in the projection. */
function departure(
  from: readonly number[],
  to: readonly number[],
  lonLatFrom: readonly number[],
  lonLatTo: readonly number[],
  system: CoordinateSystem,
): number {
  const [lon, lat] = system.toLonLat((from[0] + to[0]) / 2, (from[1] + to[1]) / 2)
  const middle = [(lonLatFrom[0] + lonLatTo[0]) / 2, (lonLatFrom[1] + lonLatTo[1]) / 2]
  // across the edge: along it a middle may move without the edge moving
  const scale = Math.cos((middle[1] * Math.PI) / 180)
  const [east, north] = [(lon - middle[0]) * scale * metresPerDegree, (lat - middle[1]) * metresPerDegree]
  const [dx, dy] = [(lonLatTo[0] - lonLatFrom[0]) * scale, lonLatTo[1] - lonLatFrom[1]]
  const length = Math.hypot(dx, dy)
  const across = length > 0 ? Math.abs(east * dy - north * dx) / length : 0
  return Number.isFinite(across) ? across : 0
}
