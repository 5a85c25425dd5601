/**
 * The effect between two cutoffs, for units of the low one: where the low line's units are treated and the high line's are
 * not, under untreated curves that are parallel.
 * Source: Cattaneo, Keele, Titiunik & Vazquez-Bare 2021, JASA; METHODS section 9.
 * τ(x) = μ_treated,low(x) − [μ_untreated,high(x) + (μ_untreated,low(low) − μ_untreated,high(low))].
 * All curves are local linear fits with one bandwidth; at x = low the untreated curve of the low line ends.
 */
import { covarianceMatrix, type Influence, influenceByKey, type Kernel, kernelValue } from '../jump/index.js'
import type { Random } from '../math/index.js'
import type { LineEffects } from './effects.js'
import { largestQuantile } from './maximum.js'
import { type WaldTest, waldOfEquality } from './wald.js'

/** Units of one line; treated where score is at or above its cutoff, by `treated`. Scores grow towards treatment. */
export interface CurveUnits {
  readonly score: Float64Array
  readonly treated: Uint8Array
  readonly y: Float64Array
  /** What the variance sums over: the unit's row, or its cluster. */
  readonly key: Int32Array
  readonly w?: Float64Array
}

export interface AwayOptions {
  readonly low: number
  readonly high: number
  readonly bandwidth: number
  readonly kernel: Kernel
  /** Interior scores at which the effect is estimated. */
  readonly at: readonly number[]
  readonly level: number
  readonly random: Random
}

export interface AwayPoint {
  readonly score: number
  readonly estimate: number
  readonly standardError: number
}

export type Away =
  | {
      readonly ok: true
      readonly points: readonly AwayPoint[]
      /** Standard errors that the band over all points reaches. */
      readonly criticalValue: number
      /** Is the difference of the untreated curves the same below the low cutoff? Absent where it can't be tested. */
      readonly parallel?: WaldTest
      readonly parallelAt: readonly number[]
    }
  | { readonly ok: false; readonly reason: string }

const fewestUnits = 10
const draws = 20_000
/** Places below the low cutoff at which the curves are compared, in bandwidths. */
const placesBelow = [0, 0.5, 1, 1.5]

export function awayFromLine(lowLine: CurveUnits, highLine: CurveUnits, options: AwayOptions): Away {
  const { low, level, random } = options
  const curve = (units: CurveUnits, isTreated: 0 | 1, at: number) => fitAt(units, isTreated, at, options)
  const ends = [curve(lowLine, 0, low), curve(highLine, 0, low)]
  if (ends.some((fit) => fit === undefined)) return { ok: false, reason: 'too few untreated units at the low cutoff' }
  const [ownEnd, otherEnd] = ends as Fit[]
  const made = options.at.flatMap((score) => {
    const [treated, untreated] = [curve(lowLine, 1, score), curve(highLine, 0, score)]
    if (!treated || !untreated) return []
    return [{ score, ...combined([treated, 1], [untreated, -1], [ownEnd, -1], [otherEnd, 1]) }]
  })
  if (made.length === 0) return { ok: false, reason: 'too few units between the cutoffs' }
  const effects = effectsOf(
    made.map(({ score }) => String(score)),
    made,
  )
  const parallel = parallelTest(curve, lowLine, highLine, options)
  return {
    ok: true,
    points: made.map(({ score, value }, i) => ({
      score,
      estimate: value,
      standardError: Math.sqrt(effects.covariance[i * made.length + i]),
    })),
    criticalValue: largestQuantile(effects, level, random, draws),
    ...parallel,
  }
}

interface Fit {
  readonly value: number
  readonly influence: Influence
}

/** Local linear at one score from the units of one status; residuals scaled as hc2. Undefined with too few units. */
function fitAt(
  { score, treated, y, key, w }: CurveUnits,
  isTreated: 0 | 1,
  at: number,
  { bandwidth, kernel }: AwayOptions,
): Fit | undefined {
  const rows: number[] = []
  for (let i = 0; i < score.length; i++) {
    if (treated[i] === isTreated && kernelValue(kernel, Math.abs(score[i] - at) / bandwidth) > 0) rows.push(i)
  }
  if (rows.length < fewestUnits) return undefined
  const u = rows.map((i) => (score[i] - at) / bandwidth)
  const k = rows.map((i, j) => (w ? w[i] : 1) * kernelValue(kernel, Math.abs(u[j])))
  let [s0, s1, s2, t0, t1] = [0, 0, 0, 0, 0]
  rows.forEach((i, j) => {
    s0 += k[j]
    s1 += k[j] * u[j]
    s2 += k[j] * u[j] * u[j]
    t0 += k[j] * y[i]
    t1 += k[j] * u[j] * y[i]
  })
  const determinant = s0 * s2 - s1 * s1
  if (!(determinant > 1e-10 * s0 * s2)) return undefined
  const level = (s2 * t0 - s1 * t1) / determinant
  const slope = (s0 * t1 - s1 * t0) / determinant
  const psi = Float64Array.from(rows, (i, j) => {
    const weight = (k[j] * (s2 - s1 * u[j])) / determinant
    const leverage = (k[j] * (s2 - 2 * s1 * u[j] + s0 * u[j] * u[j])) / determinant
    return (weight * (y[i] - level - slope * u[j])) / Math.sqrt(Math.max(1e-12, 1 - leverage))
  })
  return { value: level, influence: influenceByKey([Int32Array.from(rows, (i) => key[i])], [psi]) }
}

function combined(...parts: readonly (readonly [Fit, 1 | -1])[]): Fit {
  return {
    value: parts.reduce((sum, [{ value }, sign]) => sum + sign * value, 0),
    influence: influenceByKey(
      parts.map(([{ influence }]) => influence.key),
      parts.map(([{ influence }, sign]) => influence.psi.map((psi) => sign * psi)),
    ),
  }
}

function effectsOf(ids: readonly string[], fits: readonly Fit[]): LineEffects {
  const { matrix, isDiagonal } = covarianceMatrix(fits.map(({ influence }) => influence))
  return { ids, estimate: Float64Array.from(fits, ({ value }) => value), covariance: matrix, isDiagonal }
}

/** Wald test that the untreated curves differ by the same at several scores up to the low cutoff. */
function parallelTest(
  curve: (units: CurveUnits, isTreated: 0 | 1, at: number) => Fit | undefined,
  lowLine: CurveUnits,
  highLine: CurveUnits,
  { low, bandwidth }: AwayOptions,
): { readonly parallel?: WaldTest; readonly parallelAt: readonly number[] } {
  const made = placesBelow.flatMap((times) => {
    const at = low - times * bandwidth
    const [own, other] = [curve(lowLine, 0, at), curve(highLine, 0, at)]
    return own && other ? [{ at, ...combined([own, 1], [other, -1]) }] : []
  })
  const parallelAt = made.map(({ at }) => at)
  if (made.length < 2) return { parallelAt }
  return { parallel: waldOfEquality(effectsOf(parallelAt.map(String), made)), parallelAt }
}
