/**
 * The bound on the second derivative by rule of thumb.
 * Source: Armstrong & Kolesár 2020, Quantitative Economics; METHODS section 6: the larger over sides of max|m''| of a plain
 * quartic fitted to the whole side, over that side's range of x.
 */
import { fitLocal, type LocalFit } from './localPolynomial.js'
import type { Sample } from './sample.js'
import { evaluate } from './zPolynomial.js'

const order = 4

export type Smoothness = { readonly ok: true; readonly bound: number } | { readonly ok: false; readonly reason: string }

/** In units of y per x². */
export function smoothnessByRule(sample: Sample): Smoothness {
  let bound = 0
  for (const name of ['untreated', 'treated'] as const) {
    const { t } = sample[name]
    if (t.length === 0) return { ok: false, reason: `${name} side: no units` }
    const fitted = fitLocal(sample[name], order, Number.POSITIVE_INFINITY, 'uniform')
    if (!fitted.ok) return { ok: false, reason: `smoothness by rule of thumb, ${name} side: ${fitted.reason}` }
    bound = Math.max(bound, steepestChange(fitted.fit, t[0]))
  }
  return { ok: true, bound }
}

/** max|m''| of a quartic between t = from and the end of its window: at an end, or where m''' is 0. */
function steepestChange({ polynomial, scale }: LocalFit, from: number): number {
  const second = Float64Array.from([2, 6, 12], (factor, k) => factor * polynomial[k + 2])
  const low = (2 * from) / scale - 1
  const middle = -second[1] / (2 * second[2])
  const places = middle > low && middle < 1 ? [low, 1, middle] : [low, 1]
  return (2 / scale) ** 2 * Math.max(...places.map((z) => Math.abs(evaluate(second, z))))
}
