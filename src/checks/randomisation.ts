/**
 * As if at random within a narrow window: Fisher's test by seeded permutations, and a window in which predetermined columns
 * are balanced.
 * Source: Cattaneo, Frandsen & Titiunik 2015, J. Causal Inference 3; METHODS section 11.
 * Units with |x| ≤ window, as if assigned within groups that hold both sides (lines, say), the number treated of each held fixed;
 * the statistic weighs a group's difference by units treated × untreated / all; p = (1 + draws at least as far from 0 as the statistic)/(1 + draws),
 * exact at any number of draws (Phipson & Smyth 2010).
 */
import { argsort, quantileOfSorted, type Random } from '../math/index.js'

export interface RandomisationOptions {
  /** In units of x. */
  readonly window: number
  readonly draws: number
  /** Difference of the means, or of the mean ranks (ties share theirs), treated less untreated. */
  readonly statistic: 'means' | 'ranks'
  /** Group of each unit, from 0; absent: one group. */
  readonly group?: Int32Array
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
  { window, draws, statistic, group }: RandomisationOptions,
  random: Random,
): RandomisationOutcome {
  if (!(window > 0)) throw new RangeError(`a window is wider than 0, not ${window}`)
  if (!(draws >= 1)) throw new RangeError(`a permutation test needs draws, not ${draws}`)
  if (y.length !== x.length || treated.length !== x.length)
    throw new RangeError(`x has ${x.length} rows, y ${y.length}, treated ${treated.length}`)
  const within = x.map((_, i) => i).filter((i) => Math.abs(x[i]) <= window && !Number.isNaN(y[i]))
  const groups = groupsOf(within, treated, group)
  const all = (side: 'right' | 'left') => groups.reduce((sum, one) => sum + one[side].length, 0)
  const units = { untreated: all('left'), treated: all('right') }
  for (const side of ['untreated', 'treated'] as const)
    if (units[side] < fewestPerSide) return { ok: false, reason: `only ${units[side]} units on the ${side} side` }
  const parts = groups.map(({ right, left }) => partOf(right, left, y, statistic))
  const scale = parts.reduce((sum, { weight }) => sum + weight, 0)
  const observed = parts.reduce((sum, { centred, sign, count }) => sum + sign * sumOf(centred, count), 0)
  // sums of the same values in another order differ in their last digits
  const size = parts.reduce((sum, { centred }) => sum + centred.reduce((inner, value) => inner + Math.abs(value), 0), 0)
  const least = Math.abs(observed) - 1e-12 * size
  let reached = 0
  for (let draw = 0; draw < draws; draw++) {
    let drawn = 0
    for (const { centred, sign, count } of parts) {
      shuffleFirst(centred, count, random)
      drawn += sign * sumOf(centred, count)
    }
    if (Math.abs(drawn) >= least) reached++
  }
  return { ok: true, statistic: observed / scale, p: (1 + reached) / (1 + draws), window, units }
}

interface Sides {
  readonly right: number[]
  readonly left: number[]
}

/** Units by group and side; groups with one side alone say nothing. */
function groupsOf(within: Float64Array, treated: Uint8Array, group: Int32Array | undefined): Sides[] {
  const groups = new Map<number, Sides>()
  for (const i of within) {
    const key = group ? group[i] : 0
    const sides = groups.get(key) ?? { right: [], left: [] }
    sides[treated[i] === 1 ? 'right' : 'left'].push(i)
    groups.set(key, sides)
  }
  const complete = [...groups.values()].filter(({ right, left }) => right.length > 0 && left.length > 0)
  return group || complete.length > 0 ? complete : [...groups.values()]
}

/** A group's values less their mean, those of its smaller side first: their sum times the sign is that of the treated. */
function partOf(
  right: readonly number[],
  left: readonly number[],
  y: Float64Array,
  statistic: RandomisationOptions['statistic'],
) {
  const isRightFirst = right.length <= left.length
  const recorded = Float64Array.from(isRightFirst ? [...right, ...left] : [...left, ...right], (i) => y[i])
  const values = statistic === 'ranks' ? ranksOf(recorded) : recorded
  const centre = values.reduce((sum, value) => sum + value, 0) / values.length
  return {
    centred: values.map((value) => value - centre),
    count: Math.min(right.length, left.length),
    sign: isRightFirst ? 1 : -1,
    weight: (right.length * left.length) / values.length,
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

export interface WindowOptions {
  readonly draws: number
  readonly group?: Int32Array
  /** Windows hold 10, 15, 20 … times this many units on each side. */
  readonly times?: number
}

/** The widest window in which, as in every narrower one, no predetermined column differs. Without columns: the narrowest. */
export function balancedWindow(
  x: Float64Array,
  columns: readonly Float64Array[],
  treated: Uint8Array,
  { draws, group, times = 1 }: WindowOptions,
  random: Random,
): BalancedWindow | { readonly ok: false; readonly reason: string } {
  const sides = [0, 1].map((side) =>
    x
      .filter((_, i) => treated[i] === side)
      .map(Math.abs)
      .sort(),
  )
  const shorter = Math.min(...sides.map((side) => side.length))
  if (shorter < 10 * times) return { ok: false, reason: `only ${shorter} units on one side, ${10 * times} are needed` }
  const holding = (count: number) =>
    Math.max(...sides.map((side) => quantileOfSorted(side, (count - 1) / Math.max(1, side.length - 1)))) * (1 + 1e-9)
  const windows = Array.from({ length: windowsTried }, (_, k) => (10 + 5 * k) * times)
    .filter((count) => count <= shorter)
    .map(holding)
    .filter((window) => window > 0)
  const tried: { window: number; smallestP: number }[] = []
  for (const window of columns.length === 0 ? windows.slice(0, 1) : windows) {
    const made = columns.map((column) =>
      randomisationTest(x, column, treated, { window, draws, statistic: 'means', group }, random),
    )
    const smallestP = Math.min(1, ...made.flatMap((one) => (one.ok ? [one.p] : [])))
    tried.push({ window, smallestP })
    if (smallestP < leastP) break
  }
  const balanced = tried.filter(({ smallestP }) => smallestP >= leastP)
  if (balanced.length === 0) return { ok: false, reason: 'predetermined columns differ even in the narrowest window' }
  return { ok: true, window: balanced[balanced.length - 1].window, tried }
}
