/**
 * The published simulation designs: X = 2·Beta(2, 4) − 1, noise N(0, 0.1295²), cutoff 0.
 * Source: Imbens & Kalyanaraman 2012; Calonico, Cattaneo & Titiunik 2014. Coefficients of 1, x … x⁵, below | above.
 */
import type { Entries } from '../../src/jump/index.js'
import { type Random, streamOf } from '../../src/math/index.js'

export interface Design {
  readonly name: string
  readonly below: readonly number[]
  readonly above: readonly number[]
  readonly jump: number
  /** Population optimum at n = 500, triangular local linear: [h, b]. */
  readonly optimum: readonly [number, number]
  /** Coverage and mean length of corrected ± 1.96·se at the optimum, neighbours variance; then plain. */
  readonly atOptimum: readonly [number, number, number, number]
  /** How far the mean plug-in h may lie from the optimum, relative. */
  readonly tolerance: number
}

export const designs: readonly Design[] = [
  {
    name: 'Lee fit',
    below: [0.48, 1.27, 7.18, 20.21, 21.54, 7.33],
    above: [0.52, 0.84, -3.0, 7.99, -9.01, 3.56],
    jump: 0.04,
    optimum: [0.1655, 0.2511],
    atOptimum: [0.9334, 0.269, 0.9225, 0.221],
    tolerance: 0.25,
  },
  {
    name: 'Ludwig–Miller fit',
    below: [3.71, 2.3, 3.28, 1.45, 0.23, 0.03],
    above: [0.26, 18.49, -54.81, 74.3, -45.02, 9.83],
    jump: -3.45,
    optimum: [0.0825, 0.1894],
    atOptimum: [0.9338, 0.385, 0.9103, 0.355],
    tolerance: 0.25,
  },
  {
    name: 'modified Lee fit',
    below: [0.48, 1.27, -0.5 * 7.18, 0.7 * 20.21, 1.1 * 21.54, 1.5 * 7.33],
    above: [0.52, 0.84, -0.1 * 3.0, -0.3 * 7.99, -0.1 * 9.01, 3.56],
    jump: 0.04,
    optimum: [0.2601, 0.3225],
    atOptimum: [0.9357, 0.232, 0.8489, 0.177],
    tolerance: 0.4,
  },
]

/** Beta(2, 4) is the second smallest of five uniform numbers. */
function beta24(random: Random): number {
  let first = 1
  let second = 1
  for (let i = 0; i < 5; i++) {
    const u = random.next()
    if (u < first) {
      second = first
      first = u
    } else if (u < second) second = u
  }
  return second
}

const polynomial = (coefficients: readonly number[], x: number) => coefficients.reduceRight((sum, c) => sum * x + c, 0)

export function drawDesign(design: Design, n: number, replicate: number): Entries {
  const random = streamOf(20_260_101, replicate)
  const x = new Float64Array(n)
  const y = new Float64Array(n)
  const treated = new Uint8Array(n)
  const unit = new Int32Array(n)
  for (let i = 0; i < n; i++) {
    x[i] = 2 * beta24(random) - 1
    treated[i] = x[i] >= 0 ? 1 : 0
    unit[i] = i
    y[i] = polynomial(x[i] >= 0 ? design.above : design.below, x[i]) + 0.1295 * random.normal()
  }
  return { x, y, treated, unit }
}
