/**
 * Kernels and their constants.
 * Source: Fan & Gijbels 1996, Local Polynomial Modelling and Its Applications; METHODS sections 2 and 5.
 */

export type Kernel = 'triangular' | 'epanechnikov' | 'uniform'

/** Constant of the pilot bandwidth a0 = C · spread · n^(-1/5). */
export const pilotConstant: Readonly<Record<Kernel, number>> = {
  triangular: 2.576,
  epanechnikov: 2.34,
  uniform: 1.843,
}

/** K(u) for u = |x|/h >= 0: triangular max(0, 1-u), Epanechnikov 3/4 max(0, 1-u²), uniform 1/2 on u <= 1. */
export function kernelValue(kernel: Kernel, u: number): number {
  if (kernel === 'triangular') return u < 1 ? 1 - u : 0
  if (kernel === 'epanechnikov') return u < 1 ? 0.75 * (1 - u * u) : 0
  return u <= 1 ? 0.5 : 0
}

/** Number of leading elements of the ascending distances t that have positive kernel weight at bandwidth h. */
export function countWithin(t: Float64Array, h: number, kernel: Kernel): number {
  const atEdge = kernel === 'uniform'
  let low = 0
  let high = t.length
  while (low < high) {
    const middle = (low + high) >> 1
    if (t[middle] < h || (atEdge && t[middle] === h)) low = middle + 1
    else high = middle
  }
  return low
}
