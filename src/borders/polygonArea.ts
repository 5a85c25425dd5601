/** Areas on the WGS 84 ellipsoid of rings whose edges are straight in longitude and latitude (RFC 7946). */
import geographic from 'geographiclib-geodesic'

const wgs84 = geographic.Geodesic.WGS84

/** Edges are cut into parts about this long at most, each then a geodesic that strays from its edge by a millimetre. */
const partMetres = 250
const metresPerDegree = 111_320

/**
 * Signed area in square metres, counter-clockwise positive. The ring may be closed or open.
 * Source: Karney (2013), section 6. Between 70° S and 70° N the cut edges leave about a millimetre times the length of
 * the ring at most.
 */
export function ringSquareMetres(ring: readonly (readonly number[])[]): number {
  const polygon = wgs84.Polygon(false)
  ring.forEach(([lon0, lat0], i) => {
    const [lon1, lat1] = ring[(i + 1) % ring.length]
    const [dLon, dLat] = [lon1 - lon0, lat1 - lat0]
    const metres = metresPerDegree * Math.hypot(dLat, dLon * Math.cos((Math.min(Math.abs(lat0), 89) * Math.PI) / 180))
    const parts = Math.max(1, Math.ceil(metres / partMetres))
    for (let part = 0; part < parts; part++) {
      polygon.AddPoint(lat0 + (part / parts) * dLat, lon0 + (part / parts) * dLon)
    }
  })
  return polygon.Compute(false, true).area ?? 0
}
