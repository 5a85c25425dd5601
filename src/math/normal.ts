/**
 * The standard normal distribution, to full double precision in both tails.
 * normalCdf, normalUpper: rational approximations of Cody (1969, Math. Comp. 23; 1993, ACM TOMS 19, algorithm 715) up to
 * |z| = 4·√2, Laplace's continued fraction (DLMF 7.9.1) beyond, with the exponent split so that exp(−z²/2) keeps its
 * digits. normalQuantile: Wichura (1988), algorithm AS 241.
 * Relative error about 1e-15 for both tails and for the quantile, against test/golden/math.
 */

/** P(Z ≤ z). NaN for NaN. */
export function normalCdf(z: number): number {
  return normalUpper(-z)
}

/** P(Z > z), accurate relative to itself however small (down to 1e-308). NaN for NaN. */
export function normalUpper(z: number): number {
  const magnitude = Math.abs(z)
  if (magnitude <= 0.67448975) return 0.5 - centralArea(z)
  const tail = upperTail(magnitude)
  return z > 0 ? tail : 1 - tail
}

/** The density at z. */
export function normalDensity(z: number): number {
  return expMinusHalfSquare(Math.abs(z)) * inverseRootTwoPi
}

/** The z with P(Z ≤ z) = p; −Infinity at 0, Infinity at 1. Throws RangeError outside [0, 1]. */
export function normalQuantile(p: number): number {
  if (!(p >= 0 && p <= 1)) throw new RangeError(`a probability lies in [0, 1], not ${p}`)
  const q = p - 0.5
  if (Math.abs(q) <= 0.425) {
    const r = 0.180625 - q * q
    return q * ratio(r, centreAbove, centreBelow)
  }
  const tail = q < 0 ? p : 1 - p
  if (tail === 0) return q < 0 ? Number.NEGATIVE_INFINITY : Number.POSITIVE_INFINITY
  const r = Math.sqrt(-Math.log(tail))
  const z = r <= 5 ? ratio(r - 1.6, middleAbove, middleBelow) : ratio(r - 5, farAbove, farBelow)
  return q < 0 ? -z : z
}

const inverseRootTwoPi = 0.3989422804014327

/** P(0 < Z < z) for |z| ≤ 0.6745. */
function centralArea(z: number): number {
  const square = z * z
  return z * ratio(square, erfAbove, erfBelow)
}

/** P(Z > z) for z ≥ 0.6745. */
function upperTail(z: number): number {
  if (!(z < 39)) return Number.isNaN(z) ? Number.NaN : 0
  if (z < 5.656854249492381) return expMinusHalfSquare(z) * ratio(z, tailAbove, tailBelow)
  let fraction = z
  for (let k = 32; k >= 1; k--) fraction = z + k / fraction
  return (expMinusHalfSquare(z) * inverseRootTwoPi) / fraction
}

/** exp(−z²/2), z ≥ 0, with z split at sixteenths so that the square is exact where it matters. */
function expMinusHalfSquare(z: number): number {
  if (!(z < 40)) return Number.isNaN(z) ? Number.NaN : 0
  const coarse = Math.trunc(z * 16) / 16
  const rest = (z - coarse) * (z + coarse)
  return Math.exp((-coarse * coarse) / 2) * Math.exp(-rest / 2)
}

/** Ratio of two polynomials in x, coefficients from the highest power down. */
function ratio(x: number, above: readonly number[], below: readonly number[]): number {
  let numerator = above[0]
  for (let i = 1; i < above.length; i++) numerator = numerator * x + above[i]
  let denominator = below[0]
  for (let i = 1; i < below.length; i++) denominator = denominator * x + below[i]
  return numerator / denominator
}

const erfAbove = [0.06568233791820745, 2.2352520354606837, 161.02823106855587, 1067.6894854603709, 18154.98125334356]
const erfBelow = [1, 47.202581904688245, 976.0985517377767, 10260.932208618979, 45507.78933502673]
const tailAbove = [
  1.0765576773720192e-8, 0.39894151208813466, 8.883149794388377, 93.50665613217785, 597.2702763948002,
  2494.5375852903726, 6848.190450536283, 11602.65143764735, 9842.714838383978,
]
const tailBelow = [
  1, 22.266688044328117, 235.387901782625, 1519.3775994075547, 6485.558298266761, 18615.571640885097, 34900.95272114598,
  38912.00328609327, 19685.429676859992,
]
const centreAbove = [
  2509.0809287301227, 33430.57558358813, 67265.7709270087, 45921.95393154987, 13731.69376550946, 1971.5909503065513,
  133.14166789178438, 3.3871328727963665,
]
const centreBelow = [
  5226.495278852546, 28729.085735721943, 39307.89580009271, 21213.794301586597, 5394.196021424751, 687.1870074920579,
  42.31333070160091, 1,
]
const middleAbove = [
  0.0007745450142783414, 0.022723844989269184, 0.2417807251774506, 1.2704582524523684, 3.6478483247632045,
  5.769497221460691, 4.630337846156546, 1.4234371107496835,
]
const middleBelow = [
  1.0507500716444169e-9, 0.0005475938084995345, 0.015198666563616457, 0.14810397642748008, 0.6897673349851,
  1.6763848301838038, 2.053191626637759, 1,
]
const farAbove = [
  2.0103343992922881e-7, 2.7115555687434876e-5, 0.0012426609473880784, 0.026532189526576124, 0.29656057182850487,
  1.7848265399172913, 5.463784911164114, 6.657904643501103,
]
const farBelow = [
  2.0442631033899397e-15, 1.421511758316446e-7, 1.8463183175100548e-5, 0.0007868691311456133, 0.014875361290850615,
  0.1369298809227358, 0.599832206555888, 1,
]
