/**
 * Student, chi-square and folded normal distributions. Tails are accurate relative to themselves, quantiles come from
 * Newton steps on the logarithm of the smaller tail. Degrees of freedom are any positive real, Infinity included.
 * Relative error against R 4.2 (test/golden/math) under 1e-12, tails down to 1e-300 included.
 * Arguments out of range, NaN among them, throw RangeError.
 */

import { normalCdf, normalDensity, normalQuantile, normalUpper } from './normal.js'
import { betaFraction, halfStepGammaRatio, incompleteGamma } from './specialFunctions.js'

/** Beyond this many degrees of freedom Student's t and the normal agree to every digit (they differ by z⁴/4ν). */
const manyDegrees = 1e20

/** P(|T| ≥ |t|), the two-sided p-value, accurate relative to itself however small. */
export function studentTwoSidedP(t: number, df: number): number {
  return studentTails(t, df).both
}

/** The t with P(T ≤ t) = p, relative accuracy about 1e-14; −Infinity at 0, Infinity at 1 and beyond 1e308. */
export function studentQuantile(p: number, df: number): number {
  checkDegrees(df)
  checkProbability(p)
  if (p === 0.5) return 0
  if (df >= manyDegrees || p === 0 || p === 1) return normalQuantile(p)
  const sign = p < 0.5 ? -1 : 1
  const tail = p < 0.5 ? p : 1 - p
  return sign * (tail > 0.25 ? studentFromCentre(2 * Math.abs(p - 0.5), df) : studentFromTail(2 * tail, df))
}

/** P(X > x) of chi-square with df degrees of freedom; 1 for x ≤ 0. */
export function chiSquareUpper(x: number, df: number): number {
  if (!(df > 0 && df < Number.POSITIVE_INFINITY)) throw new RangeError(`degrees of freedom are positive, not ${df}`)
  return x <= 0 ? 1 : incompleteGamma(df / 2, x / 2).upper
}

/** P(X > x) of Fisher's F with a whole number of degrees of freedom above, any positive number below; 1 for x ≤ 0. */
export function fisherUpper(x: number, above: number, below: number): number {
  checkDegrees(below)
  if (!(Number.isSafeInteger(above) && above >= 1))
    throw new RangeError(`degrees of freedom above are 1, 2, 3, …, not ${above}`)
  if (Number.isNaN(x)) throw new RangeError('F needs a number, not NaN')
  if (x <= 0) return 1
  const [a, b] = [below / 2, above / 2]
  const share = below / (below + above * x)
  const rest = (above * x) / (below + above * x)
  // Γ(a + b)/(Γ(a)Γ(b)) in half steps, from Γ(½) = √π
  let log = a * Math.log(share) + b * Math.log(rest) - Math.log(Math.PI) / 2 + Math.log(halfStepGammaRatio(a))
  for (let k = 1; k < above; k++) log += Math.log(halfStepGammaRatio(a + k / 2) / halfStepGammaRatio(k / 2))
  const front = Math.exp(log)
  return x >= 1 ? front / betaFraction(a, b, share, rest) : 1 - front / betaFraction(b, a, rest, share)
}

/**
 * The q ≥ 0 with P(|N(t, 1)| ≤ q) = probability: the critical value of a bias-aware interval whose worst bias is
 * t standard errors (Armstrong & Kolesár 2018). Even in t; Newton steps kept inside a bracket.
 */
export function foldedNormalQuantile(probability: number, t: number): number {
  checkProbability(probability)
  if (Number.isNaN(t)) throw new RangeError('the folded normal needs a mean, not NaN')
  const mean = Math.abs(t)
  if (probability === 0) return 0
  if (probability === 1 || mean === Number.POSITIVE_INFINITY) return Number.POSITIVE_INFINITY
  const spread = -normalQuantile((1 - probability) / 2)
  let low = Math.max(mean + normalQuantile(probability), spread)
  let high = mean + spread
  let q = low
  for (let step = 0; step < 200 && high > low; step++) {
    const excess =
      probability > 0.5
        ? 1 - probability - normalUpper(q - mean) - normalUpper(q + mean)
        : normalCdf(q - mean) - normalCdf(-q - mean) - probability
    if (excess < 0) low = q
    else high = q
    const density = normalDensity(q - mean) + normalDensity(q + mean)
    const newton = q - excess / density
    const next = newton >= low && newton <= high ? newton : (low + high) / 2
    if (Math.abs(next - q) <= 2 * Number.EPSILON * q) return next
    q = next
  }
  return q
}

interface StudentTails {
  /** P(|T| ≥ |t|) */
  readonly both: number
  /** P(|T| < |t|) */
  readonly centre: number
  /** |t| times the density of |T| at |t| */
  readonly front: number
}

/** Both parts of |T|, by a series in t²/(ν + t²) near the centre and by the beta function's continued fraction outside. */
function studentTails(t: number, df: number): StudentTails {
  checkDegrees(df)
  if (Number.isNaN(t)) throw new RangeError('Student’s t needs a number, not NaN')
  const magnitude = Math.abs(t)
  if (magnitude === 0) return { both: 1, centre: 0, front: 0 }
  if (magnitude === Number.POSITIVE_INFINITY) return { both: 0, centre: 1, front: 0 }
  if (df >= manyDegrees) {
    const both = 2 * normalUpper(magnitude)
    return { both, centre: 1 - both, front: 2 * magnitude * normalDensity(magnitude) }
  }
  const a = df / 2
  const scaled = magnitude / Math.sqrt(df)
  const x = 1 / (1 + scaled * scaled)
  const y = scaled > 1 ? 1 / (1 + 1 / scaled / scaled) : scaled * scaled * x
  const logOnePlus = scaled > 1e100 ? 2 * Math.log(scaled) : Math.log1p(scaled * scaled)
  const front = 2 * halfStepGammaRatio(a) * Math.exp(-a * logOnePlus) * Math.sqrt(y / Math.PI)
  if ((a + 0.5) * y < 2 && y < 0.5) {
    const centre = front * centreSeries(a, y)
    return { both: 1 - centre, centre, front }
  }
  const both = front / (2 * betaFraction(a, 0.5, x, y))
  return { both, centre: 1 - both, front }
}

/** Σ (a + ½)_n / (3/2)_n y^n (DLMF 8.17.8, the regularised I_y(½, a) over its prefactor). */
function centreSeries(a: number, y: number): number {
  let term = 1
  let total = 1
  for (let n = 0; term > total * 1e-17; n++) {
    term *= ((a + 0.5 + n) / (1.5 + n)) * y
    total += term
  }
  return total
}

/** |t| with P(|T| < |t|) = centre: the function is concave, so Newton steps from below rise to the root. */
function studentFromCentre(centre: number, df: number): number {
  let t = (centre * Math.sqrt(Math.PI * df)) / (2 * halfStepGammaRatio(df / 2))
  for (let step = 0; step < 100; step++) {
    const tails = studentTails(t, df)
    const move = ((centre - tails.centre) * t) / tails.front
    t += move
    if (Math.abs(move) <= 1e-9 * t) break
  }
  return t
}

/** |t| with P(|T| ≥ |t|) = both, from the normal quantile and the first terms of Fisher & Cornish (1960). */
function studentFromTail(both: number, df: number): number {
  return argumentOfTail(both, startOf(both, df), (t) => {
    const tails = studentTails(t, df)
    return { tail: tails.both, front: tails.front }
  })
}

function startOf(both: number, df: number): number {
  const z = -normalQuantile(both / 2)
  const square = z * z
  const expansion = (square + 1) / (4 * df) + ((5 * square + 16) * square + 3) / (96 * df * df)
  return square < df ? z * (1 + expansion) : z
}

/**
 * The x > 0 where a tail probability reaches its target, by Newton steps on log tail against log x: a concave curve,
 * steepening towards a line for power tails, so the steps end on one side of the root and close in. tailAt gives the
 * tail at x and x times the density there; the tail falls with x. 0 or Infinity beyond the doubles.
 */
function argumentOfTail(target: number, start: number, tailAt: (x: number) => { tail: number; front: number }): number {
  let x = start
  for (let step = 0; step < 200; step++) {
    const { tail, front } = tailAt(x)
    if (tail === 0) {
      x *= 0.8
      continue
    }
    const move = (Math.log(Math.min(tail / target, Number.MAX_VALUE)) * tail) / front
    x *= Math.exp(move)
    if (!(x > 0 && x < Number.POSITIVE_INFINITY) || Math.abs(move) <= 1e-9) break
  }
  return x
}

function checkDegrees(df: number): void {
  if (!(df > 0)) throw new RangeError(`degrees of freedom are positive, not ${df}`)
}

function checkProbability(p: number): void {
  if (!(p >= 0 && p <= 1)) throw new RangeError(`a probability lies in [0, 1], not ${p}`)
}
