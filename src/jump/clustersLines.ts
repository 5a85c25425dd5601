/**
 * The part that levels of lines have in a bias-reduced clustered variance (clustersReduced.ts), without a dummy stored.
 * With Δ_c = Σ k, s_c = Σ k²/Δ_c² and t_c = Σ k² r over the units of line c (r their rows, freed of the line's means):
 * H has k_j/Δ_c, HH' has s_c and (t_c'M r_i + t_c'M r_j)/Δ_c, for units i and j of line c, beside what the rows give.
 */

/** By line code. */
export interface LineTerms {
  /** Δ */
  readonly weight: Float64Array
  /** s */
  readonly spread: Float64Array
  /** t, lines × columns. */
  readonly squared: Float64Array
}

/** Sums over the units of a cluster against a vector u: what u_g'[(I−H)(I−H)']_gh u_h is made of. */
export interface ClusterSums {
  /** R'u, then R'Wu − Σ_c (Σ_{i∈c} u_i) t_c/Δ_c. */
  readonly v: Float64Array
  /** Codes of the lines that the cluster has units of. */
  readonly lines: Int32Array
  /** Σ u by line. */
  readonly plain: Float64Array
  /** Σ ku by line. */
  readonly weighted: Float64Array
}

export function lineTermsOf(columns: number, rows: Float64Array, k: Float64Array, line: Int32Array): LineTerms {
  let lines = 0
  for (const code of line) lines = Math.max(lines, code + 1)
  const weight = new Float64Array(lines)
  const spread = new Float64Array(lines)
  const squared = new Float64Array(lines * columns)
  for (let i = 0; i < k.length; i++) {
    const c = line[i]
    const square = k[i] * k[i]
    weight[c] += k[i]
    spread[c] += square
    for (let a = 0; a < columns; a++) squared[c * columns + a] += square * rows[i * columns + a]
  }
  for (let c = 0; c < lines; c++) if (weight[c] > 0) spread[c] /= weight[c] * weight[c]
  return { weight, spread, squared }
}

/** Takes Σ_c (Σ_{i∈c} u_i) t_c/Δ_c off the second half of v. */
export function takeOffLines({ v, lines, plain }: ClusterSums, { weight, squared }: LineTerms): void {
  const columns = v.length / 2
  for (let c = 0; c < lines.length; c++) {
    const share = plain[c] / weight[lines[c]]
    for (let a = 0; a < columns; a++) v[columns + a] -= share * squared[lines[c] * columns + a]
  }
}

/** What line c adds to B u for each unit of it: `added` less k times `taken`. `crossed` is M R'u. */
export function lineShares(
  { lines, plain, weighted }: ClusterSums,
  { weight, spread, squared }: LineTerms,
  crossed: Float64Array,
): { added: Float64Array; taken: Float64Array } {
  const columns = crossed.length
  const added = new Float64Array(lines.length)
  const taken = new Float64Array(lines.length)
  for (let c = 0; c < lines.length; c++) {
    const line = lines[c]
    let across = -weighted[c]
    for (let a = 0; a < columns; a++) across += squared[line * columns + a] * crossed[a]
    added[c] = across / weight[line] + spread[line] * plain[c]
    taken[c] = plain[c] / weight[line]
  }
  return { added, taken }
}

/** Number of ordered pairs of clusters that share a line, counted once for each line they share. */
export function pairsOverLines(sums: readonly ClusterSums[]): number {
  const count = new Map<number, number>()
  for (const { lines } of sums) for (const line of lines) count.set(line, (count.get(line) ?? 0) + 1)
  let pairs = 0
  for (const clusters of count.values()) pairs += clusters * clusters
  return pairs
}

/** Visits ordered pairs of clusters that share a line, each with itself too: y_gh = Σ_c s_c α_g α_h − (α_g β_h + β_g α_h)/Δ_c. */
export function eachMeeting(
  sums: readonly ClusterSums[],
  { weight, spread }: LineTerms,
  visit: (g: number, h: number, y: number) => void,
): void {
  const holders = new Map<number, { h: number; at: number }[]>()
  sums.forEach(({ lines }, h) => {
    lines.forEach((line, at) => {
      const known = holders.get(line)
      if (known) known.push({ h, at })
      else holders.set(line, [{ h, at }])
    })
  })
  const y = new Float64Array(sums.length)
  const isMet = new Uint8Array(sums.length)
  for (let g = 0; g < sums.length; g++) {
    const { lines, plain, weighted } = sums[g]
    const met: number[] = []
    for (let c = 0; c < lines.length; c++) {
      const line = lines[c]
      const onPlain = spread[line] * plain[c] - weighted[c] / weight[line]
      const onWeighted = -plain[c] / weight[line]
      for (const { h, at } of holders.get(line) as { h: number; at: number }[]) {
        if (isMet[h] === 0) {
          isMet[h] = 1
          met.push(h)
        }
        y[h] += onPlain * sums[h].plain[at] + onWeighted * sums[h].weighted[at]
      }
    }
    for (const h of met) {
      visit(g, h, y[h])
      y[h] = 0
      isMet[h] = 0
    }
  }
}
