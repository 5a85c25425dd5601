/** p-values adjusted for the number of tests, in the order given. Both allow for ties and return values in [0, 1]. */
import { argsort } from '../math/index.js'

/** Chance of any false alarm (Holm 1979, Scandinavian J. Statistics 6): step-down Bonferroni. */
export function holm(p: readonly number[]): number[] {
  const order = argsort(Float64Array.from(p))
  const adjusted = new Array<number>(p.length)
  let largest = 0
  order.forEach((i, rank) => {
    largest = Math.min(1, Math.max(largest, (p.length - rank) * p[i]))
    adjusted[i] = largest
  })
  return adjusted
}

/** Expected share of false alarms (Benjamini & Hochberg 1995, JRSS B 57): step-up. */
export function benjaminiHochberg(p: readonly number[]): number[] {
  const order = argsort(Float64Array.from(p))
  const adjusted = new Array<number>(p.length)
  let smallest = 1
  for (let rank = p.length - 1; rank >= 0; rank--) {
    const i = order[rank]
    smallest = Math.min(smallest, (p.length / (rank + 1)) * p[i])
    adjusted[i] = smallest
  }
  return adjusted
}
