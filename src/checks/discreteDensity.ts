/**
 * Do units pile up at the first value on the treated side of a score with few values?
 * Source: Frandsen 2017, Advances in Econometrics 38. Given that a unit lies at that value or at the nearest on either side of
 * it, the chance that it is the middle one is at most (1 + k)/(3 + k) and at least (1 − k)/(3 − k), where the probability of
 * the middle value is within k, relative, of the mean of its neighbours. p = twice the smaller binomial tail at those bounds.
 * k by default is that of a normal density with the standard deviation of the score, step²/(2 sd²) (our choice).
 */
import { standardDeviation } from '../math/index.js'
import { binomialTail } from './binomial.js'

export interface DiscreteDensity {
  readonly ok: true
  /** Units at the value before, the first treated one, and the one after, in that order along x. */
  readonly units: readonly [number, number, number]
  /** Those expected at the middle value, were the density straight. */
  readonly expected: number
  readonly curvature: number
  readonly p: number
}

export type DiscreteDensityOutcome = DiscreteDensity | { readonly ok: false; readonly reason: string }

const fewestUnits = 20

/** x: signed distances, finite; treated: 1 on the treated side; curvature: k, in [0, 1). */
export function discreteDensityTest(x: Float64Array, treated: Uint8Array, curvature?: number): DiscreteDensityOutcome {
  if (curvature !== undefined && !(curvature >= 0 && curvature < 1))
    throw new RangeError(`the bound on the curvature lies in [0, 1), not ${curvature}`)
  let [before, middle, after] = [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY, Number.POSITIVE_INFINITY]
  for (let i = 0; i < x.length; i++) {
    if (treated[i] !== 1) before = Math.max(before, x[i])
    else if (x[i] < middle) [middle, after] = [x[i], middle]
    else if (x[i] > middle && x[i] < after) after = x[i]
  }
  if (!Number.isFinite(before) || !Number.isFinite(after))
    return { ok: false, reason: 'the score has too few values next to the line' }
  const step = after - middle
  if (!(Math.abs(middle - before - step) < 1e-6 * step))
    return { ok: false, reason: 'the values next to the line are not equally far apart' }
  const count = (value: number) => x.reduce((sum, one) => sum + (one === value ? 1 : 0), 0)
  const units = [count(before), count(middle), count(after)] as const
  const all = units[0] + units[1] + units[2]
  if (all < fewestUnits) return { ok: false, reason: `only ${all} units at the values next to the line` }
  const k = curvature ?? Math.min(0.5, 0.5 * (step / standardDeviation(x)) ** 2)
  const atMost = binomialTail(all - units[1], all, 1 - (1 - k) / (3 - k))
  const atLeast = binomialTail(units[1], all, (1 + k) / (3 + k))
  return { ok: true, units, expected: all / 3, curvature: k, p: Math.min(1, 2 * Math.min(atMost, atLeast)) }
}
