/** Shifted Legendre polynomials P_0, P_1, … on [0, 1]: P_k(t) = (Legendre P_k)(2t − 1), orthogonal there, P_k(1) = 1. */

/**
 * Writes P_0(t) … P_degree(t) into out[0 … degree], by the three-term recurrence
 * (k + 1) P_{k+1} = (2k + 1)(2t − 1) P_k − k P_{k−1} (DLMF 18.9.1). t in [0, 1] for the usual accuracy, any t allowed.
 */
export function legendreShifted(degree: number, t: number, out: Float64Array): void {
  if (!(out.length > degree)) throw new RangeError(`degree ${degree} needs ${degree + 1} places, out has ${out.length}`)
  const u = 2 * t - 1
  out[0] = 1
  if (degree > 0) out[1] = u
  for (let k = 1; k < degree; k++) out[k + 1] = ((2 * k + 1) * u * out[k] - k * out[k - 1]) / (k + 1)
}
