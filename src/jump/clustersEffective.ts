/**
 * The effective number of clusters of a linear estimate.
 * Source: Carter, Schnepel & Steigerwald 2017, Review of Economics and Statistics: G* = G/(1 + Γ) = (Σ γ_g)²/Σ γ_g², Γ the
 * squared coefficient of variation of γ_g = l_g'Ω_g l_g. Their bound takes noise that is all in common within a
 * cluster. Here it is in common among a cluster's units on one side of the line, so that the two parts of a cluster that
 * straddles the line do not cancel: γ_g = Σ_sides (Σ_{i∈g} l_i)².
 */
/**
 * `weights` and `codes` by side; `kind` (by code) says which cluster a code belongs to, else it is the cluster's own. At most
 * the number of clusters, and that number where all count alike.
 */
export function effectiveClusters(
  weights: readonly Float64Array[],
  codes: readonly Int32Array[],
  kind?: Int32Array,
): number {
  const gamma = new Map<number, number>()
  weights.forEach((l, s) => {
    const sums = new Map<number, number>()
    for (let i = 0; i < l.length; i++) {
      const cluster = kind ? kind[codes[s][i]] : codes[s][i]
      sums.set(cluster, (sums.get(cluster) ?? 0) + l[i])
    }
    for (const [cluster, sum] of sums) gamma.set(cluster, (gamma.get(cluster) ?? 0) + sum * sum)
  })
  let total = 0
  let squares = 0
  for (const value of gamma.values()) {
    total += value
    squares += value * value
  }
  return (total * total) / squares
}
