/**
 * The jump as one kernel-weighted regression of both sides, for the bias-reduced clustered variance (clustersReduced.ts).
 * Terms: the polynomial of each side (shifted Legendre in |x| over the side's window). Where the sample's lines have levels
 * of their own, those take the place of the untreated side's level, and rows and outcomes are freed of their weighted
 * means by line (Frisch–Waugh–Lovell), in O(n) for thousands of lines.
 */
import { choleskyInPlace, choleskySolveInPlace, legendreShifted } from '../math/index.js'
import type { ClusteredRegression } from './clustersReduced.js'
import { kernelCurve, type LocalFit } from './localPolynomial.js'
import type { Side } from './sample.js'

export interface JointFit {
  readonly estimate: number
  /** l by unit of each side's window, untreated first. */
  readonly weights: readonly Float64Array[]
  readonly regression: Omit<ClusteredRegression, 'cluster'>
}

const smallestCondition = 1e-13

/** Fits of the untreated and the treated side, of one order, each with its window and kernel. */
export type SideWindow = { readonly side: Side; readonly fit: LocalFit }

/** The jump, or a reason. With `hasLineLevels` the sides carry `group`, and each line's level is a term. */
export function jointFit(windows: readonly SideWindow[], hasLineLevels: boolean): JointFit | string {
  const size = windows[0].fit.order + 1
  const columns = hasLineLevels ? 2 * size - 1 : 2 * size
  const { rows, k, y, line } = stack(windows, size, columns, hasLineLevels)
  if (line !== null) freeOfLines(rows, columns, k, y, line)
  const n = k.length
  const moments = new Float64Array(columns * columns)
  for (let i = 0, at = 0; i < n; i++, at += columns) {
    for (let a = 0; a < columns; a++) {
      const weighted = k[i] * rows[at + a]
      if (weighted === 0) continue
      for (let b = 0; b <= a; b++) moments[a * columns + b] += weighted * rows[at + b]
    }
  }
  if (!(choleskyInPlace(moments, columns) > smallestCondition)) {
    return 'no line has enough units on both sides within the bandwidth'
  }
  const residual = residualOf(rows, columns, k, y, moments)
  // l_i = k_i r_i'M c, c the combination of terms that is the jump: P_j(0) = (−1)^j
  const functional = new Float64Array(columns)
  for (let j = 0; j < size; j++) {
    const atLine = j % 2 === 0 ? 1 : -1
    functional[j] = atLine
    if (size + j < columns) functional[size + j] = hasLineLevels ? atLine : -atLine
  }
  choleskySolveInPlace(moments, columns, functional)
  const l = new Float64Array(n)
  let estimate = 0
  for (let i = 0, at = 0; i < n; i++, at += columns) {
    for (let a = 0; a < columns; a++) l[i] += rows[at + a] * functional[a]
    l[i] *= k[i]
    estimate += l[i] * y[i]
  }
  const first = windows[0].fit.count
  return {
    estimate,
    weights: [l.subarray(0, first), l.subarray(first)],
    regression: { columns, rows, k, l, residual, line },
  }
}

/** Columns: the treated side's P_0 … P_p, then the untreated side's, without its P_0 where lines have levels. */
function stack(windows: readonly SideWindow[], size: number, columns: number, hasLineLevels: boolean) {
  const n = windows.reduce((sum, { fit }) => sum + fit.count, 0)
  const rows = new Float64Array(n * columns)
  const [k, y] = [new Float64Array(n), new Float64Array(n)]
  const line = hasLineLevels ? new Int32Array(n) : null
  const basis = new Float64Array(size)
  let at = 0
  windows.forEach(({ side, fit }, s) => {
    const { linear, square } = kernelCurve(fit.h, fit.kernel)
    for (let i = 0; i < fit.count; i++, at++) {
      const t = side.t[i]
      legendreShifted(size - 1, t / fit.scale, basis)
      const skipped = s === 0 && hasLineLevels ? 1 : 0
      const from = at * columns + (s === 0 ? size : 0)
      for (let j = skipped; j < size; j++) rows[from + j - skipped] = basis[j]
      k[at] = ((1 + t * (linear + t * square)) * (side.w === null ? 1 : side.w[i])) / fit.h
      y[at] = side.y[i]
      if (line !== null) line[at] = (side.group as Int32Array)[i]
    }
  })
  return { rows, k, y, line }
}

function freeOfLines(rows: Float64Array, columns: number, k: Float64Array, y: Float64Array, line: Int32Array): void {
  let lines = 0
  for (const code of line) lines = Math.max(lines, code + 1)
  const total = new Float64Array(lines)
  const means = new Float64Array(lines * (columns + 1))
  for (let i = 0; i < k.length; i++) {
    const c = line[i]
    total[c] += k[i]
    for (let a = 0; a < columns; a++) means[c * (columns + 1) + a] += k[i] * rows[i * columns + a]
    means[c * (columns + 1) + columns] += k[i] * y[i]
  }
  for (let c = 0, at = 0; c < lines; c++) for (let a = 0; a <= columns; a++, at++) means[at] /= total[c]
  for (let i = 0; i < k.length; i++) {
    const at = line[i] * (columns + 1)
    for (let a = 0; a < columns; a++) rows[i * columns + a] -= means[at + a]
    y[i] -= means[at + columns]
  }
}

/** Residuals of the fit whose moments have the given Cholesky factor; the coefficients are refined once. */
function residualOf(
  rows: Float64Array,
  columns: number,
  k: Float64Array,
  y: Float64Array,
  factor: Float64Array,
): Float64Array {
  const residual = y.slice()
  for (let pass = 0; pass < 2; pass++) {
    const change = new Float64Array(columns)
    for (let i = 0, at = 0; i < k.length; i++, at += columns) {
      for (let a = 0; a < columns; a++) change[a] += k[i] * rows[at + a] * residual[i]
    }
    choleskySolveInPlace(factor, columns, change)
    for (let i = 0, at = 0; i < k.length; i++, at += columns) {
      for (let a = 0; a < columns; a++) residual[i] -= rows[at + a] * change[a]
    }
  }
  return residual
}
