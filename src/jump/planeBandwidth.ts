/**
 * A bandwidth for fits in two coordinates, from the plug-in bandwidth against the distance alone.
 * One common bandwidth for all points: the pooled one-dimensional bandwidth h₁ says how strongly the outcome curves
 * against its noise, and is carried over to two coordinates by what the mean squared errors of the two fits are made of.
 *   one coordinate:  B₁² m² h^(2p+2) + V₁ σ²/(n f h),           so  h₁^(2p+3) = V₁ σ² / ((2p+2) B₁² m² n f)
 *   two coordinates: B₂² m² h^(2p+2) + V₂ σ² L/(n f h²),        so  h₂^(2p+4) = 2 V₂ σ² L / ((2p+2) B₂² m² n f)
 * f is the density of the n units at the border of length L, so f/L is theirs per area; m is the size of the derivatives of
 * order p+1. Eliminating σ²/(m² n f):
 *   h₂ = (2 V₂ B₁² / (V₁ B₂²) · L · h₁^(2p+3))^(1/(2p+4)),
 * which falls like n^(−1/6) for p = 1, and stays as it is where border and units are doubled together.
 * Assumed: a straight border at the point, units as dense along it as on average, and derivatives of the same size in every
 * direction: those along the border, of which the distance says nothing, add to the bias in square.
 * Constants: of the level at an edge (Fan & Gijbels 1996, section 3.2) and at a half plane, from exact moments of the
 * kernel; for triangular local linear fits V₁ = 24/5 and B₁ = 1/20, h₂ = 0.8299·(L·h₁⁵)^(1/6).
 */
import { choleskyInPlace, choleskySolveInPlace } from '../math/index.js'
import type { Kernel } from './kernel.js'
import { termCount } from './planeFit.js'

export interface CarriedOver {
  /** h₂, in the unit of the two lengths given. */
  readonly bandwidth: number
  /** h₂ = factor · (L · h₁^(2p+3))^(1/(2p+4)). */
  readonly factor: number
}

/** Carries a one-dimensional bandwidth over; both lengths in one unit, above 0. */
export function planeBandwidth(h1: number, borderLength: number, order: number, kernel: Kernel): CarriedOver {
  if (!(h1 > 0 && h1 < Number.POSITIVE_INFINITY)) throw new RangeError(`the bandwidth must be above 0, got ${h1}`)
  if (!(borderLength > 0)) throw new RangeError(`the border's length must be above 0, got ${borderLength}`)
  const line = constantsOf(lineTerms(order), kernel, 0)
  const plane = constantsOf(planeTerms(order), kernel, 1)
  const power = 1 / (2 * order + 4)
  const factor = ((2 * plane.variance * line.bias ** 2) / (line.variance * plane.bias ** 2)) ** power
  // logarithms: a border of the length of a continent to the power of the order must not overflow
  const bandwidth = factor * Math.exp(power * (Math.log(borderLength) + (2 * order + 3) * Math.log(h1)))
  return { bandwidth, factor }
}

/** The rule in words, for results and report. */
export const planeBandwidthRule =
  'one bandwidth for all points: the pooled bandwidth against distance, carried over to two coordinates by the balance of ' +
  'bias and variance at a straight border of this length'

/** A product e^along n^across. */
interface Term {
  readonly along: number
  readonly across: number
}

interface Terms {
  readonly fitted: readonly Term[]
  readonly next: readonly Term[]
}

function lineTerms(order: number): Terms {
  const all = Array.from({ length: order + 2 }, (_, across) => ({ along: 0, across }))
  return { fitted: all.slice(0, -1), next: all.slice(-1) }
}

function planeTerms(order: number): Terms {
  const all: Term[] = []
  for (let degree = 0; degree <= order + 1; degree++) {
    for (let across = 0; across <= degree; across++) all.push({ along: degree - across, across })
  }
  return { fitted: all.slice(0, termCount(order)), next: all.slice(termCount(order)) }
}

/**
 * Constants of the level fitted at the edge of a half line (extra = 0) or a half plane (extra = 1) of uniform density:
 * variance × σ²/(n f h^(1+extra)), and the root of the sum of squares, over the next terms, of its response to
 * e^a n^c/(a! c!).
 */
function constantsOf({ fitted, next }: Terms, kernel: Kernel, extra: 0 | 1): { variance: number; bias: number } {
  const size = fitted.length
  const moment = (a: Term, b: Term, squared: boolean) => {
    const along = a.along + b.along
    const across = a.across + b.across
    const around = extra === 0 ? 1 : arc(along, across)
    return around * radial(kernel, along + across + extra, squared)
  }
  const gram = new Float64Array(size * size)
  for (let a = 0; a < size; a++) for (let b = 0; b < size; b++) gram[a * size + b] = moment(fitted[a], fitted[b], false)
  if (!(choleskyInPlace(gram, size) > 0)) throw new Error('the moments of the kernel are not positive definite')
  const level = new Float64Array(size)
  level[0] = 1
  choleskySolveInPlace(gram, size, level)
  let variance = 0
  for (let a = 0; a < size; a++) {
    for (let b = 0; b < size; b++) variance += level[a] * level[b] * moment(fitted[a], fitted[b], true)
  }
  let square = 0
  for (const term of next) {
    let response = 0
    for (let a = 0; a < size; a++) response += level[a] * moment(fitted[a], term, false)
    square += (response / (factorial(term.along) * factorial(term.across))) ** 2
  }
  return { variance, bias: Math.sqrt(square) }
}

/** ∫ over angles 0 to π of cos^a sin^c: 0 for odd a, else ((a−1)/(a+c)) times that of a−2. */
function arc(along: number, across: number): number {
  if (along % 2 === 1) return 0
  if (along > 0) return ((along - 1) / (along + across)) * arc(along - 2, across)
  if (across === 0) return Math.PI
  return across === 1 ? 2 : ((across - 1) / across) * arc(0, across - 2)
}

/** ∫₀¹ r^m K(r) dr, or of r^m K(r)². */
function radial(kernel: Kernel, m: number, squared: boolean): number {
  if (kernel === 'uniform') return (squared ? 0.25 : 0.5) / (m + 1)
  if (kernel === 'triangular') {
    return squared ? 2 / ((m + 1) * (m + 2) * (m + 3)) : 1 / ((m + 1) * (m + 2))
  }
  return squared ? 0.5625 * (1 / (m + 1) - 2 / (m + 3) + 1 / (m + 5)) : 0.75 * (1 / (m + 1) - 1 / (m + 3))
}

function factorial(n: number): number {
  return n <= 1 ? 1 : n * factorial(n - 1)
}
