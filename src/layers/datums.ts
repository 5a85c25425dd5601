/**
 * How far a datum lies from WGS 84. A shift that is unknown is never taken for none.
 * Parameters are those of the EPSG registry, in the sense of +towgs84 (metres, arc seconds, parts per million).
 */
import { allSystems, systemOf } from './registry.js'

export interface Shift {
  /** Three or seven numbers with commas between; undefined: none is applied. */
  readonly towgs84?: string
  readonly says: string
}

/** Systems whose exact shift is a grid that is not at hand: the registry's formula for most of their area. */
const formulas: Readonly<Record<string, readonly [towgs84: string, metres: string]>> = {
  NAD27: ['-8,160,176', '10 m in the 48 states (EPSG:1173)'],
  OSGB36: ['446.448,-125.157,542.06,0.15,0.247,0.842,-20.489', '5 m (EPSG:1314)'],
  DHDN: ['598.1,73.7,418.2,0.202,0.045,-2.455,6.7', '3 m (EPSG:1777)'],
  NZGD49: ['59.47,-5.04,187.44,0.47,-0.1,1.024,-4.5993', '4 m (EPSG:1564)'],
  AGD66: ['-117.808,-51.536,137.784,0.303,0.446,0.234,-0.29', '3 m (EPSG:15980)'],
  AGD84: ['-134,-48,149', '5 m (EPSG:1109)'],
  NTF: ['-168,-60,320', '2 m (EPSG:1193)'],
}

/** Spellings of datums within WKT that are not the registry's. */
const otherNames: Readonly<Record<string, string>> = {
  ggrs1987: 'GGRS87',
  northamerican1927: 'NAD27',
  osgb1936: 'OSGB36',
  ordnancesurveyofgreatbritain1936: 'OSGB36',
  deutscheshauptdreiecksnetz: 'DHDN',
  newzealand1949: 'NZGD49',
  australian1966: 'AGD66',
  australian1984: 'AGD84',
  ntf: 'NTF',
  ntfparis: 'NTF',
  sjtsk: 'S-JTSK',
}

const none = (name: string): Shift => ({ says: `${name} taken as WGS 84; the two differ by up to about 2 m` })

/** Undefined where nothing is known. `name` is that of the geographic system: `GGRS87`. */
function formulaOf(name: string): Shift | undefined {
  const found = formulas[name.replace(/ \(.*\)$/, '')]
  return found && { towgs84: found[0], says: `${name} to WGS 84 by a formula good to about ${found[1]}` }
}

function published(name: string, towgs84: string): Shift {
  const isNone = towgs84.split(',').every((value) => Number(value) === 0)
  return isNone ? none(name) : { towgs84, says: `${name} to WGS 84 by the shift ${towgs84}` }
}

/** The shift of a system given by parameters (`+proj=...`) and the name of its geographic system. */
export function shiftOfParameters(parameters: ReadonlyMap<string, string>, name: string): Shift | undefined {
  const towgs84 = parameters.get('towgs84')
  if (towgs84 !== undefined) return published(name, towgs84)
  const grids = parameters.get('nadgrids')
  if (grids !== undefined && grids !== '@null') return formulaOf(name)
  const datum = parameters.get('datum')
  if (datum !== undefined) {
    if (datum === 'WGS84') return { says: 'WGS 84' }
    return datum === 'NAD83' ? none('NAD83') : formulaOf(datum)
  }
  const isSphere = parameters.has('R') || parameters.get('ellps') === 'sphere' || isRound(parameters)
  if (isSphere) return { says: 'drawn on a sphere; its latitudes are taken as they are' }
  const ellipsoid = parameters.get('ellps')
  if (ellipsoid === 'GRS80' || ellipsoid === 'WGS84') return none(name)
  return formulaOf(name)
}

function isRound(parameters: ReadonlyMap<string, string>): boolean {
  const [a, b] = [parameters.get('a'), parameters.get('b')]
  return a !== undefined && Number(a) === Number(b)
}

export interface WktDatum {
  readonly geographicName: string
  readonly datumName: string
  readonly semiMajorMetres: number
  readonly inverseFlattening: number
  readonly towgs84?: string
  /** EPSG code of the geographic system. */
  readonly code?: string
}

/** The shift of a system given as WKT. */
export function shiftOfWkt(datum: WktDatum): Shift | undefined {
  const { geographicName, datumName, semiMajorMetres, inverseFlattening } = datum
  const name = geographicName.replace(/^GCS_/i, '').replaceAll('_', ' ')
  if (
    /^(D_)?WGS_?(19)?84$/i.test(datumName.replaceAll(' ', '_')) ||
    /^World Geodetic System 1984/i.test(datumName.replaceAll('_', ' '))
  )
    return { says: 'WGS 84' }
  if (datum.towgs84 !== undefined) return published(name, datum.towgs84)
  if (inverseFlattening === 0) return { says: 'drawn on a sphere; its latitudes are taken as they are' }
  const known = shiftInRegistry(datum)
  if (known !== undefined) return known
  const isModern = Math.abs(semiMajorMetres - 6378137) < 0.5 && Math.abs(inverseFlattening - 298.25722) < 1e-3
  return isModern ? none(name) : undefined
}

function shiftInRegistry({ code, geographicName, datumName }: WktDatum): Shift | undefined {
  const other = otherNames[plain(datumName)] ?? otherNames[plain(geographicName)]
  const formula = other && formulaOf(other)
  if (formula) return formula
  const byCode = code === undefined ? undefined : systemOf(code)
  const candidates = byCode
    ? [byCode]
    : allSystems().filter((system) => system.kind === 'CRS-GEOGCRS' && isNamed(system))
  for (const { proj4, name } of candidates) {
    if (proj4 === null) continue
    const shift = shiftOfParameters(parametersOf(proj4), name)
    if (shift !== undefined) return shift
  }
  return undefined

  function isNamed({ name, wkt }: { readonly name: string; readonly wkt: string | null }): boolean {
    const datum = /DATUM\["([^"]*)"/.exec(wkt ?? '')?.[1] ?? ''
    return name === other || (plain(datum) !== '' && plain(datum) === plain(datumName))
  }
}

/** A datum's name without what spellings differ in. */
function plain(name: string): string {
  return name
    .toLowerCase()
    .replace(/^d_/, '')
    .replace(/geodetic|datum|[^a-z0-9]/g, '')
}

/** `+name=value` pairs; a lone `+name` has the value ''. */
export function parametersOf(text: string): Map<string, string> {
  const found = text.matchAll(/\+([A-Za-z_0-9]+)(?:=("[^"]*"|\S+))?/g)
  return new Map([...found].map(([, name, value = '']) => [name, value]))
}
