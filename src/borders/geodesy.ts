import geographic from 'geographiclib-geodesic'
import { equatorialMetres, flattening } from '../math/index.js'

/**
 * Lengths on the WGS 84 ellipsoid. Longitudes and latitudes in degrees, lengths in metres.
 * Source: Karney (2013), Algorithms for geodesics, J. Geodesy 87; METHODS section 10.
 */

const eccentricitySquared = flattening * (2 - flattening)
const radiansPerDegree = Math.PI / 180

const wgs84 = geographic.Geodesic.WGS84
const distanceOnly = geographic.Geodesic.DISTANCE

/** Length of the shortest path between two points (Karney's inverse problem), good to about 15 nanometres. */
export function geodesicMetres(lon0: number, lat0: number, lon1: number, lat1: number): number {
  return wgs84.Inverse(lat0, lon0, lat1, lon1, distanceOnly).s12!
}

/**
 * Length on the ground of the straight lon/lat edge (RFC 7946), longitudes taken as written: 0 to 360 goes round.
 * The arc-length integral by Gauss and Legendre's five points, halving until two halves agree with the whole
 * to 1e-10 of the length. Along a parallel it is longer than the geodesic between the same ends.
 */
export function edgeLengthMetres(lon0: number, lat0: number, lon1: number, lat1: number): number {
  const lonRadians = (lon1 - lon0) * radiansPerDegree
  const latStart = lat0 * radiansPerDegree
  const latRadians = (lat1 - lat0) * radiansPerDegree
  if (lonRadians === 0 && latRadians === 0) return 0
  const speed = (t: number): number => {
    const lat = latStart + t * latRadians
    const sinLat = Math.sin(lat)
    const w2 = 1 - eccentricitySquared * sinLat * sinLat
    const w = Math.sqrt(w2)
    const north = ((equatorialMetres * (1 - eccentricitySquared)) / (w2 * w)) * latRadians
    const east = (equatorialMetres / w) * Math.cos(lat) * lonRadians
    return Math.sqrt(north * north + east * east)
  }
  const halve = (from: number, to: number, whole: number, depth: number): number => {
    const middle = (from + to) / 2
    const left = gauss5(speed, from, middle)
    const right = gauss5(speed, middle, to)
    const sum = left + right
    if (depth === 0 || !(Math.abs(sum - whole) > 1e-10 * sum)) return sum
    return halve(from, middle, left, depth - 1) + halve(middle, to, right, depth - 1)
  }
  return halve(0, 1, gauss5(speed, 0, 1), 30)
}

/** Gauss–Legendre quadrature with five points. Source: Abramowitz & Stegun (1964), table 25.4. */
function gauss5(f: (t: number) => number, from: number, to: number): number {
  const middle = (from + to) / 2
  const half = (to - from) / 2
  const near = half * 0.5384693101056831
  const far = half * 0.906179845938664
  return (
    half *
    (0.5688888888888889 * f(middle) +
      0.47862867049936647 * (f(middle - near) + f(middle + near)) +
      0.23692688505618908 * (f(middle - far) + f(middle + far)))
  )
}
