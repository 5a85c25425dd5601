/** The bandwidths and holes at which an estimate is made again: edges of cells that hold units enough. */
import { bandwidthRange, countWithin, type Sample } from '../jump/index.js'

export interface StopOptions {
  /** About how many bandwidths. */
  readonly wanted: number
  /** The study's own, which are stops wherever their cells are full. */
  readonly own: { readonly untreated: number; readonly treated: number }
  /** Units that a cell holds on each side. */
  readonly fewest: number
  /** Whether a bandwidth is wide enough for what is known of the positions. */
  readonly isWide: (h: number) => boolean
}

/** Of the study's own bandwidths: where the ladder begins, if there are units enough, and where it ends. */
const [narrowest, widest] = [0.1, 2.5]
/** Of the study's own bandwidth. */
const holes = [0.1, 0.2]
const sides = ['untreated', 'treated'] as const

/**
 * Bandwidths in ascending order, spread evenly in their logarithm, of three digits or four. Every cell between two of
 * them, and between the first and the line, has `fewest` units on both sides; at a bandwidth itself there is none, or as
 * many again. Empty where there are too few units.
 */
export function bandwidthStops(sample: Sample, { wanted, own, fewest, isWide }: StopOptions): number[] {
  const { smallest: least, largest } = bandwidthRange(sample, 3)
  const smallest = Math.max(least, narrowest * Math.min(own.untreated, own.treated))
  const upTo = Math.min(largest, widest * Math.max(own.untreated, own.treated))
  const ladder: number[] = []
  for (let i = 0; i < wanted; i++) {
    const stop = withoutTies(sample, smallest * (upTo / smallest) ** (i / Math.max(1, wanted - 1)))
    if (stop !== undefined) ladder.push(stop)
  }
  const holds = (from: number, to: number) => sides.every((side) => between(sample, side, from, to) >= fewest)
  const isTold = (at: number) =>
    sides.every((side) => tiesAt(sample, side, at) === 0 || tiesAt(sample, side, at) >= fewest)
  const fixed = [...new Set([own.untreated, own.treated])].sort(ascending).filter((at) => isWide(at) && isTold(at))
  const kept: number[] = []
  for (const at of fixed) if (holds(kept.at(-1) ?? 0, at)) kept.push(at)
  const stops: number[] = []
  let next = 0
  for (const at of [...new Set(ladder)].sort(ascending)) {
    while (next < kept.length && kept[next] <= at) stops.push(kept[next++])
    if (at <= 0 || !isWide(at) || !holds(stops.at(-1) ?? 0, at)) continue
    if (next === kept.length || holds(at, kept[next])) stops.push(at)
  }
  return [...stops, ...kept.slice(next)]
}

/** The study's own hole, and the bandwidths nearest to some shares of its bandwidth: a hole's edge is then a cell's. */
export function donutStops(bandwidths: readonly number[], own: StopOptions['own'], donut: number): number[] {
  const narrower = Math.min(own.untreated, own.treated)
  const inside = bandwidths.filter((at) => at > donut && at <= narrower / 2)
  const nearest = (to: number) => inside.reduce((a, b) => (Math.abs(b - to) < Math.abs(a - to) ? b : a), inside[0])
  return inside.length > 0 ? [...new Set([donut, ...holes.map((share) => nearest(share * narrower))])] : [donut]
}

const ascending = (a: number, b: number) => a - b

function between(sample: Sample, side: (typeof sides)[number], from: number, to: number): number {
  const { t } = sample[side]
  return countWithin(t, to, 'triangular') - countWithin(t, from, 'triangular')
}

/** Units exactly there. */
function tiesAt(sample: Sample, side: (typeof sides)[number], at: number): number {
  const { t } = sample[side]
  return countWithin(t, at, 'uniform') - countWithin(t, at, 'triangular')
}

/** A number of three digits near the value, or half a digit beside it, where no unit is. */
function withoutTies(sample: Sample, value: number): number | undefined {
  if (!(value > 0 && value < Number.POSITIVE_INFINITY)) return undefined
  const short = Number(value.toPrecision(3))
  const beside = Number((short + 5 * 10 ** (Math.floor(Math.log10(short)) - 3)).toPrecision(4))
  return [short, beside].find((at) => sides.every((side) => tiesAt(sample, side, at) === 0))
}
