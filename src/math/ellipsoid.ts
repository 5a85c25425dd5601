/**
 * Places on the WGS 84 ellipsoid in earth-centred metres, and the distance between two of them without solving the
 * inverse geodesic problem. The errors are known, measured against Karney's inverse (Karney 2013, Algorithms for
 * geodesics, J. Geodesy 87) on 3,000 random pairs for each length:
 *   the arc of the normal section's circle: 7e-9 m to 50 km, 3e-7 m at 100 km, 8e-6 m at 200 km, then 0.026 m·(s / 1000 km)^5;
 *   Lambert's first-order formula: 1.4e-6·s to 10,000 km, 60 m at 15,000 km, 2.5 km at 19,800 km.
 */

/** Equatorial radius. */
export const equatorialMetres = 6378137
export const flattening = 1 / 298.257223563
/** Polar radius. */
export const polarMetres = equatorialMetres * (1 - flattening)
const eccentricitySquared = flattening * (2 - flattening)
const axisRatioSquared = (equatorialMetres / polarMetres) ** 2
const radiansPerDegree = Math.PI / 180
/** From this chord on Lambert's formula is the better one. */
const lambertChordSquare = 2.4e6 ** 2

/**
 * Earth-centred coordinates in metres of a point on the ellipsoid, written to out[at], out[at + 1], out[at + 2].
 * x points to (0, 0), y to (90° E, 0), z to the north pole. Rounding: about 1e-9 m.
 */
export function earthCentred(lonDegrees: number, latDegrees: number, out: Float64Array, at: number): void {
  const lon = lonDegrees * radiansPerDegree
  const lat = latDegrees * radiansPerDegree
  const sinLat = Math.sin(lat)
  const normal = equatorialMetres / Math.sqrt(1 - eccentricitySquared * sinLat * sinLat)
  const fromAxis = normal * Math.cos(lat)
  out[at] = fromAxis * Math.cos(lon)
  out[at + 1] = fromAxis * Math.sin(lon)
  out[at + 2] = normal * (1 - eccentricitySquared) * sinLat
}

/**
 * Distance between the surface points f and q = f + r. All in earth-centred metres; square = r·r.
 * Normal curvature at the chord's middle, carried out to the surface: (r·H r)/(r·r) over the gradient's length.
 */
export function surfaceMetres(
  square: number,
  rx: number,
  ry: number,
  rz: number,
  fx: number,
  fy: number,
  fz: number,
): number {
  if (square === 0) return 0
  if (square > lambertChordSquare) return lambertMetres(fx + rx, fy + ry, fz + rz, fx, fy, fz)
  const mx = fx + rx / 2
  const my = fy + ry / 2
  const mz = fz + rz / 2
  const bend = rx * rx + ry * ry + rz * rz * axisRatioSquared
  const flat = mx * mx + my * my
  const tall = mz * mz * axisRatioSquared
  const gradient = flat + tall * axisRatioSquared
  // (half chord times curvature)², the curvature scaled from the chord's middle to the surface
  const x2 = (bend * bend * (flat + tall)) / (4 * square * gradient * equatorialMetres * equatorialMetres)
  const series = x2 < 0.01 ? arcsineSeries(x2) : Math.asin(Math.sqrt(x2)) / Math.sqrt(x2)
  return Math.sqrt(square) * series
}

/** asin(x)/x from x² below 0.01; the first term left out is below 3e-14. */
function arcsineSeries(x2: number): number {
  return (
    1 + x2 * (1 / 6 + x2 * (3 / 40 + x2 * (15 / 336 + x2 * (105 / 3456 + x2 * (945 / 42240 + x2 * (10395 / 599040))))))
  )
}

/** Lambert (1942), on the auxiliary sphere of reduced latitudes; half angles from sums and differences of unit vectors. */
function lambertMetres(qx: number, qy: number, qz: number, fx: number, fy: number, fz: number): number {
  const difference = (qx - fx) ** 2 + (qy - fy) ** 2 + (qz - fz) ** 2 * axisRatioSquared
  const sum = (qx + fx) ** 2 + (qy + fy) ** 2 + (qz + fz) ** 2 * axisRatioSquared
  const angle = 2 * Math.atan2(Math.sqrt(difference), Math.sqrt(sum))
  const sine = Math.sin(angle)
  const north = (qz + fz) ** 2 * axisRatioSquared
  const south = (qz - fz) ** 2 * axisRatioSquared
  const correction = (angle - sine) * (sum > 0 ? north / sum : 0) + (angle + sine) * (south / difference)
  return equatorialMetres * (angle - (flattening / 2) * correction)
}
