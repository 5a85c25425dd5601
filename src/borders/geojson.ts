/** GeoJSON as data of unknown shape: what a file must be before its positions are looked at (RFC 7946). */
import type { Problem } from '../problem.js'

/** [longitude, latitude] in WGS 84 degrees. */
export type Position = readonly number[]
/** Closed: the first position is repeated at the end. */
export type RingCoords = readonly Position[]
/** Polygons, rings (the outer one first), positions. */
export type MultiPolygonCoords = readonly (readonly RingCoords[])[]

export type JsonObject = Record<string, unknown>

export function isObject(value: unknown): value is JsonObject {
  return typeof value === 'object' && value !== null && !Array.isArray(value)
}

/** A value as a message shows it, cut to a readable length. */
export function shown(value: unknown): string {
  const text = value === undefined ? 'nothing' : (JSON.stringify(value) ?? String(value))
  return text.length > 60 ? `${text.slice(0, 57)}...` : text
}

/** "a", "a and b", "a, b and c"; a long list is cut and counted. */
export function listed(items: readonly (string | number)[], most = 12): string {
  if (items.length === 0) return 'none'
  if (items.length === 1) return String(items[0])
  if (items.length > most) return `${items.slice(0, most).join(', ')} and ${items.length - most} more`
  return `${items.slice(0, -1).join(', ')} and ${items[items.length - 1]}`
}

/** A position as text, to about a decimetre. */
export function placeText(lon: number, lat: number): string {
  return `(${Number(lon.toFixed(6))}, ${Number(lat.toFixed(6))})`
}

/**
 * The features of a FeatureCollection, or undefined with a problem added.
 * What is not an object among them is reported later, feature by feature.
 */
export function featuresOf(content: unknown, file: string, problems: Problem[]): readonly unknown[] | undefined {
  if (!isObject(content) || content.type !== 'FeatureCollection') {
    const found = isObject(content) ? `type ${shown(content.type)}` : shown(content)
    problems.push({
      file,
      what: 'not a GeoJSON FeatureCollection',
      found,
      todo: 'write {"type": "FeatureCollection", "features": [...]}',
    })
    return undefined
  }
  if (!Array.isArray(content.features) || content.features.length === 0) {
    const found = Array.isArray(content.features) ? 'an empty list' : shown(content.features)
    problems.push({ file, what: 'features must be a list of at least one feature', found, todo: 'add the features' })
    return undefined
  }
  const crs = crsProblem(content, file)
  if (crs) problems.push(crs)
  return content.features
}

/** Longitude and latitude under names older files give: WGS 84 itself, and datums within two metres of it. */
const DEGREES = /(CRS84|CRS83|EPSG:+[\d.]*:*(4326|4269|4258))$/i

/** RFC 7946 has no `crs`: one that names anything but longitude and latitude means that the numbers are not degrees. */
function crsProblem(content: JsonObject, file: string): Problem | undefined {
  if (content.crs === undefined || content.crs === null) return undefined
  const properties = isObject(content.crs) ? content.crs.properties : undefined
  const name = isObject(properties) ? properties.name : undefined
  if (typeof name === 'string' && DEGREES.test(name)) return undefined
  return {
    file,
    what: 'crs: GeoJSON positions are longitude and latitude, WGS 84',
    found: name === undefined ? shown(content.crs) : shown(name),
    todo: 'reproject the file to longitude and latitude (EPSG:4326) and leave crs out',
  }
}

/**
 * The geometry of a feature if its type is among those allowed, or undefined with a problem added.
 * `inside` says what the file is for: "zones", "barriers".
 */
export function geometryOf(
  feature: unknown,
  index: number,
  file: string,
  allowed: readonly string[],
  problems: Problem[],
): JsonObject | undefined {
  const say = (what: string, found: string, todo: string) => problems.push({ file, feature: index, what, found, todo })
  if (!isObject(feature) || feature.type !== 'Feature') {
    say('not a Feature', isObject(feature) ? `type ${shown(feature.type)}` : shown(feature), 'write "type": "Feature"')
    return undefined
  }
  const geometry = feature.geometry
  const wanted = listed(allowed).replace(/ and ([^ ]*)$/, ' or $1')
  if (!isObject(geometry)) {
    say('geometry missing', shown(geometry), `give it a ${wanted}, or remove the feature`)
    return undefined
  }
  if (typeof geometry.type !== 'string' || !allowed.includes(geometry.type)) {
    say(`geometry must be a ${wanted}`, shown(geometry.type), 'convert it, or remove the feature')
    return undefined
  }
  return geometry
}
