/**
 * An L-shaped border in the plane with units on both sides: from (−L, 0) to (0, 0) to (0, L), treated north and west of it.
 * Points at equal spacing, units uniform in the square, outcomes a smooth surface plus noise.
 */

import { streamOf } from '../../src/math/index.js'
import type { AlongPoint, AlongUnits } from '../../src/thresholds/index.js'

export interface Field {
  readonly points: readonly AlongPoint[]
  readonly places: readonly (readonly [number, number])[]
  readonly units: AlongUnits
  readonly east: Float64Array
  readonly north: Float64Array
}

export interface FieldOptions {
  readonly n: number
  readonly pointsPerArm: number
  readonly noise: number
  readonly stream: number
  /** The effect at a place of the border. */
  readonly effect: (east: number, north: number) => number
  /** Outcome without treatment, but for the noise. */
  readonly surface?: (east: number, north: number) => number
}

/** Length of an arm; the square reaches as far again. */
export const armMetres = 5000

export function fieldOf({ n, pointsPerArm, noise, stream, effect, surface = () => 0 }: FieldOptions): Field {
  const random = streamOf(20260104, stream)
  const east = new Float64Array(n)
  const north = new Float64Array(n)
  const treated = new Uint8Array(n)
  const y = new Float64Array(n)
  for (let i = 0; i < n; i++) {
    east[i] = armMetres * (2 * random.next() - 1)
    north[i] = armMetres * (2 * random.next() - 1)
    treated[i] = east[i] < 0 && north[i] > 0 ? 1 : 0
    y[i] = surface(east[i], north[i]) + treated[i] * effect(east[i], north[i]) + noise * random.normal()
  }
  const places: [number, number][] = []
  for (let k = 0; k < pointsPerArm; k++) places.push([-armMetres + ((k + 0.5) * armMetres) / pointsPerArm, 0])
  for (let k = 0; k < pointsPerArm; k++) places.push([0, ((k + 0.5) * armMetres) / pointsPerArm])
  const points = places.map((_, k) => ({ id: `point ${k + 1}`, lengthMetres: armMetres / pointsPerArm }))
  const units = { near: nearIn(places, east, north), unit: Int32Array.from(y, (_, i) => i), treated, y }
  return { points, places, units, east, north }
}

/** Every unit tried: what an index must agree with. */
export function nearIn(
  places: readonly (readonly [number, number])[],
  east: Float64Array,
  north: Float64Array,
): AlongUnits['near'] {
  return (point, radiusMetres) => {
    const index: number[] = []
    const [e0, n0] = places[point]
    for (let i = 0; i < east.length; i++) if (Math.hypot(east[i] - e0, north[i] - n0) <= radiusMetres) index.push(i)
    return {
      index: Int32Array.from(index),
      eastMetres: Float64Array.from(index, (i) => east[i] - e0),
      northMetres: Float64Array.from(index, (i) => north[i] - n0),
    }
  }
}
