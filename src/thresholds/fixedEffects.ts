/**
 * Line fixed effects, absorbed exactly.
 * Source: Black 1999; METHODS section 8. γ̂ comes from the joint kernel-weighted fit of y on side-specific
 * polynomials of order p at h plus one dummy per line. Demeaning within lines removes the dummies
 * (Frisch–Waugh–Lovell), so thousands of lines cost O(n).
 */
import { type BySide, countWithin, type Kernel, kernelCurve, type Sample, type Side } from '../jump/index.js'
import { choleskyInPlace, choleskySolveInPlace, legendreShifted } from '../math/index.js'

export type FixedEffects =
  | {
      readonly ok: true
      /** γ̂ of each line, with kernel-weighted mean 0; NaN for a line without units of positive weight. */
      readonly effects: Float64Array
    }
  | { readonly ok: false; readonly reason: string }

const smallestCondition = 1e-13

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

/**
 * γ̂ for `lines` lines from a sample whose sides carry `group`. The columns are the treated side's P_0 … P_p and the
 * untreated side's P_1 … P_p (shifted Legendre in t over the side's window); the common level is in the dummies.
 */
export function fitFixedEffects(
  sample: Sample,
  h: BySide<number>,
  order: number,
  kernel: Kernel,
  lines: number,
): FixedEffects {
  const columns = 2 * order + 1
  const eachRow = rowsOf(sample, h, order, kernel)
  const { means, totals } = meansByLine(eachRow, lines, columns)
  const gram = new Float64Array(columns * columns)
  const slopes = new Float64Array(columns)
  eachRow((line, k, row, y) => {
    const at = line * (columns + 1)
    for (let a = 0; a < columns; a++) row[a] -= means[at + a]
    const centred = k * (y - means[at + columns])
    for (let a = 0; a < columns; a++) {
      for (let b = 0; b <= a; b++) gram[a * columns + b] += k * row[a] * row[b]
      slopes[a] += row[a] * centred
    }
  })
  if (!(choleskyInPlace(gram, columns) > smallestCondition)) {
    return { ok: false, reason: 'line fixed effects: no line has enough units on both sides within the bandwidth' }
  }
  choleskySolveInPlace(gram, columns, slopes)
  return { ok: true, effects: effectsFrom(means, totals, slopes, kernelWeightByLine(sample, h, kernel, lines)) }
}

/** γ̂_c = mean of y less the fitted columns' means; shifted so that the kernel-weighted mean is 0. */
function effectsFrom(means: Float64Array, totals: Float64Array, slopes: Float64Array, weight: Float64Array) {
  const columns = slopes.length
  const effects = new Float64Array(totals.length).fill(Number.NaN)
  let level = 0
  let sum = 0
  for (let line = 0; line < totals.length; line++) {
    if (!(totals[line] > 0)) continue
    const at = line * (columns + 1)
    effects[line] = means[at + columns]
    for (let a = 0; a < columns; a++) effects[line] -= means[at + a] * slopes[a]
    level += weight[line] * effects[line]
    sum += weight[line]
  }
  return effects.map((effect) => effect - level / sum)
}

/** Visits every entry of positive weight with its line, kernel weight, design row (scratch, may be changed) and outcome. */
type EachRow = (visit: (line: number, k: number, row: Float64Array, y: number) => void) => void

function rowsOf(sample: Sample, h: BySide<number>, order: number, kernel: Kernel): EachRow {
  const basis = new Float64Array(order + 1)
  const row = new Float64Array(2 * order + 1)
  return (visit) => {
    for (const name of ['untreated', 'treated'] as const) {
      const side = sample[name]
      const group = side.group as Int32Array
      const count = countWithin(side.t, h[name], kernel)
      const scale = count > 0 ? side.t[count - 1] : 1
      eachWeight(side, h[name], kernel, (i, k) => {
        legendreShifted(order, side.t[i] / scale, basis)
        row.fill(0)
        if (name === 'treated') row.set(basis)
        else for (let j = 1; j <= order; j++) row[order + j] = basis[j]
        visit(group[i], k, row, side.y[i])
      })
    }
  }
}

/** Weighted means of the columns and of y within each line (row-major, lines × (columns + 1)), and the weight of each line. */
function meansByLine(eachRow: EachRow, lines: number, columns: number): { means: Float64Array; totals: Float64Array } {
  const means = new Float64Array(lines * (columns + 1))
  const totals = new Float64Array(lines)
  eachRow((line, k, row, y) => {
    const at = line * (columns + 1)
    totals[line] += k
    for (let a = 0; a < columns; a++) means[at + a] += k * row[a]
    means[at + columns] += k * y
  })
  for (let line = 0; line < lines; line++) {
    if (!(totals[line] > 0)) continue
    for (let a = 0; a <= columns; a++) means[line * (columns + 1) + a] /= totals[line]
  }
  return { means, totals }
}
