/** p-values beside those adjusted for the number of tests of their kind. */
import { benjaminiHochberg, holm } from '../checks/index.js'

export interface Adjusted {
  /** Chance of any false alarm (Holm). */
  readonly p_holm: number
  /** Share of false alarms to expect (Benjamini & Hochberg). */
  readonly p_bh: number
}

/** In the order given. */
export function adjustedFor(p: readonly number[]): Adjusted[] {
  const [one, two] = [holm(p), benjaminiHochberg(p)]
  return p.map((_, i) => ({ p_holm: one[i], p_bh: two[i] }))
}
