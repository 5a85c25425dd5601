/**
 * As if at random within a narrow window: Fisher's test by seeded permutations, and a window in which predetermined columns
 * are balanced.
 * Source: Cattaneo, Frandsen & Titiunik 2015, J. Causal Inference 3; METHODS section 11.
 * Units with |x| ≤ window; the number treated is held fixed; p = (1 + draws at least as far from 0 as the statistic)/(1 + draws),
 * exact at any number of draws (Phipson & Smyth 2010).
 */
import { argsort, quantileOfSorted, type Random } from '../math/index.js'

export interface RandomisationOptions {
  /** In units of x. */
  readonly window: number
  readonly draws: number
  /** Difference of the means, or of the mean ranks (ties share theirs), treated less untreated. */
  readonly statistic: 'means' | 'ranks'
}

export interface Randomisation {
  readonly ok: true
  readonly statistic: number
  readonly p: number
  readonly window: number
  readonly units: { readonly untreated: number; readonly treated: number }
}

export type RandomisationOutcome = Randomisation | { readonly ok: false; readonly reason: string }

const fewestPerSide = 5

/** x, y: one entry a unit, y NaN where missing; treated: 1 on the treated side. */
export function randomisationTest(
  x: Float64Array,
  y: Float64Array,
  treated: Uint8Array,
  { window, draws, statistic }: RandomisationOptions,
  random: Random,
): RandomisationOutcome {
  if (!(window > 0)) throw new RangeError(`a window is wider than 0, not ${window}`)
  if (!(draws >= 1)) throw new RangeError(`a permutation test needs draws, not ${draws}`)
  if (y.length !== x.length || treated.length !== x.length)
    throw new RangeError(`x has ${x.length} rows, y ${y.length}, treated ${treated.length}`)
  const within = x.map((_, i) => i).filter((i) => Math.abs(x[i]) <= window && !Number.isNaN(y[i]))
  const right = within.filter((i) => treated[i] === 1)
  const left = within.filter((i) => treated[i] !== 1)
  const few = [left, right].findIndex((side) => side.length < fewestPerSide)
  if (few >= 0)
    return {
      ok: false,
      reason: `only ${[left, right][few].length} units on the ${few === 0 ? 'untreated' : 'treated'} side`,
    }
  const [m, n] = [right.length, within.length]
  const recorded = Float64Array.from([...right, ...left], (i) => y[i])
  const values = statistic === 'ranks' ? ranksOf(recorded) : recorded
  const centre = values.reduce((sum, value) => sum + value, 0) / n
  const centred = values.map((value) => value - centre)
  const perSum = 1 / m + 1 / (n - m)
  const observed = sumOf(centred, m)
  // sums of the same values in another order differ in their last digits
  const least = Math.abs(observed) - 1e-12 * centred.reduce((sum, value) => sum + Math.abs(value), 0)
  let reached = 0
  for (let draw = 0; draw < draws; draw++) {
    shuffleFirst(centred, Math.min(m, n - m), random)
    if (Math.abs(sumOf(centred, Math.min(m, n - m))) >= least) reached++
  }
  return {
    ok: true,
    statistic: observed * perSum,
    p: (1 + reached) / (1 + draws),
    window,
    units: { untreated: n - m, treated: m },
  }
}

function sumOf(values: Float64Array, count: number): number {
  let sum = 0
  for (let i = 0; i < count; i++) sum += values[i]
  return sum
}

/** Puts `count` values drawn without return first (Fisher & Yates). */
function shuffleFirst(values: Float64Array, count: number, random: Random): void {
  for (let i = 0; i < count; i++) {
    const j = i + random.integer(values.length - i)
    const value = values[i]
    values[i] = values[j]
    values[j] = value
  }
}

function ranksOf(values: Float64Array): Float64Array {
  const order = argsort(values)
  const ranks = new Float64Array(values.length)
  for (let from = 0; from < order.length; ) {
    let to = from + 1
    while (to < order.length && values[order[to]] === values[order[from]]) to++
    for (let i = from; i < to; i++) ranks[order[i]] = (from + to + 1) / 2
    from = to
  }
  return ranks
}

export interface BalancedWindow {
  readonly ok: true
  readonly window: number
  /** Smallest p of the columns in each window tried, narrowest first. */
  readonly tried: readonly { readonly window: number; readonly smallestP: number }[]
}

/** Columns with a p below this are out of balance (Cattaneo, Frandsen & Titiunik 2015). */
const leastP = 0.15
const windowsTried = 20

/**
 * The widest window in which, as in every narrower one, no predetermined column differs: windows that hold 10, 15, 20 …
 * units on each side. Without columns: the narrowest.
 */
export function balancedWindow(
  x: Float64Array,
  columns: readonly Float64Array[],
  treated: Uint8Array,
  draws: number,
  random: Random,
): BalancedWindow | { readonly ok: false; readonly reason: string } {
  const sides = [0, 1].map((side) =>
    x
      .filter((_, i) => treated[i] === side)
      .map(Math.abs)
      .sort(),
  )
  const shorter = Math.min(...sides.map((side) => side.length))
  if (shorter < 10) return { ok: false, reason: `only ${shorter} units on one side` }
  const holding = (count: number) =>
    Math.max(...sides.map((side) => quantileOfSorted(side, (count - 1) / Math.max(1, side.length - 1)))) * (1 + 1e-9)
  const windows = Array.from({ length: windowsTried }, (_, k) => 10 + 5 * k)
    .filter((count) => count <= shorter)
    .map(holding)
    .filter((window) => window > 0)
  const tried: { window: number; smallestP: number }[] = []
  for (const window of columns.length === 0 ? windows.slice(0, 1) : windows) {
    const made = columns.map((column) =>
      randomisationTest(x, column, treated, { window, draws, statistic: 'means' }, random),
    )
    const smallestP = Math.min(1, ...made.flatMap((one) => (one.ok ? [one.p] : [])))
    tried.push({ window, smallestP })
    if (smallestP < leastP) break
  }
  const balanced = tried.filter(({ smallestP }) => smallestP >= leastP)
  if (balanced.length === 0) return { ok: false, reason: 'predetermined columns differ even in the narrowest window' }
  return { ok: true, window: balanced[balanced.length - 1].window, tried }
}
