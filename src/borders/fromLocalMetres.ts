/** Degrees from metres east and north of a place: the way back from `localMetres`. */
import { localMetres } from './localMetres.js'
import { localPlane } from './localPlane.js'

/** Correction steps; each takes away all but a small share of what is missing. */
const mostSteps = 30
const closeMetres = 1e-4

/**
 * Longitudes and latitudes whose `localMetres` are the ones given, to a tenth of a millimetre; longitudes run on from
 * lon0. Up to 500 km from the place and 85 degrees of latitude. Throws RangeError beyond what the steps can reach.
 */
export function fromLocalMetres(
  lon0: number,
  lat0: number,
  eastMetres: Float64Array,
  northMetres: Float64Array,
): { readonly lon: Float64Array; readonly lat: Float64Array } {
  const { metresPerLon, metresPerLat } = localPlane(lon0, lat0)
  const lat = northMetres.map((north) => lat0 + north / metresPerLat)
  const lon = eastMetres.map((east) => lon0 + east / metresPerLon)
  for (let step = 0; step < mostSteps; step++) {
    const reached = localMetres(lon0, lat0, lon, lat)
    let farthest = 0
    for (let i = 0; i < lon.length; i++) {
      const east = eastMetres[i] - reached.eastMetres[i]
      const north = northMetres[i] - reached.northMetres[i]
      farthest = Math.max(farthest, Math.abs(east), Math.abs(north))
      lon[i] += east / metresPerLon
      lat[i] += north / metresPerLat
    }
    if (farthest < closeMetres) return { lon, lat }
  }
  throw new RangeError(`no place lies so far from ${lon0}, ${lat0}`)
}
