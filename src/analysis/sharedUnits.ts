/** Which lines share units: a ladder's neighbours do, and so do lines at which one id appears more than once. */
import type { Placement } from '../placement.js'
import { labelsOf, type Table } from '../records/index.js'
import type { SharedUnits } from '../results.js'

/** The pairs of lines that share most. */
const mostPairs = 200

/**
 * Pairs of lines and how many serve both: units, or, where an id appears in more than one row, ids. Undefined where no
 * line shares anything.
 */
export function sharedUnits(placement: Placement, table: Table, id: string | undefined): SharedUnits | undefined {
  const codes = id === undefined ? undefined : labelsOf(table, id).codes
  const byId = codes !== undefined && hasRepeats(codes)
  if (!byId && placement.unit.every((unit, e) => e === 0 || unit !== placement.unit[e - 1])) return undefined
  const keyOf = (entry: number) => (byId ? codes[placement.unit[entry]] : placement.unit[entry])
  const linesOf = new Map<number, number[]>()
  const first = new Map<number, number>()
  for (let e = 0; e < placement.unit.length; e++) {
    const key = keyOf(e)
    if (key < 0) continue
    const line = placement.line[e]
    const known = first.get(key)
    if (known === undefined) first.set(key, line)
    else if (known !== line) {
      const list = linesOf.get(key) ?? [known]
      if (!list.includes(line)) list.push(line)
      linesOf.set(key, list)
    }
  }
  if (linesOf.size === 0) return undefined
  return { by: byId ? 'id' : 'unit', serving_several: linesOf.size, pairs: pairsOf(placement, linesOf) }
}

function hasRepeats(codes: Int32Array): boolean {
  const seen = new Set<number>()
  for (const code of codes) {
    if (code < 0) continue
    if (seen.has(code)) return true
    seen.add(code)
  }
  return false
}

function pairsOf({ lines }: Placement, linesOf: ReadonlyMap<number, readonly number[]>): SharedUnits['pairs'] {
  const counts = new Map<number, number>()
  for (const list of linesOf.values()) {
    const sorted = [...list].sort((a, b) => a - b)
    sorted.forEach((a, i) => {
      for (const b of sorted.slice(i + 1)) counts.set(a * lines.length + b, (counts.get(a * lines.length + b) ?? 0) + 1)
    })
  }
  return [...counts]
    .sort(([keyA, a], [keyB, b]) => b - a || keyA - keyB)
    .slice(0, mostPairs)
    .map(([key, count]) => ({
      lines: [lines[Math.floor(key / lines.length)].id, lines[key % lines.length].id],
      count,
    }))
}
