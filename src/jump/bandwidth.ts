/**
 * Plug-in bandwidths in stages: each minimises the estimated mean squared error of the number the next stage needs.
 * Source: METHODS section 5; Imbens & Kalyanaraman 2012 (regularisation), Calonico, Cattaneo & Titiunik 2014 (stages),
 * Calonico, Cattaneo & Farrell 2018, 2020 (coverage).
 * Works in t = |x|: in every term the signs that odd powers take on the untreated side cancel.
 */
import { quantileOfSorted } from '../math/index.js'
import { influenceByKey, sumOfSquares, varianceOf } from './influence.js'
import { type Kernel, pilotConstant } from './kernel.js'
import { addWeights, coefficientOf, fitLocal, functional, type LocalFit, responseOf } from './localPolynomial.js'
import { neighbourResidualsOf } from './neighbours.js'
import type { BySide, Sample, Side } from './sample.js'

/** h for the estimate, b for its bias; in x units. */
export interface Bandwidths {
  readonly h: BySide<number>
  readonly b: BySide<number>
}

/** A rule, its answer times `scale`, or numbers in x units; without `bias`, b is the rule's, or equal to a fixed h. */
export type BandwidthChoice =
  | { readonly kind: 'rule'; readonly rule: 'mse' | 'coverage'; readonly bias?: number; readonly scale?: number }
  | {
      readonly kind: 'fixed'
      readonly untreated: number
      readonly treated: number
      readonly bias?: number | BySide<number>
    }

export interface BandwidthOptions {
  readonly order: number
  readonly kernel: Kernel
  readonly sides: 'common' | 'separate'
  /** Sum σ̂² within clusters. */
  readonly clustered: boolean
}

export type Chosen =
  | { readonly ok: true; readonly bandwidths: Bandwidths }
  | { readonly ok: false; readonly reason: string }

/** Thrown inside a stage and turned into a reason at the door of this file. */
class CannotFit extends Error {}

/** Smallest and largest bandwidth the rule may answer with. */
export interface Range {
  readonly smallest: number
  readonly largest: number
}

/** a_min: the larger over sides of the (20+p)-th smallest |x| (the last, on a shorter side) times 1 + 1e-9; a_max: max |x|. */
export function bandwidthRange(sample: Sample, order: number): Range {
  let smallest = 0
  let largest = 0
  for (const { t } of [sample.untreated, sample.treated]) {
    if (t.length === 0) continue
    smallest = Math.max(smallest, t[Math.min(20 + order, t.length) - 1])
    largest = Math.max(largest, t[t.length - 1])
  }
  return { smallest: smallest * (1 + 1e-9), largest }
}

const clamp = (value: number, range: Range) =>
  Math.min(Math.max(value, Math.min(range.smallest, range.largest)), range.largest)

/** a0 = C·min(sd, IQR/1.349)·n^(−1/5) of the signed distances of both sides, kept in the range; sd alone where the IQR is 0. */
export function pilotBandwidth(sample: Sample, kernel: Kernel, range: Range): number {
  const signed = signedDistances(sample)
  const n = signed.length
  let mean = 0
  for (let i = 0; i < n; i++) mean += signed[i] / n
  let squares = 0
  for (let i = 0; i < n; i++) squares += (signed[i] - mean) ** 2
  const sd = Math.sqrt(squares / (n - 1))
  const iqr = quantileOfSorted(signed, 0.75) - quantileOfSorted(signed, 0.25)
  const spread = iqr > 0 ? Math.min(sd, iqr / 1.349) : sd
  return clamp(pilotConstant[kernel] * spread * n ** -0.2, range)
}

function signedDistances({ untreated, treated }: Sample): Float64Array {
  const left = untreated.t.length
  const signed = new Float64Array(left + treated.t.length)
  for (let i = 0; i < left; i++) signed[i] = -untreated.t[left - 1 - i]
  signed.set(treated.t, left)
  return signed
}

/** What one stage needs of one side. */
interface Term {
  readonly side: Side
  readonly residuals: Float64Array
  readonly sign: number
}

/** The bandwidths of a sample under a choice; `neighbours` are its neighbour residuals, where the caller has them. */
export function bandwidthsFor(
  sample: Sample,
  choice: BandwidthChoice,
  options: BandwidthOptions,
  neighbours?: BySide<Float64Array>,
): Chosen {
  const bias = typeof choice.bias === 'number' ? { untreated: choice.bias, treated: choice.bias } : choice.bias
  if (choice.kind === 'fixed') {
    const h = { untreated: choice.untreated, treated: choice.treated }
    return { ok: true, bandwidths: { h, b: bias ?? h } }
  }
  if (sample.untreated.t.length === 0) return { ok: false, reason: 'untreated side: no units' }
  if (sample.treated.t.length === 0) return { ok: false, reason: 'treated side: no units' }
  const chosen = plugIn(sample, neighbours ?? neighbourResidualsOf(sample), choice.rule, options)
  if (!chosen.ok) return chosen
  const { scale = 1 } = choice
  const times = ({ untreated, treated }: BySide<number>) => ({ untreated: untreated * scale, treated: treated * scale })
  return { ok: true, bandwidths: { h: times(chosen.bandwidths.h), b: bias ?? times(chosen.bandwidths.b) } }
}

/**
 * Chooses h and b by the rule; a side that can't be fitted at some stage gives the reason. Where a stage meets too few
 * distinct distances, the range begins at the distances that its fits need, if each side has as many (our choice; METHODS is silent).
 */
function plugIn(
  sample: Sample,
  neighbours: BySide<Float64Array>,
  rule: 'mse' | 'coverage',
  options: BandwidthOptions,
): Chosen {
  const terms: Term[] = [
    { side: sample.untreated, residuals: neighbours.untreated, sign: -1 },
    { side: sample.treated, residuals: neighbours.treated, sign: 1 },
  ]
  const range = bandwidthRange(sample, options.order)
  const chosen = chooseWithin(range, sample, terms, rule, options)
  const smallest = Math.max(...terms.map(({ side }) => distanceHolding(side.t, options.order + 4)))
  if (chosen.ok || !(smallest > range.smallest)) return chosen
  const wider = chooseWithin({ ...range, smallest }, sample, terms, rule, options)
  return wider.ok ? wider : chosen
}

/** The distance within which a side has `count` distinct ones, itself left out; 0 where it has no more in all. */
function distanceHolding(t: Float64Array, count: number): number {
  let distinct = 0
  for (let i = 0; i < t.length; i++) {
    if (i > 0 && t[i] === t[i - 1]) continue
    if (distinct === count) return t[i]
    distinct++
  }
  return 0
}

function chooseWithin(
  range: Range,
  sample: Sample,
  terms: readonly Term[],
  rule: 'mse' | 'coverage',
  options: BandwidthOptions,
): Chosen {
  const pilot = pilotBandwidth(sample, options.kernel, range)
  const n = sample.untreated.t.length + sample.treated.t.length
  try {
    const pick = (used: readonly Term[]) => stages(used, pilot, range, n, rule, options)
    if (options.sides === 'common') {
      const { h, b } = pick(terms)
      return { ok: true, bandwidths: { h: { untreated: h, treated: h }, b: { untreated: b, treated: b } } }
    }
    const [left, right] = terms.map((term) => pick([term]))
    return {
      ok: true,
      bandwidths: { h: { untreated: left.h, treated: right.h }, b: { untreated: left.b, treated: right.b } },
    }
  } catch (error) {
    if (error instanceof CannotFit) return { ok: false, reason: error.message }
    throw error
  }
}

function stages(
  terms: readonly Term[],
  pilot: number,
  range: Range,
  n: number,
  rule: 'mse' | 'coverage',
  options: BandwidthOptions,
): { h: number; b: number } {
  const { order: p, kernel, clustered } = options
  const q = p + 1
  const made = new Map<string, LocalFit>()
  const fitAt = (term: Term, order: number, h: number): LocalFit => {
    const key = `${term.sign} ${order} ${h}`
    const before = made.get(key)
    if (before) return before
    const fitted = fitLocal(term.side, order, h, kernel)
    if (fitted.ok) {
      made.set(key, fitted.fit)
      return fitted.fit
    }
    throw new CannotFit(`bandwidth rule, ${term.sign < 0 ? 'untreated' : 'treated'} side: ${fitted.reason}`)
  }
  const response = (term: Term, power: number, order: number, h: number) => {
    const at = fitAt(term, order, h)
    return responseOf(at, functional(at, power))
  }
  const coefficient = (term: Term, power: number, order: number, h: number) => {
    const at = fitAt(term, order, h)
    return { g: coefficientOf(at, power), v: spreadOf(term, at, power, clustered) }
  }
  const stage = (power: number, order: number, a: number, parts: readonly { g: number; v: number; s: number }[]) => {
    let bias = 0
    let regular = 0
    let variance = 0
    terms.forEach((term, i) => {
      const at = fitAt(term, order, a)
      const scaled = parts[i].s * responseOf(at, functional(at, power))
      bias += term.sign * scaled * parts[i].g
      regular += scaled * scaled * parts[i].v
      variance += parts[i].s * parts[i].s * spreadOf(term, at, power, clustered)
    })
    const e = order + 1 - power
    const numerator = (2 * power + 1) * variance * a ** (2 * power + 1)
    const denominator = (2 * e * (bias * bias + 3 * regular)) / a ** (2 * e)
    return clamp(denominator > 0 ? (numerator / denominator) ** (1 / (2 * order + 3)) : range.largest, range)
  }
  const first = terms.map((term) => response(term, 0, p, pilot))
  const second = terms.map((term) => response(term, p + 1, q, pilot))
  const whole = terms.map((term) => coefficient(term, q + 2, q + 2, Number.POSITIVE_INFINITY))
  const d = stage(
    q + 1,
    q + 1,
    pilot,
    whole.map((part, i) => ({ ...part, s: first[i] * second[i] })),
  )
  const atD = terms.map((term) => coefficient(term, q + 1, q + 1, d))
  const b = stage(
    p + 1,
    q,
    pilot,
    atD.map((part, i) => ({ ...part, s: first[i] })),
  )
  const atB = terms.map((term) => coefficient(term, p + 1, q, b))
  const mse = stage(
    0,
    p,
    pilot,
    atB.map((part) => ({ ...part, s: 1 })),
  )
  const h = rule === 'mse' ? mse : clamp(mse * n ** (-p / ((2 * p + 3) * (p + 3))), range)
  return { h, b }
}

/** Estimated variance of one coefficient of a fit: Σ a_i² σ̂²_i, or the sum of squared cluster sums Σ_g (Σ a_i r_i)². */
function spreadOf(term: Term, fit: LocalFit, power: number, clustered: boolean): number {
  const psi = new Float64Array(fit.count)
  addWeights(psi, term.side, fit, functional(fit, power), 1)
  for (let i = 0; i < psi.length; i++) psi[i] *= term.residuals[i]
  if (!clustered || term.side.cluster === null) return sumOfSquares(psi)
  return varianceOf(influenceByKey([term.side.cluster], [psi]))
}
