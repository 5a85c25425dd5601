/** Order statistics and spread of one column, as METHODS section 5 wants them. */
import { meanOf } from './sums.js'

/**
 * Quantile of values already in ascending order, by linear interpolation between the order statistics at
 * position (n − 1)·p (Hyndman & Fan 1996, definition 7). 0 ≤ p ≤ 1; throws RangeError on an empty column.
 */
export function quantileOfSorted(sorted: Float64Array, p: number): number {
  if (!(p >= 0 && p <= 1)) throw new RangeError(`a quantile needs a probability in [0, 1], not ${p}`)
  if (sorted.length === 0) throw new RangeError('a quantile needs at least one value')
  const position = (sorted.length - 1) * p
  const below = Math.floor(position)
  const share = position - below
  if (share === 0) return sorted[below]
  return sorted[below] + share * (sorted[below + 1] - sorted[below])
}

/** Standard deviation with divisor n − 1, in two passes with compensated sums; NaN for fewer than two values. */
export function standardDeviation(values: Float64Array): number {
  const n = values.length
  if (n < 2) return Number.NaN
  const mean = meanOf(values)
  const squares = new Float64Array(n)
  let drift = 0
  for (let i = 0; i < n; i++) {
    const deviation = values[i] - mean
    drift += deviation
    squares[i] = deviation * deviation
  }
  squares[0] -= (drift * drift) / n
  return Math.sqrt(Math.max(0, meanOf(squares) * (n / (n - 1))))
}
