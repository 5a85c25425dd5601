/** On which side of its cutoff a score lies, and how far (METHODS section 1). */

export type TreatedSide = 'at-or-above' | 'above' | 'at-or-below' | 'below'

/** +1 where a higher score is treated, -1 where a lower one is: x = direction * (score - cutoff). */
export function directionOf(treated: TreatedSide): 1 | -1 {
  return treated === 'at-or-above' || treated === 'above' ? 1 : -1
}

/** Whether a unit exactly at its cutoff is treated. */
export function isTreatedAtCutoff(treated: TreatedSide): boolean {
  return treated === 'at-or-above' || treated === 'at-or-below'
}

/** Signed distances of scores from one cutoff, positive where treated, and sides; no score may be missing. */
export function placeAgainst(
  score: Float64Array,
  cutoff: number,
  treated: TreatedSide,
): { readonly x: Float64Array; readonly treated: Uint8Array } {
  const direction = directionOf(treated)
  const atCutoff = isTreatedAtCutoff(treated) ? 1 : 0
  const x = score.map((value) => direction * (value - cutoff))
  return { x, treated: Uint8Array.from(x, (value) => (value > 0 ? 1 : value < 0 ? 0 : atCutoff)) }
}
