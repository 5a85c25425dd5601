/**
 * The jump of the logarithm of the density, from a histogram smoothed on each side.
 * Source: McCrary 2008, J. Econometrics 142. Bins of width 2·sd·n^(−1/2), none straddling 0; a local linear fit, triangular,
 * to the heights at their centres; se = √((24/5)(1/f₊ + 1/f₋)/(n h)). Bandwidth of section 3.2: a quartic fitted to each side's
 * heights gives 3.348·(s²·length/Σ f̃″²)^(1/5), and the mean of both sides is taken, no wider than the shorter side.
 */
import { choleskyInPlace, choleskySolveInPlace, normalUpper, standardDeviation } from '../math/index.js'

export interface BinnedDensity {
  readonly ok: true
  /** Units per unit of x over all units. */
  readonly untreated: number
  readonly treated: number
  /** ln treated − ln untreated. */
  readonly logDifference: number
  readonly standardError: number
  readonly z: number
  readonly p: number
  readonly binWidth: number
  readonly bandwidth: number
}

export type BinnedDensityOutcome = BinnedDensity | { readonly ok: false; readonly reason: string }

const fewestUnits = 100
const fewestBins = 6
const mostBins = 1e6

/** x: signed distances, finite; treated: 1 on the treated side, which settles units at 0; bandwidth in units of x. */
export function binnedDensityTest(x: Float64Array, treated: Uint8Array, bandwidth?: number): BinnedDensityOutcome {
  if (bandwidth !== undefined && !(bandwidth > 0)) throw new RangeError(`a bandwidth is above 0, not ${bandwidth}`)
  const n = x.length
  if (n < fewestUnits) return { ok: false, reason: `only ${n} units` }
  const binWidth = (2 * standardDeviation(x)) / Math.sqrt(n)
  const furthest = x.reduce((most, value) => Math.max(most, Math.abs(value)), 0)
  if (!(binWidth > 0)) return { ok: false, reason: 'the score does not vary' }
  if (furthest / binWidth > mostBins) return { ok: false, reason: 'a few scores lie very far from all others' }
  const sides = [0, 1].map((side) => heightsOf(x, treated, side, binWidth))
  if (sides.some((heights) => heights.length < fewestBins)) return { ok: false, reason: 'one side spans too few bins' }
  const chosen = sides.map((heights) => plugIn(heights, binWidth))
  const reach = Math.min(...sides.map((heights) => heights.length)) * binWidth
  const h = bandwidth ?? Math.min((chosen[0] + chosen[1]) / 2, reach)
  const [untreated, treatedDensity] = sides.map((heights) => heightAtLine(heights, binWidth, h))
  if (!(untreated > 0 && treatedDensity > 0)) return { ok: false, reason: 'one side is nearly empty at the line' }
  const logDifference = Math.log(treatedDensity / untreated)
  const standardError = Math.sqrt(((24 / 5) * (1 / untreated + 1 / treatedDensity)) / (n * h))
  const z = logDifference / standardError
  const p = 2 * normalUpper(Math.abs(z))
  return { ok: true, untreated, treated: treatedDensity, logDifference, standardError, z, p, binWidth, bandwidth: h }
}

/** Share of all units per unit of x in each bin of a side, outwards from the line. */
function heightsOf(x: Float64Array, treated: Uint8Array, side: number, width: number): Float64Array {
  const bins: number[] = []
  for (let i = 0; i < x.length; i++) {
    if (treated[i] !== side) continue
    const bin = Math.floor(Math.abs(x[i]) / width)
    while (bins.length <= bin) bins.push(0)
    bins[bin]++
  }
  return Float64Array.from(bins, (count) => count / x.length / width)
}

function heightAtLine(heights: Float64Array, width: number, h: number): number {
  let [s0, s1, s2, m0, m1] = [0, 0, 0, 0, 0]
  for (let j = 0; j < heights.length; j++) {
    const t = ((j + 0.5) * width) / h
    if (t >= 1) break
    const k = 1 - t
    s0 += k
    s1 += k * t
    s2 += k * t * t
    m0 += k * heights[j]
    m1 += k * t * heights[j]
  }
  return (s2 * m0 - s1 * m1) / (s0 * s2 - s1 * s1)
}

function plugIn(heights: Float64Array, width: number): number {
  const count = heights.length
  const length = count * width
  const size = 5
  const gram = new Float64Array(size * size)
  const moment = new Float64Array(size)
  const powers = (j: number) => Array.from({ length: size }, (_, a) => ((j + 0.5) / count) ** a)
  for (let j = 0; j < count; j++) {
    const power = powers(j)
    for (let a = 0; a < size; a++) {
      moment[a] += power[a] * heights[j]
      for (let b = 0; b <= a; b++) gram[a * size + b] += power[a] * power[b]
    }
  }
  if (!(choleskyInPlace(gram, size) > 0)) return length
  choleskySolveInPlace(gram, size, moment)
  let [squares, curvature] = [0, 0]
  for (let j = 0; j < count; j++) {
    const power = powers(j)
    const fit = power.reduce((sum, value, a) => sum + value * moment[a], 0)
    squares += (heights[j] - fit) ** 2
    curvature += ((2 * moment[2] + 6 * moment[3] * power[1] + 12 * moment[4] * power[2]) / length ** 2) ** 2
  }
  const variance = squares / (count - size)
  return Math.min(length, 3.348 * ((variance * length) / curvature) ** 0.2)
}
