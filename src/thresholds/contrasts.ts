/** Differences between every two lines, with p-values and intervals that hold for all of them at once (METHODS section 9). */
import { normalQuantile, normalUpper, type Random } from '../math/index.js'
import { type LineEffects, variancesOf } from './effects.js'
import { factorOfCorrelation, quantileOfDraws, sidakQuantile } from './maximum.js'

export interface ContrastOfLines {
  /** Indices of the lines; the contrast is the first minus the second. */
  readonly lines: readonly [number, number]
  readonly estimate: number
  readonly standardError: number
  /** Simultaneous over all contrasts. */
  readonly low: number
  readonly high: number
  /** Two-sided, normal reference, of this contrast alone. */
  readonly p: number
  /** Adjusted over all contrasts by Holm's step-down (Holm 1979). */
  readonly pHolm: number
  /** The same by the step-up of Benjamini & Hochberg 1995: the share of false alarms to expect. */
  readonly pBh: number
}

export interface Contrasts {
  /** Ascending in p; at most `LARGEST_LIST` of them. */
  readonly listed: readonly ContrastOfLines[]
  /** Number of contrasts, over which p-values and intervals are adjusted. */
  readonly of: number
  /** Intervals are estimate ± this times the standard error. */
  readonly criticalValue: number
}

/** At most so many contrasts are listed, those of smallest p. */
export const LARGEST_LIST = 1000
/** Up to so many lines the critical value is drawn; beyond, it is Šidák's. */
export const MOST_LINES_DRAWN = 100

/**
 * All pairs of lines whose difference has a variance of its own (two lines with the same units and outcome have none).
 * The critical value is the `level` quantile of the largest |t| over all contrasts under N(0, Ω), from `draws` seeded draws.
 * Šidák's 1967 inequality bounds it by the quantile for independent contrasts, whatever Ω is: the smaller of the two is
 * taken, and for more than MOST_LINES_DRAWN lines the bound itself. For independent lines of equal precision it is 2.5%
 * too wide at 150 lines (4.58 against 4.47, 95%) and 2.0% at 2,000; for lines that share units it may be more.
 */
export function contrastsOf(effects: LineEffects, level: number, random: Random, draws: number): Contrasts {
  const standardErrors = contrastStandardErrors(effects)
  const { entries, of } = largestRatios(effects, standardErrors, LARGEST_LIST)
  if (of === 0) return { listed: [], of, criticalValue: normalQuantile((1 + level) / 2) }
  const bound = sidakQuantile(level, of)
  const isDrawn = of > 1 && effects.ids.length <= MOST_LINES_DRAWN
  const drawn = isDrawn ? drawnQuantile(effects, standardErrors, level, random, draws) : bound
  const criticalValue = Math.max(Math.min(bound, drawn), normalQuantile((1 + level) / 2))
  const pBh = stepUp(
    entries.map(({ ratio }) => ratio),
    of,
    of > entries.length ? ratiosBeyond(effects, standardErrors, entries.length) : new Float64Array(0),
  )
  let pHolm = 0
  const listed = entries.map(({ first, second, ratio, standardError }, rank) => {
    const estimate = effects.estimate[first] - effects.estimate[second]
    const p = twoSided(ratio)
    pHolm = Math.min(1, Math.max(pHolm, (of - rank) * p))
    const reach = criticalValue * standardError
    const lines = [first, second] as const
    return { lines, estimate, standardError, low: estimate - reach, high: estimate + reach, p, pHolm, pBh: pBh[rank] }
  })
  return { listed, of, criticalValue }
}

/** A difference with less than this share of its lines' variances is rounding: it has no variance of its own. */
const SMALLEST_SHARE = 1e-9

/** For the pairs (0,1), (0,2) … (1,2) …: the standard error of the difference, or 0 where it has no variance of its own. */
function contrastStandardErrors(effects: LineEffects): Float64Array {
  const count = effects.ids.length
  const variance = variancesOf(effects)
  const standardErrors = new Float64Array((count * (count - 1)) / 2)
  let pair = 0
  for (let a = 0; a < count; a++) {
    for (let b = a + 1; b < count; b++) {
      const both = variance[a] + variance[b]
      const own = effects.isDiagonal ? both : both - 2 * effects.covariance[a * count + b]
      standardErrors[pair++] = own > SMALLEST_SHARE * both ? Math.sqrt(own) : 0
    }
  }
  return standardErrors
}

interface Entry {
  readonly first: number
  readonly second: number
  /** |t| */
  readonly ratio: number
  readonly standardError: number
}

/** The contrasts of largest |t|, descending, ties in the order of the pairs; and how many contrasts there are. */
function largestRatios(
  effects: LineEffects,
  standardErrors: Float64Array,
  limit: number,
): { entries: Entry[]; of: number } {
  const { estimate } = effects
  const count = estimate.length
  let entries: Entry[] = []
  let floor = -1
  let of = 0
  let pair = 0
  // Sorting is stable, and a later pair with the ratio of the floor is passed over, so ties keep the order of the pairs.
  const cut = () => {
    entries = entries.sort((a, b) => b.ratio - a.ratio).slice(0, limit)
    if (entries.length === limit) floor = entries[limit - 1].ratio
  }
  for (let first = 0; first < count; first++) {
    for (let second = first + 1; second < count; second++) {
      const standardError = standardErrors[pair++]
      if (standardError === 0) continue
      of++
      const ratio = Math.abs(estimate[first] - estimate[second]) / standardError
      if (!(ratio > floor)) continue
      entries.push({ first, second, ratio, standardError })
      if (entries.length >= 4 * limit) cut()
    }
  }
  cut()
  return { entries, of }
}

function twoSided(ratio: number): number {
  return Math.min(1, 2 * normalUpper(ratio))
}

/** `ratios`: the largest |t| of `of`, descending; `beyond`: the others, descending, which bound the adjusted p of those. */
function stepUp(ratios: readonly number[], of: number, beyond: Float64Array): Float64Array {
  let smallest = 1
  for (let k = 0; k < beyond.length; k++) {
    const p = twoSided(beyond[k])
    // (of / rank) p is never under p, and p ascends from here on
    if (p >= smallest) break
    smallest = Math.min(smallest, (of / (ratios.length + k + 1)) * p)
  }
  const adjusted = new Float64Array(ratios.length)
  for (let rank = ratios.length - 1; rank >= 0; rank--) {
    smallest = Math.min(smallest, (of / (rank + 1)) * twoSided(ratios[rank]))
    adjusted[rank] = smallest
  }
  return adjusted
}

/** |t| of all contrasts but the `listed` largest, descending. */
function ratiosBeyond({ estimate }: LineEffects, standardErrors: Float64Array, listed: number): Float64Array {
  const ratios = new Float64Array(standardErrors.length)
  let [pair, of] = [0, 0]
  for (let a = 0; a < estimate.length; a++) {
    for (let b = a + 1; b < estimate.length; b++) {
      const standardError = standardErrors[pair++]
      if (standardError > 0) ratios[of++] = Math.abs(estimate[a] - estimate[b]) / standardError
    }
  }
  const sorted = ratios.subarray(0, of).sort()
  return sorted.subarray(0, of - listed).reverse()
}

/** The `level` quantile of the largest |t| over the contrasts, in draws of the estimates from N(0, Ω). */
function drawnQuantile(
  effects: LineEffects,
  standardErrors: Float64Array,
  level: number,
  random: Random,
  draws: number,
): number {
  const variance = variancesOf(effects)
  const scale = variance.map(Math.sqrt)
  const count = variance.length
  const factor = effects.isDiagonal ? undefined : factorOfCorrelation(effects.covariance, scale)
  const search = searchOf(standardErrors, variance)
  const normal = new Float64Array(count)
  const drawn = new Float64Array(count)
  return quantileOfDraws(level, draws, () => {
    for (let a = 0; a < count; a++) normal[a] = random.normal()
    for (let a = 0; a < count; a++) {
      let value = normal[a]
      if (factor) {
        value = 0
        for (let k = 0; k <= a; k++) value += factor[a * count + k] * normal[k]
      }
      drawn[a] = value * scale[a]
    }
    return largestRatio(drawn, search)
  })
}

interface RatioSearch {
  /** L x L: one over the standard error of each difference, 0 where it has no variance of its own. */
  readonly inverse: Float64Array
  /** 1/v by line. */
  readonly precision: Float64Array
  /** The largest (v_a + v_b)/variance of the difference, over the contrasts; 1 for independent lines. */
  readonly inflation: number
  /** Scratch, by line. */
  readonly squared: Float64Array
}

function searchOf(standardErrors: Float64Array, variance: Float64Array): RatioSearch {
  const count = variance.length
  const inverse = new Float64Array(count * count)
  let inflation = 0
  let pair = 0
  for (let a = 0; a < count; a++) {
    for (let b = a + 1; b < count; b++) {
      const standardError = standardErrors[pair++]
      if (standardError === 0) continue
      inverse[a * count + b] = inverse[b * count + a] = 1 / standardError
      inflation = Math.max(inflation, (variance[a] + variance[b]) / standardError ** 2)
    }
  }
  return { inverse, precision: variance.map((value) => 1 / value), inflation, squared: new Float64Array(count) }
}

/**
 * The largest |t| over the contrasts of one draw. With u_a the distance of line a from a common centre in standard errors of
 * its own, t² of a pair is at most inflation · (u_a² + u_b²) by Cauchy and Schwarz. So once the line farthest out has
 * been compared with all others, most lines need not be looked at.
 */
function largestRatio(drawn: Float64Array, { inverse, precision, inflation, squared }: RatioSearch): number {
  const count = drawn.length
  let weight = 0
  let weighted = 0
  for (let a = 0; a < count; a++) {
    weight += precision[a]
    weighted += precision[a] * drawn[a]
  }
  const centre = weighted / weight
  let farthest = 0
  for (let a = 0; a < count; a++) {
    squared[a] = precision[a] * (drawn[a] - centre) ** 2
    if (squared[a] > squared[farthest]) farthest = a
  }
  let largest = largestInRow(drawn, inverse, farthest, 0)
  for (let a = 0; a < count; a++) {
    if (inflation * (squared[a] + squared[farthest]) <= largest * largest) continue
    largest = Math.max(largest, largestInRow(drawn, inverse, a, a + 1))
  }
  return largest
}

/** The largest |t| of line a against the lines from `from` on. */
function largestInRow(drawn: Float64Array, inverse: Float64Array, a: number, from: number): number {
  const count = drawn.length
  let largest = 0
  for (let b = from; b < count; b++) {
    const ratio = Math.abs(drawn[a] - drawn[b]) * inverse[a * count + b]
    if (ratio > largest) largest = ratio
  }
  return largest
}
