/** p-values of several tests at once, adjusted by Holm's step-down (Holm 1979, Scandinavian Journal of Statistics 6). */

/** In the order given. Throws RangeError where a p is not within 0 and 1. */
export function holmAdjusted(p: readonly number[]): number[] {
  for (const one of p) if (!(one >= 0 && one <= 1)) throw new RangeError(`a p must lie between 0 and 1: got ${one}`)
  const order = p.map((_, i) => i).sort((a, b) => p[a] - p[b])
  const adjusted: number[] = []
  let most = 0
  order.forEach((i, rank) => {
    most = Math.min(1, Math.max(most, (p.length - rank) * p[i]))
    adjusted[i] = most
  })
  return adjusted
}
