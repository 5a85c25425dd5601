/** Two runs side by side: what differs between them, and every number that moved. */
import type { ComparedRuns, HeldAlone, MovedNumber, OutcomeResult, Reworded } from '../results.js'
import { type Run, runDifferences } from './runDifferences.js'
import { type Leaf, leavesOf, nameOf } from './runLeaves.js'

/** Doubles are equal where all their bits are, and only then. `differs` explains what moved as far as the folders tell. */
export function compareRuns(first: Run, second: Run): ComparedRuns {
  const [before, after] = [leavesOf(first.results), leavesOf(second.results)]
  const moved: MovedNumber[] = []
  const reworded: Reworded[] = []
  let equal = 0
  for (const [number, leaf] of before) {
    const other = after.get(number)
    if (!other) continue
    const named = { number, path: leaf.path, main: isMain(leaf.path) }
    if (Object.is(leaf.value, other.value)) equal += typeof leaf.value === 'number' ? 1 : 0
    else if (typeof leaf.value === 'number' && typeof other.value === 'number') {
      moved.push({ ...named, ...distance(leaf.value, other.value, leaf.standardError ?? other.standardError) })
    } else reworded.push({ ...named, first: leaf.value, second: other.value })
  }
  return {
    differs: runDifferences(first, second),
    moved: moved.sort(farthestFirst),
    reworded,
    only: { first: heldAlone(before, after), second: heldAlone(after, before) },
    lines: {
      appeared: without(linesOf(second), linesOf(first)),
      disappeared: without(linesOf(first), linesOf(second)),
    },
    estimability: estimabilityOf(first, second),
    equal,
  }
}

function distance(first: number, second: number, standardError: number | undefined) {
  const difference = second - first
  return {
    first,
    second,
    difference,
    standard_error: standardError ?? null,
    in_standard_errors: standardError === undefined ? null : difference / standardError,
  }
}

function farthestFirst(a: MovedNumber, b: MovedNumber): number {
  const [first, second] = [a, b].map((one) => Math.abs(one.in_standard_errors ?? Number.NaN))
  if (!Number.isNaN(first) && !Number.isNaN(second)) return second - first
  if (Number.isNaN(first) !== Number.isNaN(second)) return Number.isNaN(first) ? 1 : -1
  return shareOf(b) - shareOf(a)
}

function shareOf({ first, second, difference }: MovedNumber): number {
  return Math.abs(difference) / Math.max(Math.abs(first), Math.abs(second))
}

function heldAlone(own: ReadonlyMap<string, Leaf>, other: ReadonlyMap<string, Leaf>): HeldAlone[] {
  return [...own]
    .filter(([number]) => !other.has(number))
    .map(([number, { path, value }]) => ({ number, path, main: isMain(path), value }))
}

const main: readonly RegExp[] = [
  /^pooled\.(corrected|plain|bias_aware)\.(estimate|standard_error)$/,
  /^lines\[.*\]\.corrected\.(estimate|standard_error)$/,
  /^target\.(estimate|standard_error)$/,
  /^comparison\.(wald\.p|welch\.p|q|i_squared|tau_squared\.reml|random_effects\.(estimate|standard_error))$/,
  /^checks\[.*\]\.verdict$/,
]

function isMain([top, , ...path]: readonly string[]): boolean {
  const name = nameOf(path)
  return top === 'outcomes' && main.some((pattern) => pattern.test(name))
}

const linesOf = ({ results }: Run) => results.lines.map(({ line }) => line)

function without(lines: readonly string[], others: readonly string[]): string[] {
  const known = new Set(others)
  return lines.filter((line) => !known.has(line))
}

/** Reasons of the pooled estimate, the target and each line, by what they are of; undefined where there is an estimate. */
function reasonsOf({ outcome, pooled, target, lines }: OutcomeResult): [string, string | undefined][] {
  const reasonOf = (jump: object) => ('not_estimated' in jump ? String(jump.not_estimated) : undefined)
  return [
    [`${outcome}, pooled`, reasonOf(pooled)],
    [`${outcome}, target`, reasonOf(target)],
    ...lines.map((jump): [string, string | undefined] => [`${outcome}, ${jump.line}`, reasonOf(jump)]),
  ]
}

function estimabilityOf(first: Run, second: Run): ComparedRuns['estimability'] {
  const after = new Map(second.results.outcomes.flatMap(reasonsOf))
  return first.results.outcomes.flatMap(reasonsOf).flatMap(([what, before]): ComparedRuns['estimability'] => {
    if (!after.has(what)) return []
    const now = after.get(what)
    if (before !== undefined && now === undefined) return [{ what, now: 'estimated', reason: before }]
    return before === undefined && now !== undefined ? [{ what, now: 'not estimated', reason: now }] : []
  })
}
