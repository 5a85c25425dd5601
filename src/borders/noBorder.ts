/** What to say where the zones that should have a border share none. */
import type { Problem } from '../problem.js'
import type { Boundaries } from './boundaries.js'
import { type Gap, smallestGap } from './gap.js'
import { placeText } from './geojson.js'
import { coincidentMetres } from './nearness.js'

/** `splits`: zones in two groups, once or more often; the smallest gap between two groups is the one that is named. */
export function noBorder(
  file: string,
  boundaries: Boundaries,
  who: string,
  splits: readonly Uint8Array[],
  snapMetres: number,
): Problem {
  const what = `${who} share no border`
  const gap = splits
    .filter((split) => split.includes(0) && split.includes(1))
    .map((split) => smallestGap(boundaries, split))
    .reduce<Gap | undefined>((least, next) => (least && least.metres <= next.metres ? least : next), undefined)
  if (!gap) return { file, what, found: 'there is no land outside them', todo: 'leave at least one zone untreated' }
  const place = placeText(gap.lon, gap.lat)
  if (gap.metres <= Math.max(snapMetres, coincidentMetres))
    return { file, what, found: `they meet only at a corner, near ${place}`, todo: 'check which zones are treated' }
  const metres = gap.metres >= 10 ? Math.ceil(gap.metres) : Number(gap.metres.toPrecision(2))
  const todo = `if they are meant to touch, set snap above ${metres}; now it is ${snapMetres}`
  return { file, what, found: `the smallest gap is ${metres} m, near ${place}`, todo }
}
