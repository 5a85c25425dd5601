/** What coordinates without a label most likely are. */
import type { Extent } from './extent.js'

/** Half the width of the square that Web Mercator maps the world to, in metres. */
const mercatorReach = 20_037_509
/** US projected systems in feet reach tens of millions; metres of national grids stay below about ten. */
const largestMetres = 1e7

/**
 * In words; undefined where the numbers look like degrees. `units`: where the study's units are, in degrees, which settles
 * whether Web Mercator fits.
 */
export function lookOf(extent: Extent, units?: Box): string | undefined {
  const { minX, minY, maxX, maxY, strange, positions } = extent
  if (!strange) return undefined
  const isSwapped = Math.abs(minX) <= 90 && Math.abs(maxX) <= 90 && Math.abs(minY) <= 180 && Math.abs(maxY) <= 180
  if (isSwapped) return 'they look like latitude before longitude: the axes are swapped'
  if (strange.others + 1 < positions * 0.9) return 'some positions look like degrees and some do not: units are mixed'
  const largest = Math.max(Math.abs(minX), Math.abs(maxX), Math.abs(minY), Math.abs(maxY))
  const fits = units ? overlap(mercatorInDegrees(extent), units) : isMercatorLike(extent)
  if (largest <= mercatorReach && fits) return 'they look like Web Mercator metres (EPSG:3857)'
  return largest > largestMetres
    ? 'they look like feet of a projected system'
    : 'they look like metres (or feet) of a projected system'
}

/** The extent in degrees, were its numbers those of Web Mercator. */
function mercatorInDegrees({ minX, minY, maxX, maxY }: Box): Box {
  const latitude = (y: number) => (Math.atan(Math.sinh((y / mercatorReach) * Math.PI)) * 180) / Math.PI
  const longitude = (x: number) => (x / mercatorReach) * 180
  return { minX: longitude(minX), minY: latitude(minY), maxX: longitude(maxX), maxY: latitude(maxY) }
}

/**
 * National grids keep their numbers small by an origin near by; Web Mercator counts from 0° N, 0° E, so that places people
 * live at have millions in both or, near the meridian or the equator, in one.
 */
function isMercatorLike({ minX, minY, maxX, maxY }: Pick<Extent, 'minX' | 'minY' | 'maxX' | 'maxY'>): boolean {
  const farthest = (low: number, high: number) => Math.max(Math.abs(low), Math.abs(high))
  const nearest = (low: number, high: number) => (low <= 0 && high >= 0 ? 0 : Math.min(Math.abs(low), Math.abs(high)))
  const isFarEast = nearest(minX, maxX) > 3_000_000
  const isFarNorth = nearest(minY, maxY) > 3_700_000 && farthest(minY, maxY) < mercatorReach
  return isFarEast || (isFarNorth && farthest(minX, maxX) > 1_500_000)
}

export function unlabelled(
  extent: Extent,
  without: string,
  key: string,
  units: Box | undefined,
): { readonly found: string; readonly todo: string } {
  const { strange } = extent
  const look = lookOf(extent, units)
  const found = `${strange?.x}, ${strange?.y} is no longitude and latitude, and there is ${without}; ${look}`
  const isMixed = look?.includes('mixed') === true
  const isSwapped = look?.includes('swapped') === true
  const todo = isMixed
    ? 'bring all features to one coordinate system'
    : isSwapped
      ? 'write longitude before latitude'
      : `add the file that names the system, or write ${key}: EPSG:...`
  return { found, todo }
}

export type Box = Pick<Extent, 'minX' | 'minY' | 'maxX' | 'maxY'>

function overlap(a: Box, b: Box): boolean {
  return a.minX <= b.maxX && b.minX <= a.maxX && a.minY <= b.maxY && b.minY <= a.maxY
}

/** Do units that lie wholly away from the zones meet them once longitude and latitude are swapped? Both in degrees. */
export function swappedAxes(zones: Box, units: Box): boolean {
  const swapped = { minX: units.minY, minY: units.minX, maxX: units.maxY, maxY: units.maxX }
  return !overlap(zones, units) && overlap(zones, swapped)
}
