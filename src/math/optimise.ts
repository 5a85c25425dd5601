/** A minimum and a root in one dimension; f is evaluated only inside [low, high]. */

const goldenRatio = (Math.sqrt(5) - 1) / 2

/**
 * Place x of the smallest value met of a function on [low, high], 0 < low ≤ high, that may have several minima: a geometric
 * grid of `points`, then golden section (Kiefer 1953) between the neighbours of the lowest grid points that are no higher
 * than both neighbours (three at most, and none more than 2% above the lowest), to `tolerance` relative to x. A function
 * may be Infinity in places; undefined where it is everywhere.
 */
export function lowestOn(
  f: (x: number) => number,
  low: number,
  high: number,
  points: number,
  tolerance: number,
): number | undefined {
  if (!(low > 0 && low <= high)) throw new RangeError(`the interval runs from ${low} to ${high}`)
  if (!(points >= 2 && tolerance > 0)) throw new RangeError(`${points} points, tolerance ${tolerance}`)
  let best: number | undefined
  let lowest = Number.POSITIVE_INFINITY
  const tried = (x: number) => {
    const value = f(x)
    if (value < lowest) {
      lowest = value
      best = x
    }
    return value
  }
  const place = (i: number) => (i === points - 1 ? high : low * (high / low) ** (i / (points - 1)))
  const values = Float64Array.from({ length: points }, (_, i) => tried(place(i)))
  const lowestOfGrid = lowest
  const at = (i: number) => (i < 0 || i >= points ? Number.POSITIVE_INFINITY : values[i])
  Array.from(values.keys())
    .filter((i) => at(i) < Number.POSITIVE_INFINITY && at(i) <= at(i - 1) && at(i) <= at(i + 1))
    .sort((i, j) => values[i] - values[j])
    .slice(0, 3)
    .filter((i) => values[i] - lowestOfGrid <= 0.02 * Math.abs(lowestOfGrid))
    .forEach((i) => {
      goldenSection(tried, place(Math.max(0, i - 1)), place(Math.min(points - 1, i + 1)), tolerance)
    })
  return best
}

function goldenSection(f: (x: number) => number, from: number, to: number, tolerance: number): void {
  let [low, high] = [from, to]
  let left = high - goldenRatio * (high - low)
  let right = low + goldenRatio * (high - low)
  let atLeft = f(left)
  let atRight = f(right)
  while (high - low > tolerance * high) {
    if (atLeft <= atRight) {
      high = right
      right = left
      atRight = atLeft
      left = high - goldenRatio * (high - low)
      atLeft = f(left)
    } else {
      low = left
      left = right
      atLeft = atRight
      right = low + goldenRatio * (high - low)
      atRight = f(right)
    }
  }
}

/**
 * Root of f in [low, high] by Brent's method (Brent 1973, Algorithms for Minimization without Derivatives, chapter 4):
 * inverse quadratic or secant steps kept inside a shrinking bracket, bisection otherwise.
 * The answer is within `tolerance` (absolute) plus four units in the last place of a change of sign.
 * Throws RangeError where f(low) and f(high) have the same sign or either is NaN.
 */
export function rootBetween(f: (x: number) => number, low: number, high: number, tolerance: number): number {
  if (!(tolerance >= 0)) throw new RangeError(`the tolerance must not be negative, not ${tolerance}`)
  let a = low
  let b = high
  let fa = f(a)
  let fb = f(b)
  if (fa === 0) return a
  if (fb === 0) return b
  if (!((fa < 0 && fb > 0) || (fa > 0 && fb < 0))) {
    throw new RangeError(`no change of sign between ${low} (value ${fa}) and ${high} (value ${fb})`)
  }
  let c = a
  let fc = fa
  let step = b - a
  let before = step
  for (;;) {
    if (Math.abs(fc) < Math.abs(fb)) {
      a = b
      b = c
      c = a
      fa = fb
      fb = fc
      fc = fa
    }
    const close = 2 * Number.EPSILON * Math.abs(b) + tolerance / 2
    const half = (c - b) / 2
    if (Math.abs(half) <= close || fb === 0) return b
    const bold = Math.abs(before) >= close && Math.abs(fa) > Math.abs(fb) ? interpolatedStep(a, b, c, fa, fb, fc) : half
    const accepted = bold * Math.sign(half) > 0 && Math.abs(bold) < Math.min(1.5 * Math.abs(half), Math.abs(before) / 2)
    before = accepted ? step : half
    step = accepted ? bold : half
    a = b
    fa = fb
    b += Math.abs(step) > close ? step : close * Math.sign(half)
    fb = f(b)
    if (fb > 0 === fc > 0) {
      c = a
      fc = fa
      step = b - a
      before = step
    }
  }
}

/** Step from b to the root of the inverse quadratic through three points, or of the secant where a = c. */
function interpolatedStep(a: number, b: number, c: number, fa: number, fb: number, fc: number): number {
  const s = fb / fa
  if (a === c) return ((c - b) * s) / (s - 1)
  const q = fa / fc
  const r = fb / fc
  return (s * ((c - b) * q * (q - r) - (b - a) * (r - 1))) / -((q - 1) * (r - 1) * (s - 1))
}
