/** A root in one dimension; f is evaluated only inside [low, high]. */

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
