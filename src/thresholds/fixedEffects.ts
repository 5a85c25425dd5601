/**
 * Line fixed effects, absorbed exactly.
 * Source: Black 1999; METHODS section 8. γ̂ comes from the joint kernel-weighted fit of y on side-specific
 * polynomials of order p at h plus one dummy per line, in O(n) for thousands of lines (absorbed.ts).
 */
import { type BySide, countWithin, type Kernel, kernelCurve, type Sample, type Side } from '../jump/index.js'
import { legendreShifted } from '../math/index.js'
import { absorbedLeastSquares, type EachRow } from './absorbed.js'

export type FixedEffects =
  | {
      readonly ok: true
      /** γ̂ of each line, with kernel-weighted mean 0; NaN for a line without units of positive weight. */
      readonly effects: Float64Array
    }
  | { readonly ok: false; readonly reason: string }

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
  const fit = absorbedLeastSquares(rowsOf(sample, h, order, kernel), lines, 2 * order + 1)
  if (!fit.ok) {
    return { ok: false, reason: 'line fixed effects: no line has enough units on both sides within the bandwidth' }
  }
  const weight = kernelWeightByLine(sample, h, kernel, lines)
  let level = 0
  let sum = 0
  for (let line = 0; line < lines; line++) {
    if (!(weight[line] > 0)) continue
    level += weight[line] * fit.levels[line]
    sum += weight[line]
  }
  return { ok: true, effects: fit.levels.map((effect) => effect - level / sum) }
}

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
