/** The plain local linear estimate at a bandwidth as weights by side, and its worst bias; METHODS sections 2 and 6. */
import { worstBiasOf } from './biasAwareWorst.js'
import type { Kernel } from './kernel.js'
import { addWeights, fitLocal, functional, type LocalFit } from './localPolynomial.js'
import type { BySide, Sample, Side } from './sample.js'

export interface PlainPart {
  readonly name: 'untreated' | 'treated'
  readonly side: Side
  readonly fit: LocalFit
  /** l */
  readonly weights: Float64Array
}

/** The untreated and the treated side, or why there is no fit. */
export function plainParts(sample: Sample, h: BySide<number>, kernel: Kernel): readonly PlainPart[] | string {
  const parts: PlainPart[] = []
  for (const name of ['untreated', 'treated'] as const) {
    const side = sample[name]
    const fitted = fitLocal(side, 1, h[name], kernel)
    if (!fitted.ok) return `${name} side: ${fitted.reason}`
    const { fit } = fitted
    const weights = new Float64Array(fit.count)
    addWeights(weights, side, fit, functional(fit, 0), name === 'treated' ? 1 : -1)
    parts.push({ name, side, fit, weights })
  }
  return parts
}

/** Worst bias for |m''| ≤ 1, with l by side. */
export function unitBiasOf(parts: readonly PlainPart[], weights: readonly Float64Array[]): number {
  return parts.reduce((sum, { side }, s) => sum + worstBiasOf(side.t, weights[s]), 0)
}
