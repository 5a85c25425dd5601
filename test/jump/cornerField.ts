/**
 * Units around a corner (CHECKS, "A corner"): the treated zone is the first quadrant, units are uniform in the disc of
 * radius h around the border point (d, 0), d = dOverH·h. Treated outcomes are the first coordinate, untreated ones d, both
 * plus noise: the true jump at the point is 0. Metres with h = 1000; outcomes are in units of h.
 */
import type { PlaneEntries } from '../../src/jump/index.js'
import { streamOf } from '../../src/math/index.js'

export const radiusMetres = 1000

/** d/h, and what a distance-only local linear fit with the triangular kernel is off by, in units of h: CHECKS, closed form. */
export const distanceOnlyBias = [
  [0.1, -0.0451],
  [0.3, -0.1252],
  [0.5, -0.1326],
  [0.7, -0.0682],
  [1, 0],
] as const

export function cornerField(dOverH: number, n: number, noise: number, stream: number): PlaneEntries {
  const random = streamOf(20260103, stream)
  const eastMetres = new Float64Array(n)
  const northMetres = new Float64Array(n)
  const treated = new Uint8Array(n)
  const y = new Float64Array(n)
  for (let i = 0; i < n; i++) {
    const r = radiusMetres * Math.sqrt(random.next())
    const angle = 2 * Math.PI * random.next()
    eastMetres[i] = r * Math.cos(angle)
    northMetres[i] = r * Math.sin(angle)
    const first = dOverH + eastMetres[i] / radiusMetres
    treated[i] = first > 0 && northMetres[i] > 0 ? 1 : 0
    y[i] = (treated[i] === 1 ? first : dOverH) + noise * random.normal()
  }
  return { eastMetres, northMetres, treated, y, unit: Int32Array.from(y, (_, i) => i) }
}
