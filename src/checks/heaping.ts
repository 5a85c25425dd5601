/**
 * Do scores pile up at round numbers? Counts at the multiples of 5, 10, 25, 50, 100 … steps of the score against their
 * neighbours up to two steps away on both sides. A density that is straight over five steps gives a multiple the mean of
 * its neighbours; what curvature adds cancels over the multiples of a whole distribution. Counts are taken as Poisson.
 * Source: common practice (Barreca, Guldi, Lindo & Waddell 2011, QJE 126 ask for it); the statistic is ours.
 * A multiple of 25 is one of 5 and of 1 as well: heaping at 5 shows in all three, most at 5 itself.
 */
import { argsort, quantileOfSorted } from '../math/index.js'
import { binomialTail } from './binomial.js'
import { holm } from './multiplicity.js'

export interface HeapingRow {
  /** In units of the score. */
  readonly multiple: number
  /** Units at multiples that have neighbours on both sides, and those expected there from the neighbours. */
  readonly units: number
  readonly expected: number
  /** Of all units, heaps or not. */
  readonly share: number
  readonly z: number
  /** One-sided: more than expected; and adjusted for the number of multiples tried. */
  readonly p: number
  readonly pHolm: number
}

export interface Heap {
  readonly score: number
  readonly units: number
  /** From the neighbours on both sides. */
  readonly expected: number
}

export interface Heaping {
  readonly ok: true
  /** The step on which scores lie, or the width of bins where they lie on none. */
  readonly step: number
  readonly isRounded: boolean
  readonly rows: readonly HeapingRow[]
  /** The scores that stand out most, the most first. */
  readonly heaps: readonly Heap[]
}

export type HeapingOutcome = Heaping | { readonly ok: false; readonly reason: string }

const fewestUnits = 100
/** Units at multiples and their neighbours, below which a multiple is not tried. */
const fewestNear = 20
/** Heaps named in a score without any: this many a study at most. */
const falseHeaps = 0.05
const mostHeaps = 5
/** Share of the scores that may lie off a step. */
const shareOff = 0.005
/** Bins of a score that lies on no step, over the middle nine tenths. */
const fewestBins = 1000
/** A step this small a part of the middle nine tenths counts as none. */
const smallestStep = 1e-5

/** scores: as recorded, finite, in any order; every score of the study, so that one line's do not hide what others show. */
export function heapingOf(scores: Float64Array): HeapingOutcome {
  const n = scores.length
  if (n < fewestUnits) return { ok: false, reason: `only ${n} scores` }
  const order = argsort(scores)
  const sorted = Float64Array.from(order, (i) => scores[i])
  const spread = quantileOfSorted(sorted, 0.95) - quantileOfSorted(sorted, 0.05)
  if (!(spread > 0)) return { ok: false, reason: 'nine tenths of the scores are one value' }
  const found = stepOf(sorted, spread)
  const step = found ?? 10 ** Math.floor(Math.log10(spread / fewestBins))
  const counts = countsOn(sorted, step)
  const [lowest, highest] = [sorted[0], sorted[n - 1]].map((score) => Math.round(score / step))
  const tried = roundMultiples(step, spread).flatMap((multiple) => {
    const row = rowAt(counts, Math.round(multiple / step), lowest, highest)
    return row.trials < fewestNear ? [] : [{ multiple, ...row, share: row.all / n }]
  })
  if (tried.length === 0) return { ok: false, reason: 'too few scores lie near round numbers' }
  const adjusted = holm(tried.map(({ p }) => p))
  const rows = tried.map(({ all: _, trials: __, ...row }, i) => ({ ...row, pHolm: adjusted[i] }))
  return { ok: true, step, isRounded: found !== undefined, rows, heaps: heapsOf(counts, step, lowest, highest) }
}

/** The widest of 1, 2.5 and 5 times a power of ten on which all but a few scores lie. */
function stepOf(sorted: Float64Array, spread: number): number | undefined {
  const allowed = Math.floor(sorted.length * shareOff)
  for (let power = Math.ceil(Math.log10(spread)); 10 ** power >= spread * smallestStep; power--) {
    for (const step of [5, 2.5, 1].map((lead) => lead * 10 ** power)) {
      let off = 0
      for (let i = 0; i < sorted.length && off <= allowed; i++) {
        const index = sorted[i] / step
        if (!(Math.abs(index - Math.round(index)) < 1e-6)) off++
      }
      if (off <= allowed) return step
    }
  }
  return undefined
}

function countsOn(sorted: Float64Array, step: number): ReadonlyMap<number, number> {
  const counts = new Map<number, number>()
  for (let from = 0; from < sorted.length; ) {
    const index = Math.round(sorted[from] / step)
    let to = from + 1
    while (to < sorted.length && Math.round(sorted[to] / step) === index) to++
    counts.set(index, to - from)
    from = to
  }
  return counts
}

/** 1, 2.5 and 5 times powers of ten that are whole numbers of steps, more than one, and no wider than a third of the spread. */
function roundMultiples(step: number, spread: number): number[] {
  const multiples: number[] = []
  for (let power = Math.floor(Math.log10(step)); 10 ** power <= spread / 3; power++) {
    for (const multiple of [1, 2.5, 5].map((lead) => lead * 10 ** power)) {
      const steps = multiple / step
      const isWhole = Math.abs(steps - Math.round(steps)) < 1e-6
      if (isWhole && steps > 1.5 && multiple <= spread / 3) multiples.push(multiple)
    }
  }
  return multiples
}

/** Given how many lie at multiples and their neighbours together, those at multiples are binomial where counts are Poisson. */
function rowAt(counts: ReadonlyMap<number, number>, every: number, lowest: number, highest: number) {
  const reach = every >= 5 ? 2 : 1
  let [units, near, all] = [0, 0, 0]
  for (let at = Math.ceil(lowest / every) * every; at <= highest; at += every) {
    const here = counts.get(at) ?? 0
    all += here
    if (at - reach < lowest || at + reach > highest) continue
    units += here
    near += aroundOf(counts, at, reach)
  }
  // with every second step a multiple, each neighbour serves two of them
  const chance = every === 2 ? 1 / 2 : 1 / (2 * reach + 1)
  const trials = units + (every === 2 ? Math.round(near / 2) : near)
  const z = (units - trials * chance) / Math.sqrt(trials * chance * (1 - chance))
  return { units, expected: near / (2 * reach), all, trials, z, p: binomialTail(units, trials, chance) }
}

function aroundOf(counts: ReadonlyMap<number, number>, at: number, reach: number): number {
  let around = 0
  for (let away = 1; away <= reach; away++) around += (counts.get(at - away) ?? 0) + (counts.get(at + away) ?? 0)
  return around
}

function heapsOf(counts: ReadonlyMap<number, number>, step: number, lowest: number, highest: number): Heap[] {
  const heaps: (Heap & { excess: number })[] = []
  for (const [at, units] of counts) {
    if (at - 2 < lowest || at + 2 > highest) continue
    const expected = aroundOf(counts, at, 2) / 4
    if (units <= expected || binomialTail(units, units + 4 * expected, 0.2) * counts.size > falseHeaps) continue
    const excess = (units - expected) / Math.sqrt(units + 4 * expected)
    heaps.push({ score: Number((at * step).toPrecision(12)), units, expected, excess })
  }
  heaps.sort((a, b) => b.excess - a.excess || a.score - b.score)
  return heaps.slice(0, mostHeaps).map(({ excess: _, ...heap }) => heap)
}
