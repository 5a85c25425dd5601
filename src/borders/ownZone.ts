import type { Border } from './border.js'

/** Does a unit serve the borders of its own zone alone, so that the piece tells its side? */
export function isOwnZoneOnly({ doses, isEqualStatus }: Pick<Border, 'doses' | 'isEqualStatus'>): boolean {
  return doses !== undefined || isEqualStatus === true
}
