/** An estimate made again in the page, from what `WhatIfSubject` says it holds. No DOM here. */
import { type Inference, infer, jumpOfSides, type Kernel, type SideSums } from '../../jump/index.js'
import { numbersOfBase64 } from '../../math/index.js'
import type { BySide, WhatIfCells, WhatIfSubject } from '../../results.js'

export const kernels: readonly Kernel[] = ['triangular', 'epanechnikov', 'uniform']

export type WhichSide = 'both' | 'untreated' | 'treated'

/** The bandwidth of the other side is then the study's own. */
export interface Choices {
  readonly side: WhichSide
  readonly kernel: Kernel
  readonly order: 1 | 2
  /** Place in the subject's donuts. */
  readonly donut: number
}

export interface Settings {
  readonly reference: 't' | 'normal'
  readonly level: number
}

export interface Made {
  readonly bandwidth: BySide
  readonly units: BySide
  readonly plain: Inference
  readonly corrected: Inference
}

/** A subject with its numbers as numbers. */
export interface Subject extends Omit<WhatIfSubject, 'sums' | 'cells'> {
  readonly sums: Float64Array
  readonly cells: BySide<Cells>
}

export interface Cells {
  readonly x: Float64Array
  readonly mean: Float64Array
  readonly standardError: Float64Array
}

export function subjectOf(again: WhatIfSubject): Subject {
  const cells = ({ x, mean, standardError }: WhatIfCells): Cells => ({
    x: numbersOfBase64(x),
    mean: numbersOfBase64(mean),
    standardError: numbersOfBase64(standardError),
  })
  return {
    ...again,
    sums: numbersOfBase64(again.sums),
    cells: { untreated: cells(again.cells.untreated), treated: cells(again.cells.treated) },
  }
}

/** Place of the value nearest to another by ratio. */
export function nearestPlace(values: readonly number[], to: number): number {
  const off = (value: number) => Math.abs(Math.log(value / to))
  return values.reduce((best, value, place) => (off(value) < off(values[best]) ? place : best), 0)
}

/** At the bandwidth in that place, b = h; undefined where there is no estimate. `own` are the study's bandwidths. */
export function estimateAt(
  subject: Subject,
  own: BySide,
  place: number,
  choices: Choices,
  settings: Settings,
): Made | undefined {
  const { bandwidths } = subject
  const places = {
    untreated: choices.side === 'treated' ? nearestPlace(bandwidths, own.untreated) : place,
    treated: choices.side === 'untreated' ? nearestPlace(bandwidths, own.treated) : place,
  }
  const found =
    subject.from === 'sides' ? ofSides(subject, places, choices, settings) : ofTable(subject, place, choices, settings)
  if (!found) return undefined
  const atEdge = choices.kernel === 'uniform' ? 1 : 0
  const count = (side: 'untreated' | 'treated') =>
    subject.units[side][2 * (choices.donut * bandwidths.length + places[side]) + atEdge]
  return {
    ...found,
    bandwidth: { untreated: bandwidths[places.untreated], treated: bandwidths[places.treated] },
    units: { untreated: count('untreated'), treated: count('treated') },
  }
}

type Found = Pick<Made, 'plain' | 'corrected'> | undefined

function ofSides(
  { bandwidths, sums }: Subject,
  places: BySide,
  { kernel, order, donut }: Choices,
  settings: Settings,
): Found {
  const jump = (fitOrder: number): Inference | undefined => {
    const [untreated, treated] = [places.untreated, places.treated].map((place, side): SideSums => {
      const fits = (donut * bandwidths.length + place) * 2 + side
      const at = (fits * kernels.length + kernels.indexOf(kernel)) * 15 + 4 * (fitOrder - 1)
      return { level: sums[at], variance: sums[at + 1], squares: sums[at + 2], fourths: sums[at + 3] }
    })
    return untreated.fourths + treated.fourths > 0 ? jumpOfSides(untreated, treated, settings) : undefined
  }
  const plain = jump(order)
  const corrected = jump(order + 1)
  return plain && corrected && { plain, corrected }
}

/** The plain curve of one side as a function of |x|; undefined where there is none or the sides are not apart. */
export function curveOf(
  { from, bandwidths, sums, centre }: Subject,
  side: 'untreated' | 'treated',
  place: number,
  { kernel, order, donut }: Omit<Choices, 'side'>,
): ((t: number) => number) | undefined {
  if (from !== 'sides') return undefined
  const fits = (donut * bandwidths.length + place) * 2 + (side === 'treated' ? 1 : 0)
  const at = (fits * kernels.length + kernels.indexOf(kernel)) * 15
  const level = centre + sums[at + 4 * (order - 1)]
  const [slope, bend] = order === 1 ? [sums[at + 12], 0] : [sums[at + 13], sums[at + 14]]
  return Number.isNaN(level) ? undefined : (t) => level + t * (slope + t * bend)
}

function ofTable(
  { bandwidths, variations, sums }: Subject,
  place: number,
  { side, kernel, order, donut }: Choices,
  { level }: Settings,
): Found {
  const variation = variations.findIndex((one) => one.side === side && one.donut === donut)
  if (variation < 0) return undefined
  const estimates = (variation * bandwidths.length + place) * kernels.length + kernels.indexOf(kernel)
  const [plain, corrected] = [0, 1].map((which) => {
    const at = ((2 * estimates + order - 1) * 2 + which) * 3
    return sums[at + 1] >= 0 ? infer(sums[at], sums[at + 1] * sums[at + 1], sums[at + 2], level) : undefined
  })
  return plain && corrected && { plain, corrected }
}

/** Places of the bandwidths that have an estimate under these choices. */
export function placesWith(subject: Subject, own: BySide, choices: Choices, settings: Settings): number[] {
  return subject.bandwidths.flatMap((_, place) => (estimateAt(subject, own, place, choices, settings) ? [place] : []))
}
