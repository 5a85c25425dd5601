/** Every number and text of a results.json under a name that does not depend on its place in a list. */

import type { LeafValue } from '../results.js'

export interface Leaf {
  /** `outcomes`, `[soil_kept]`, `pooled`, `corrected`, `estimate`: members of lists are in brackets, by what names them. */
  readonly path: readonly string[]
  readonly value: LeafValue
  /** That of the estimate the leaf belongs to. */
  readonly standardError?: number
}

/** What tells the members of a list apart, by the name of the list; members of other lists are numbered from 1. */
const namedBy: Readonly<Record<string, readonly string[]>> = {
  along: ['piece', 'position_m'],
  checks: ['check', 'line'],
  conflicts: ['record', 'map'],
  contrasts: ['lines'],
  elsewhere: ['line'],
  leave_one_out: ['line'],
  ledger: ['step'],
  lines: ['line'],
  moves: ['line', 'periods'],
  not_estimated: ['pair'],
  not_possible: ['line'],
  order_kernel: ['order', 'kernel'],
  outcomes: ['outcome'],
  pairs: ['zones', 'lines'],
  placebos: ['pair'],
  random_effects_without: ['line'],
  shrunken: ['line'],
  standards: ['requirement'],
  variants: ['variant'],
  waterfall: ['rule'],
}

/** What says which run it was, and not what it found. */
const aboutTheRun: ReadonlySet<string> = new Set([
  'format',
  'title',
  'version',
  'seed',
  'started',
  'seconds',
  'inputs',
  'geometry',
])

/** Leaves of a parsed results.json by `nameOf` their path, in its order; what is said about the run itself is left out. */
export function leavesOf(results: object): Map<string, Leaf> {
  const found = new Map<string, Leaf>()
  for (const [key, part] of Object.entries(results)) if (!aboutTheRun.has(key)) walk(part, [key], undefined, found)
  return found
}

/** `outcomes[soil_kept].pooled.corrected.estimate`. */
export function nameOf(path: readonly string[]): string {
  return path.map((part, i) => (i === 0 || part.startsWith('[') ? part : `.${part}`)).join('')
}

function walk(
  value: unknown,
  path: readonly string[],
  standardError: number | undefined,
  found: Map<string, Leaf>,
): void {
  if (Array.isArray(value)) {
    const names = memberNames(value, path[path.length - 1])
    value.forEach((member, i) => {
      walk(member, [...path, `[${names[i]}]`], undefined, found)
    })
  } else if (typeof value === 'object' && value !== null) {
    const own = (value as { standard_error?: unknown }).standard_error
    const error = typeof own === 'number' && own > 0 ? own : undefined
    for (const [key, part] of Object.entries(value))
      walk(part, [...path, isPlain(key) ? key : `[${key}]`], error, found)
  } else {
    found.set(nameOf(path), { path, value: value as LeafValue, ...(standardError ? { standardError } : {}) })
  }
}

/** The id of a line as a key, as in weights, is bracketed like the name of a member. */
const isPlain = (key: string) => /^[a-z][a-z0-9_]*$/.test(key)

/** Names that occur again get a number, so that none is lost. */
function memberNames(members: readonly unknown[], list: string): string[] {
  const seen = new Map<string, number>()
  return members.map((member, i) => {
    const parts = (namedBy[list] ?? []).map((key) => (member as Record<string, unknown> | null)?.[key])
    const words = parts.filter((part) => part !== undefined).flat()
    const name = words.length > 0 ? words.join(', ') : `${i + 1}`
    const times = (seen.get(name) ?? 0) + 1
    seen.set(name, times)
    return times === 1 ? name : `${name} (${times})`
  })
}
