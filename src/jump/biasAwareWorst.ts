/**
 * The worst bias of a linear estimate over all curves of bounded second derivative.
 * Source: Armstrong & Kolesár 2018, 2020; METHODS section 6. On one side, with weights l exact for straight lines,
 * Σ l_i m(t_i) − m(0) Σ l_i = ∫ m''(t) w(t) dt, w(t) = Σ_{t_i>t} l_i (t_i − t), so |m''| ≤ M leaves at most M ∫|w|, which
 * the curve with m'' = M·sign(w) attains.
 */

/**
 * ∫|w| of one side, to be multiplied by M. t ascending distances ≥ 0, l the weights of the first of them. One inward pass: w
 * is straight between neighbouring distances, and a segment on which it changes sign is cut there. Exact but for rounding.
 */
export function worstBiasOf(t: Float64Array, l: Float64Array): number {
  let total = 0
  // at t[i] from outside: w, and the sum of the weights farther out, which is −w'
  let w = 0
  let slope = 0
  for (let i = l.length - 1; i >= 0; i--) {
    slope += l[i]
    const inner = i > 0 ? t[i - 1] : 0
    const width = t[i] - inner
    if (width === 0) continue
    const next = w + slope * width
    const size = Math.abs(w) + Math.abs(next)
    const isSameSign = w * next >= 0
    if (size > 0) total += isSameSign ? (size * width) / 2 : ((w * w + next * next) * width) / (2 * size)
    w = next
  }
  return total
}
