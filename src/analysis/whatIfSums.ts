/** The numbers that the page re-estimates from, at given bandwidths and holes. */
import {
  countWithin,
  type Kernel,
  neighbourResidualsOf,
  outsideDonut,
  type Sample,
  type Side,
  sideSums,
  type Variance,
  withinBandwidth,
} from '../jump/index.js'
import { base64OfNumbers } from '../math/index.js'
import type { WhatIfCells, WhatIfSubject } from '../results.js'
import type { NamedColumn } from './entries.js'
import { estimateAgain, hasReason, type PoolBasis } from './estimating.js'
import { meansOf } from './exhibits.js'

const kernels: readonly Kernel[] = ['triangular', 'epanechnikov', 'uniform']
const sides = ['untreated', 'treated'] as const

/** Layout `sides` of `WhatIfSubject.sums`. NaN too where the outcome is the same for every unit within the bandwidth. */
export function sumsOfSides(
  sample: Sample,
  donuts: readonly number[],
  bandwidths: readonly number[],
  variance: Variance,
): Float64Array {
  const sums = new Float64Array(donuts.length * bandwidths.length * 90).fill(Number.NaN)
  donuts.forEach((donut, d) => {
    const open = outsideDonut(sample, donut)
    const neighbours = variance === 'neighbours' ? neighbourResidualsOf(open) : undefined
    const varies = firstDifference(open)
    bandwidths.forEach((h, b) => {
      if (!(h >= varies)) return
      let at = (d * bandwidths.length + b) * 90
      for (const side of sides) {
        for (const kernel of kernels) {
          const fits = [1, 2, 3].map((order) =>
            sideSums(open[side], { order, kernel, h, variance }, neighbours?.[side]),
          )
          fits.forEach((made, i) => {
            if (!made) return
            sums.set([made.level, made.variance, made.squares, made.fourths], at + 4 * i)
            // of the curves of order 1 and 2, after the sums of all three
            if (i < 2) sums.set(made.slopes, at + 12 + i)
          })
          at += 15
        }
      }
    })
  })
  return sums
}

/** Distance of the nearest unit whose outcome is not that of the first untreated one. */
function firstDifference({ untreated, treated }: Sample): number {
  const first = untreated.y[0]
  const distances = [untreated, treated].map(({ t, y }) => t[y.findIndex((value) => value !== first)])
  return Math.min(...distances.map((t) => t ?? Number.POSITIVE_INFINITY))
}

/** A study's estimate, made again as it was at fixed bandwidths, b = h. */
export interface AgainOptions {
  readonly basis: PoolBasis
  readonly takeUp: NamedColumn | undefined
  /** The study's own bandwidths. */
  readonly own: { readonly untreated: number; readonly treated: number }
  readonly donuts: readonly number[]
  readonly variations: WhatIfSubject['variations']
  readonly bandwidths: readonly number[]
}

/** Variations but the first are made at every so many bandwidths, and at the study's own. */
const coarse = 6

/** Places of the bandwidths at which a variation is made. */
export function placesOf(variation: number, { bandwidths, own }: Pick<AgainOptions, 'bandwidths' | 'own'>): number[] {
  const isOwn = (h: number) => h === own.untreated || h === own.treated
  return bandwidths.flatMap((h, place) => (variation === 0 || place % coarse === 0 || isOwn(h) ? [place] : []))
}

/** Layout `table`: NaN also where a variation is not made. */
export function sumsOfTable(options: AgainOptions): Float64Array {
  const { variations, bandwidths, donuts, own } = options
  const sums = new Float64Array(variations.length * bandwidths.length * 36).fill(Number.NaN)
  variations.forEach(({ donut, side }, variation) => {
    for (const place of placesOf(variation, options)) {
      const h = bandwidths[place]
      const at = {
        untreated: side === 'treated' ? own.untreated : h,
        treated: side === 'untreated' ? own.treated : h,
      }
      sums.set(estimatesAt(options, at, donuts[donut]), (variation * bandwidths.length + place) * 36)
    }
  })
  return sums
}

/** Three kernels, two orders, plain and corrected, three numbers each. */
function estimatesAt({ basis, takeUp }: AgainOptions, h: AgainOptions['own'], donut: number): Float64Array {
  // nearest neighbours may lie beyond the bandwidth; nothing else does
  const sample = basis.options.variance === 'neighbours' ? basis.sample : withinBandwidth(basis.sample, h)
  const numbers = new Float64Array(36).fill(Number.NaN)
  let at = 0
  for (const kernel of kernels) {
    for (const order of [1, 2]) {
      const options = { ...basis.options, kernel, order, bandwidth: { kind: 'fixed' as const, ...h } }
      const made = estimateAgain({ ...basis, sample, options }, donut, takeUp)
      if (!hasReason(made)) {
        const { plain, corrected } = made.jump
        for (const [i, one] of [plain, corrected].entries()) {
          numbers.set([one.estimate, one.standardError, one.degreesOfFreedom], at + 3 * i)
        }
      }
      at += 6
    }
  }
  return numbers
}

/** Units within each bandwidth, without those at it and with them, outside each hole. */
export function unitsWithin({ t }: Side, donuts: readonly number[], bandwidths: readonly number[]): number[] {
  const left = (h: number, kernel: Kernel, donut: number) =>
    Math.max(0, countWithin(t, h, kernel) - countWithin(t, donut, 'triangular'))
  return donuts.flatMap((donut) => bandwidths.flatMap((h) => [left(h, 'triangular', donut), left(h, 'uniform', donut)]))
}

/** Means of the cells that end at the bandwidths. */
export function cellsOf({ untreated, treated, centre }: Sample, bandwidths: readonly number[]): WhatIfSubject['cells'] {
  const cells = (side: Side): WhatIfCells => {
    const ends = bandwidths.map((h) => countWithin(side.t, h, 'triangular'))
    const means = ends.map((end, i) => meansOf(side, i > 0 ? ends[i - 1] : 0, end))
    return {
      x: base64OfNumbers(Float64Array.from(means, ({ x }) => x)),
      mean: base64OfNumbers(Float64Array.from(means, ({ mean }) => mean + centre)),
      standardError: base64OfNumbers(Float64Array.from(means, ({ standardError }) => standardError)),
    }
  }
  return { untreated: cells(untreated), treated: cells(treated) }
}
