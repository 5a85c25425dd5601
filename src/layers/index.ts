/** Door of the layers room, for Node alone: zones, barriers, overlaps and points from files of any usual format. */
import { dirname, join } from 'node:path'
import type { Feature, Point } from 'geojson'
import type { Checked, Problem } from '../problem.js'
import { isUnderstood, understandCrs } from './crs.js'
import { type InDegrees, type LayerFacts, toDegrees } from './degrees.js'
import type { RawLayer } from './raw.js'
import { type FileSource, openFile, openZip, stem } from './source.js'
import type { Box } from './suspicions.js'

export type { LayerFacts } from './degrees.js'
export { extentOf } from './extent.js'
export { type Box, swappedAxes } from './suspicions.js'
export { readJsonFile, readTextFile } from './textFile.js'

export interface LayerRequest {
  /** The path as the user wrote it, for messages. */
  readonly shownAs: string
  /** What asks for the file: `line.zones`. */
  readonly askedBy: string
  /** Which of the file's layers: an object of a topology, a table of a GeoPackage, a file within a zip. */
  readonly layer?: string
  /** The column with the geometry, in a table. */
  readonly geometry?: string
  /** What the coordinates are, where the file does not say. */
  readonly crs?: string
  /** Where the study's units are, in degrees, to tell what unlabelled numbers may be. */
  readonly units?: Box
}

export interface ReadLayer {
  /** GeoJSON in WGS 84 degrees. */
  readonly content: unknown
  /** Of the file's bytes. */
  readonly sha256: string
  readonly facts: LayerFacts
}

/** Formats of point layers that tables are not read from. */
export const pointLayer = /\.(shp|gpkg|zip|kml|kmz|topojson)$/i

/** Reads a layer by the ending of its file. Whatever is wrong with it is a problem; nothing a file holds makes it throw. */
export async function readGeoLayer(path: string, request: LayerRequest): Promise<Checked<ReadLayer>> {
  const raw = await readRaw(path, request)
  if (!raw.ok) return raw
  const degrees: Checked<InDegrees> = toDegrees(raw.value, request)
  return degrees.ok ? { ok: true, value: { ...degrees.value, sha256: raw.value.sha256 } } : degrees
}

async function readRaw(path: string, request: LayerRequest): Promise<Checked<RawLayer>> {
  const { shownAs, askedBy, layer, geometry } = request
  if (!/\.(shp|gpkg|zip|kml|kmz|csv|tsv)$/i.test(path)) return (await import('./json.js')).jsonLayer(path, request)
  const opened = await openFile(path, { shownAs, askedBy })
  if (!opened.ok) return opened
  const isZip = /\.(zip|kmz)$/i.test(path)
  const file: Checked<FileSource> = isZip ? openZip(opened.value, shownAs, layer) : opened
  if (!file.ok) return file
  const { name } = file.value
  if (/\.shp$/i.test(name)) return (await import('./shapefile.js')).shapefileLayer(file.value, shownAs, askedBy)
  if (/\.gpkg$/i.test(name))
    return (await import('./geopackage.js')).geopackageLayer(file.value, shownAs, askedBy, layer)
  if (/\.kml$/i.test(name)) return (await import('./kml.js')).kmlLayer(file.value, shownAs, askedBy)
  if (/\.(csv|tsv)$/i.test(name)) return (await import('./wkt.js')).wktLayer(file.value, shownAs, askedBy, geometry)
  const problem: Problem = {
    file: shownAs,
    what: `${askedBy}: ${name} within the zip`,
    found: 'a format that is read only outside a zip',
    todo: 'unzip it',
  }
  return { ok: false, problems: [problem] }
}

/** Files that belong to a layer's file without being named: the other parts of a shapefile. */
export function filesBeside(path: string): string[] {
  if (!/\.shp$/i.test(path)) return []
  return ['dbf', 'shx', 'prj', 'cpg'].map((ending) =>
    join(dirname(path), `${stem(path.slice(dirname(path).length + 1))}.${ending}`),
  )
}

/** A layer of points as the text of a GeoJSON file of WGS 84 points, which tables can be read from. */
export async function pointsAsGeojson(
  path: string,
  request: LayerRequest,
): Promise<Checked<{ readonly text: string; readonly sha256: string; readonly facts: LayerFacts }>> {
  const read = await readGeoLayer(path, request)
  if (!read.ok) return read
  const { content, sha256, facts } = read.value
  const features = (content as { features: Feature[] }).features.map((feature) => ({
    ...feature,
    geometry: onePoint(feature),
  }))
  const lines = features.map((feature) => JSON.stringify(feature)).join(',\n')
  return { ok: true, value: { text: `{"type":"FeatureCollection","features":[\n${lines}\n]}\n`, sha256, facts } }
}

/** A multipoint of one point is that point; anything else is left for the reader of points to refuse. */
function onePoint({ geometry }: Feature): Feature['geometry'] {
  const isOne = geometry?.type === 'MultiPoint' && geometry.coordinates.length === 1
  return isOne ? ({ type: 'Point', coordinates: geometry.coordinates[0].slice(0, 2) } as Point) : geometry
}

/** The extent of positions as they are, out of range or not; undefined where there are none. */
export function boxOf(x: Float64Array, y: Float64Array): Box | undefined {
  let [minX, minY, maxX, maxY] = [Infinity, Infinity, -Infinity, -Infinity]
  for (let i = 0; i < x.length; i++) {
    if (!(Math.abs(x[i]) < Infinity && Math.abs(y[i]) < Infinity)) continue
    if (x[i] < minX) minX = x[i]
    if (x[i] > maxX) maxX = x[i]
    if (y[i] < minY) minY = y[i]
    if (y[i] > maxY) maxY = y[i]
  }
  return minX <= maxX ? { minX, minY, maxX, maxY } : undefined
}

/** Positions of a table in another system, in WGS 84 degrees; NaN stays NaN. Positions without an answer are a problem. */
export function positionsToDegrees(
  x: Float64Array,
  y: Float64Array,
  crs: string,
  file: string,
): Checked<{ readonly lon: Float64Array; readonly lat: Float64Array; readonly crs: string }> {
  const system = understandCrs(crs)
  const refuse = (found: string, todo: string): Checked<never> => ({
    ok: false,
    problems: [{ file, what: 'records.crs', found, todo }],
  })
  if (!isUnderstood(system)) return refuse(system.found, system.todo)
  const lon = new Float64Array(x.length).fill(Number.NaN)
  const lat = lon.slice()
  let strangers = 0
  let first: string | undefined
  for (let i = 0; i < x.length; i++) {
    if (Number.isNaN(x[i]) || Number.isNaN(y[i])) continue
    const [east, north] = system.toLonLat(x[i], y[i])
    if (Number.isFinite(east) && Math.abs(north) <= 90 && Math.abs(east) <= 360) {
      lon[i] = east
      lat[i] = north
      continue
    }
    strangers++
    first ??= `${x[i]}, ${y[i]}`
  }
  if (strangers > 0) {
    const others = strangers > 1 ? ` and ${strangers - 1} more` : ''
    return refuse(`${first}${others}: no place in ${system.name}`, 'check that the positions really are in that system')
  }
  return { ok: true, value: { lon, lat, crs: system.name } }
}

/** Positions in a column of WKT points, one text for each label; NaN where it is empty. */
export async function pointsOfText(
  labels: readonly string[],
  file: string,
  column: string,
): Promise<Checked<{ readonly x: Float64Array; readonly y: Float64Array }>> {
  const { geometryOfText } = await import('./wkt.js')
  const x = new Float64Array(labels.length).fill(Number.NaN)
  const y = x.slice()
  const bad: string[] = []
  labels.forEach((text, i) => {
    if (text.trim() === '') return
    const geometry = geometryOfText(text)?.geometry
    if (geometry?.type === 'Point') [x[i], y[i]] = geometry.coordinates
    else bad.push(text)
  })
  if (bad.length === 0) return { ok: true, value: { x, y } }
  const found = `${bad[0].slice(0, 40)}${bad.length > 1 ? ` and ${bad.length - 1} more` : ''}`
  return { ok: false, problems: [{ file, what: `records.position: ${column}`, found, todo: 'write WKT points there' }] }
}
