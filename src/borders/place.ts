/** Places units on the border in one go, where no rule asks for facts beyond the distance. */
import type { Border } from './border.js'
import { type Eligible, eligible } from './eligible.js'
import { measureUnits } from './measured.js'

export type BorderPlacement = Pick<Eligible, 'placement' | 'ground' | 'setAside'>

export interface PlaceOptions {
  /** Metres in one unit of the study's length. */
  readonly metresPerUnit: number
  /** Units farther from the border are set aside; absent: none. */
  readonly reachMetres?: number
}

/**
 * `measureUnits`, then `eligible` with every piece and the side by the map. lon, lat: degrees, one pair per unit, NaN
 * where missing. Throws RangeError where the lists differ in length or an option is out of range.
 */
export function placeOnBorder(
  border: Border,
  lon: Float64Array,
  lat: Float64Array,
  { metresPerUnit, reachMetres }: PlaceOptions,
  progress?: (done: number) => void,
): BorderPlacement {
  return eligible(border, measureUnits(border, lon, lat, progress), { metresPerUnit, reachMetres })
}
