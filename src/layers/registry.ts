/** The EPSG registry (and Esri's additions to it), from a package, one system at a time. */
import { createRequire } from 'node:module'

const require = createRequire(import.meta.url)

export interface RegisteredSystem {
  readonly code: string
  /** `CRS-PROJCRS`, `CRS-GEOGCRS`, ... */
  readonly kind: string
  readonly name: string
  readonly wkt: string | null
  readonly proj4: string | null
  /** Where it is used: north, west, south, east. */
  readonly bbox: readonly [number, number, number, number] | null
}

/** Codes that the registry has withdrawn or never had, and files still use. */
const additions: Readonly<Record<string, readonly [name: string, proj4: string]>> = {
  2163: [
    'US National Atlas Equal Area',
    '+proj=laea +lat_0=45 +lon_0=-100 +x_0=0 +y_0=0 +a=6370997 +b=6370997 +units=m',
  ],
}
const mercators = ['3857', '3785', '900913', '102100', '102113']

/** Undefined for a code that is not in the registry. */
export function systemOf(code: string): RegisteredSystem | undefined {
  if (!/^\d{1,7}$/.test(code)) return undefined
  const wanted = mercators.includes(code) ? '3857' : code
  const added = additions[wanted]
  if (added) return { code, kind: 'CRS-PROJCRS', name: added[0], wkt: null, proj4: added[1], bbox: null }
  try {
    return require(`epsg-index/s/${wanted}.json`) as RegisteredSystem
  } catch {
    return undefined
  }
}

/** Every system; some eighty milliseconds, so for rare questions only. */
export function allSystems(): readonly RegisteredSystem[] {
  return Object.values(require('epsg-index/all.json') as Record<string, RegisteredSystem>)
}
