/**
 * Compensated sums (Neumaier 1974, ZAMM 54): the running rounding error is carried beside the sum.
 * Error about one unit in the last place of the result plus n·2⁻¹⁰⁶ of the sum of magnitudes.
 */

/** Sum of the values; 0 when there are none. NaN and infinities behave as in a plain sum. */
export function sum(values: ArrayLike<number>): number {
  let total = 0
  let lost = 0
  for (let i = 0; i < values.length; i++) {
    const value = values[i]
    const next = total + value
    lost += Math.abs(total) >= Math.abs(value) ? total - next + value : value - next + total
    total = next
  }
  return Number.isFinite(total) ? total + lost : total
}

/** Arithmetic mean of the values; NaN when there are none. */
export function meanOf(values: ArrayLike<number>): number {
  return sum(values) / values.length
}
