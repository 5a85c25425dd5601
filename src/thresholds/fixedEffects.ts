/**
 * Line fixed effects, absorbed exactly, and covariates with coefficients common to both sides.
 * Source: Black 1999; Calonico, Cattaneo, Farrell & Titiunik 2019; METHODS section 8. γ̂ comes from the joint kernel-weighted fit of y on side-specific
 * polynomials of order p at h plus one dummy per line, in O(n) for thousands of lines (absorbed.ts).
 */
import { type BySide, countWithin, type Kernel, kernelCurve, type Sample, type Side } from '../jump/index.js'
import { legendreShifted } from '../math/index.js'
import { absorbedLeastSquares, type Rows } from './absorbed.js'

export type FixedEffects =
  | {
      readonly ok: true
      /** γ̂ of each line, with kernel-weighted mean 0; NaN for a line without units of positive weight; 0 without line effects. */
      readonly effects: Float64Array
      /** Kernel weight of each line, where there are line effects. */
      readonly weight?: Float64Array
      /** Of each covariate; NaN where it is constant or a sum of those before it. */
      readonly coefficients: Float64Array
    }
  | { readonly ok: false; readonly reason: string }

const sides = ['untreated', 'treated'] as const

/** Kernel weight w K(t/h)/h, constants of the kernel left out, summed by line over both sides. */
export function kernelWeightByLine(sample: Sample, h: BySide<number>, kernel: Kernel, lines: number): Float64Array {
  const total = new Float64Array(lines)
  for (const name of ['untreated', 'treated'] as const) {
    const group = sample[name].group as Int32Array
    eachWeight(sample[name], h[name], kernel, (i, k) => {
      total[group[i]] += k
    })
  }
  return total
}

/** k = w K(t/h)/h: the 1/h matters where the two sides have different bandwidths. */
function eachWeight(side: Side, h: number, kernel: Kernel, visit: (i: number, k: number) => void): void {
  const count = countWithin(side.t, h, kernel)
  const { linear, square } = kernelCurve(h, kernel)
  for (let i = 0; i < count; i++) {
    const k = 1 + side.t[i] * (linear + side.t[i] * square)
    visit(i, (k * (side.w === null ? 1 : side.w[i])) / h)
  }
}

/** What is fitted beside the two curves. */
export interface Nuisance {
  readonly lines: number
  /** A level for each line; else one for all. */
  readonly fixedEffects: boolean
  /** By row of the table. */
  readonly covariates: readonly Float64Array[]
}

/**
 * γ̂ from a sample whose sides carry `group`. The columns are the treated side's P_0 … P_p and the untreated side's P_1 … P_p
 * (shifted Legendre in t over the side's window), then the covariates; the common level is in the dummies.
 */
export function fitFixedEffects(
  sample: Sample,
  h: BySide<number>,
  order: number,
  kernel: Kernel,
  { lines, fixedEffects, covariates }: Nuisance,
): FixedEffects {
  const groups = fixedEffects ? lines : 1
  const fitWith = (used: readonly Float64Array[]) =>
    absorbedLeastSquares(rowsOf(sample, h, order, kernel, fixedEffects, used), groups)
  const varying = placesThatVary(sample, h, kernel, groups, covariates)
  const all = fitWith(varying.map((place) => covariates[place]))
  const kept = all.ok ? varying : independentOf(varying, covariates, fitWith)
  const fit = all.ok ? all : fitWith(kept.map((place) => covariates[place]))
  if (!fit.ok) {
    const what = fixedEffects ? 'line fixed effects: no line has' : 'covariates: there are not'
    return { ok: false, reason: `${what} enough units on both sides within the bandwidth` }
  }
  const coefficients = new Float64Array(covariates.length).fill(Number.NaN)
  kept.forEach((place, k) => {
    coefficients[place] = fit.slopes[2 * order + 1 + k]
  })
  if (!fixedEffects) return { ok: true, effects: new Float64Array(lines), coefficients }
  const { levels, totals } = fit
  let level = 0
  let sum = 0
  for (let line = 0; line < lines; line++) {
    if (!(totals[line] > 0)) continue
    level += totals[line] * levels[line]
    sum += totals[line]
  }
  return { ok: true, effects: levels.map((effect) => effect - level / sum), weight: totals, coefficients }
}

/** Places of the covariates that can be told apart: as many as can be added one by one. */
function independentOf(
  places: readonly number[],
  covariates: readonly Float64Array[],
  fitWith: (used: readonly Float64Array[]) => { readonly ok: boolean },
): number[] {
  const kept: number[] = []
  for (const place of places) {
    if (fitWith([...kept, place].map((one) => covariates[one])).ok) kept.push(place)
  }
  return kept
}

/** Places of the covariates that are not the same for all units of every group near the line, beyond rounding. */
function placesThatVary(
  sample: Sample,
  h: BySide<number>,
  kernel: Kernel,
  groups: number,
  covariates: readonly Float64Array[],
): number[] {
  const count = covariates.length
  if (count === 0) return []
  const sum = new Float64Array(groups * count)
  const weight = new Float64Array(groups)
  const each = (visit: (group: number, k: number, unit: number) => void) => {
    for (const name of ['untreated', 'treated'] as const) {
      const { group, unit } = sample[name]
      eachWeight(sample[name], h[name], kernel, (i, k) => {
        visit(groups > 1 ? (group as Int32Array)[i] : 0, k, unit[i])
      })
    }
  }
  each((group, k, unit) => {
    weight[group] += k
    for (let c = 0; c < count; c++) sum[group * count + c] += k * covariates[c][unit]
  })
  const within = new Float64Array(count)
  const whole = new Float64Array(count)
  each((group, k, unit) => {
    for (let c = 0; c < count; c++) {
      const value = covariates[c][unit]
      const off = value - sum[group * count + c] / weight[group]
      within[c] += k * off * off
      whole[c] += k * value * value
    }
  })
  return covariates.map((_, c) => c).filter((c) => within[c] > 1e-20 * whole[c])
}

function rowsOf(
  sample: Sample,
  h: BySide<number>,
  order: number,
  kernel: Kernel,
  fixedEffects: boolean,
  covariates: readonly Float64Array[],
): Rows {
  const columns = 2 * order + 1 + covariates.length
  const counts = sides.map((name) => countWithin(sample[name].t, h[name], kernel))
  const size = counts[0] + counts[1]
  const rows = {
    group: new Int32Array(size),
    weight: new Float64Array(size),
    design: Array.from({ length: columns }, () => new Float64Array(size)),
    y: new Float64Array(size),
  }
  const basis = new Float64Array(order + 1)
  let row = 0
  sides.forEach((name, s) => {
    const { t, w, y, unit, group } = sample[name]
    const scale = counts[s] > 0 ? t[counts[s] - 1] : 1
    const { linear, square } = kernelCurve(h[name], kernel)
    for (let i = 0; i < counts[s]; i++, row++) {
      const k = 1 + t[i] * (linear + t[i] * square)
      rows.weight[row] = (k * (w === null ? 1 : w[i])) / h[name]
      rows.group[row] = fixedEffects ? (group as Int32Array)[i] : 0
      rows.y[row] = y[i]
      legendreShifted(order, t[i] / scale, basis)
      if (name === 'treated') for (let j = 0; j <= order; j++) rows.design[j][row] = basis[j]
      else for (let j = 1; j <= order; j++) rows.design[order + j][row] = basis[j]
      for (let c = 0; c < covariates.length; c++) rows.design[2 * order + 1 + c][row] = covariates[c][unit[i]]
    }
  })
  return rows
}
