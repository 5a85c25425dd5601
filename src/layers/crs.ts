/**
 * What a person or a file calls a coordinate system, as something that can be computed with.
 * Positions are always x (east, longitude) before y (north, latitude), whatever order of axes the registry gives.
 */
import { createRequire } from 'node:module'
import { parametersOf, type Shift, shiftOfParameters, shiftOfWkt } from './datums.js'
import { systemOf } from './registry.js'

const require = createRequire(import.meta.url)

export interface CoordinateSystem {
  /** `EPSG:5070 (NAD83 / Conus Albers)`. */
  readonly name: string
  /** Positions are longitude and latitude in degrees. */
  readonly isDegrees: boolean
  /** Positions are WGS 84 degrees, or so near to it that nothing is done to them. */
  readonly isWgs84: boolean
  /** How it relates to WGS 84, in words. */
  readonly datum: string
  /** NaN or infinite where the projection has no answer; made on first use. */
  readonly toLonLat: (x: number, y: number) => [number, number]
  readonly fromLonLat: (lon: number, lat: number) => [number, number]
}

/** Why a text is no coordinate system that can be used. */
export interface NotUnderstood {
  readonly found: string
  readonly todo: string
}

export type Understood = CoordinateSystem | NotUnderstood

export function isUnderstood(system: Understood): system is CoordinateSystem {
  return 'toLonLat' in system
}

export const wgs84: CoordinateSystem = {
  name: 'longitude and latitude (WGS 84)',
  isDegrees: true,
  isWgs84: true,
  datum: 'WGS 84',
  toLonLat: (x, y) => [x, y],
  fromLonLat: (lon, lat) => [lon, lat],
}

const howToWrite = 'write an EPSG code, such as EPSG:5070, or a +proj text'

/**
 * Understands EPSG codes (`EPSG:5070`, `5070`, `ESRI:102003`, urn and http forms), OGC:CRS84, `+proj=...` and WKT 1 and 2
 * with Esri's spellings. A datum whose shift from WGS 84 is unknown is refused.
 */
export function understandCrs(text: string): Understood {
  const wanted = text.trim()
  if (/^(urn:ogc:def:crs:OGC:[\d.]*:|https?:\/\/\S*\/OGC\/[\d.]+\/|OGC:)?CRS84$/i.test(wanted)) return wgs84
  if (/^WGS ?_?84$/i.test(wanted)) return wgs84
  if (/^urn:ogc:def:crs:OGC:[\d.]*:CRS83$/i.test(wanted)) return understandCode('EPSG', '4269', wanted)
  if (wanted.startsWith('+')) return fromParameters(wanted, wanted)
  if (/^[A-Z_0-9]+\s*[[(]/i.test(wanted)) return fromWkt(wanted)
  const code =
    /^(?:(EPSG|ESRI):+)?(\d+)$/i.exec(wanted) ??
    /^urn:(?:x-)?ogc:def:crs:(EPSG|ESRI):[\d.]*:(\d+)$/i.exec(wanted) ??
    /^https?:\/\/\S*\/(EPSG|ESRI)\/[\d.]+\/(\d+)$/i.exec(wanted) ??
    /^https?:\/\/\S*\/gml\/srs\/(epsg)\.xml#(\d+)$/i.exec(wanted)
  if (code) return understandCode((code[1] ?? 'EPSG').toUpperCase(), code[2], wanted)
  return { found: `not understood: ${short(wanted)}`, todo: howToWrite }
}

function short(text: string): string {
  return text.length > 60 ? `${text.slice(0, 57)}...` : text
}

function understandCode(authority: string, code: string, wanted: string): Understood {
  const system = systemOf(code)
  if (system === undefined)
    return { found: `no such system is known: ${wanted}`, todo: 'check the code, or write a +proj text' }
  const name = `${authority}:${code} (${system.name})`
  if (system.proj4 === null || !/^CRS-(PROJCRS|GEOGCRS|GEOG3DCRS)$/.test(system.kind))
    return {
      found: `${name} is not a map's coordinate system`,
      todo: 'write the code of a projected or geographic one',
    }
  return fromParameters(system.proj4, name, system.name.split(' / ')[0])
}

function fromParameters(text: string, name: string, geographicName = 'its datum'): Understood {
  const parameters = parametersOf(text)
  const projection = parameters.get('proj')
  if (projection === undefined || projection === 'geocent' || projection === 'ob_tran')
    return { found: `not understood: ${short(text)}`, todo: howToWrite }
  const shift = shiftOfParameters(parameters, geographicName)
  if (shift === undefined) return unknownShift(name)
  if (isMercator(parameters)) return made(name, false, shift, 'EPSG:3857')
  for (const key of ['nadgrids', 'type', 'wktext', ...(shift.towgs84 === undefined ? ['towgs84'] : [])])
    parameters.delete(key)
  if (parameters.get('datum') !== 'WGS84' && parameters.has('datum')) {
    parameters.set('ellps', parameters.get('datum') === 'NAD27' ? 'clrk66' : 'GRS80')
    parameters.delete('datum')
  }
  if (shift.towgs84 !== undefined) parameters.set('towgs84', shift.towgs84)
  const rest = [...parameters].map(([key, value]) => (value === '' ? `+${key}` : `+${key}=${value}`)).join(' ')
  const isDegrees = projection === 'longlat' || projection === 'latlong'
  return made(name, isDegrees, shift, rest, isDegrees && parameters.has('pm'))
}

function isMercator(parameters: ReadonlyMap<string, string>): boolean {
  return (
    parameters.get('proj') === 'merc' && parameters.get('nadgrids') === '@null' && parameters.get('a') === '6378137'
  )
}

function fromWkt(text: string): Understood {
  const part = (pattern: RegExp) => pattern.exec(text)?.[1]
  const own = part(/^[^"]*"([^"]*)"/) ?? 'WKT'
  const projection = part(/(?:PROJECTION|METHOD)\s*\[\s*"([^"]*)"/i)?.replaceAll('_', ' ')
  const name = projection === undefined ? own : `${own} (${projection})`
  const spheroid = /(?:SPHEROID|ELLIPSOID)\s*\[\s*"[^"]*"\s*,\s*([\d.eE+]+)\s*,\s*([\d.eE+]+)/i.exec(text)
  const geographic = text.slice(Math.max(0, text.search(/(?:BASE)?(?:GEOGCS|GEOGCRS|GEODCRS)\s*\[/i)))
  const geographicName = /^[^"]*"([^"]*)"/.exec(geographic)?.[1]
  const datumName = part(/(?:DATUM|ENSEMBLE|TRF)\s*\[\s*"([^"]*)"/i)
  if (spheroid === null || datumName === undefined || geographicName === undefined)
    return { found: `not understood: ${short(text)}`, todo: howToWrite }
  const shift = shiftOfWkt({
    geographicName,
    datumName,
    semiMajorMetres: Number(spheroid[1]),
    inverseFlattening: Number(spheroid[2]),
    towgs84: part(/TOWGS84\s*\[([^\]]*)\]/i)?.replaceAll(' ', ''),
    code: /^BASE/i.test(geographic) || /^GEOG/i.test(geographic) ? epsgCodeOf(geographic) : undefined,
  })
  if (shift === undefined) return unknownShift(name)
  const isDegrees = /^(GEOGCS|GEOGCRS|GEODCRS)/i.test(text)
  const unit =
    /ANGLEUNIT\s*\[\s*"[^"]*"\s*,\s*([\d.eE+-]+)/i.exec(text) ??
    /UNIT\s*\[\s*"(?:deg|grad)[^"]*"\s*,\s*([\d.eE+-]+)/i.exec(geographic)
  if (unit && Math.abs(Number(unit[1]) / (Math.PI / 180) - 1) > 1e-6)
    return { found: `${name} counts angles in another unit than degrees`, todo: 'reproject the file to EPSG:4326' }
  const primeMeridian = /PRIMEM\s*\[\s*"[^"]*"\s*,\s*([\d.eE+-]+)/i.exec(text)?.[1]
  const isMoved = primeMeridian !== undefined && Number(primeMeridian) !== 0
  try {
    return made(name, isDegrees, shift, wktDefinition(text, shift), isMoved)
  } catch (error) {
    return { found: `${name} can't be computed: ${short(reason(error))}`, todo: 'reproject the file to EPSG:4326' }
  }
}

/** The code of the geographic system: the authority that closes its own bracket. */
function epsgCodeOf(geographic: string): string | undefined {
  let depth = 0
  for (let i = 0; i < geographic.length; i++) {
    if (geographic[i] === '[') depth++
    if (geographic[i] === ']' && --depth === 0)
      return /(?:AUTHORITY|ID)\s*\[\s*"EPSG"\s*,\s*"?(\d+)"?\s*\]\s*$/i.exec(geographic.slice(0, i))?.[1]
  }
  return undefined
}

function reason(error: unknown): string {
  return error instanceof Error ? error.message : String(error)
}

function unknownShift(name: string): NotUnderstood {
  return {
    found: `${name}: its shift from WGS 84 is not known`,
    todo: 'give the EPSG code or +proj text with +towgs84, or reproject the file to EPSG:4326',
  }
}

/** A definition by text, or as the library has parsed it. */
type Definition = string | Readonly<Record<string, unknown>>

/** What is used of the library; its own types can't be found from modules. */
interface Proj4 {
  (
    definition: Definition,
  ): {
    readonly forward: (position: [number, number]) => number[]
    readonly inverse: (position: [number, number]) => number[]
  }
  readonly defs: (name: string, text?: string) => unknown
}

const proj4 = (): Proj4 => require('proj4') as Proj4

/** The WKT as proj4 reads it, with the shift that was found for its datum. */
function wktDefinition(text: string, { towgs84 }: Shift): Definition {
  const library = proj4()
  const key = 'scarp:wkt'
  library.defs(key, text)
  const parsed = { ...(library.defs(key) as Record<string, unknown>) }
  parsed.datum_params = towgs84?.split(',').map(Number)
  parsed.datumCode = 'none'
  return parsed
}

function made(
  name: string,
  isDegrees: boolean,
  shift: Shift,
  definition: Definition,
  isMoved = false,
): CoordinateSystem {
  if (isDegrees && shift.towgs84 === undefined && !isMoved) return { ...wgs84, name, datum: shift.says }
  // Made at once: a projection that the library does not know throws here, not at the first position.
  const converter = proj4()(definition)
  return {
    name,
    isDegrees,
    isWgs84: false,
    datum: shift.says,
    toLonLat: (x, y) => attempt(() => converter.inverse([x, y]) as [number, number]),
    fromLonLat: (lon, lat) => attempt(() => converter.forward([lon, lat]) as [number, number]),
  }
}

function attempt(convert: () => [number, number]): [number, number] {
  try {
    return convert()
  } catch {
    return [Number.NaN, Number.NaN]
  }
}
