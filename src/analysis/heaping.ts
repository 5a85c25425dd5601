/** Do scores pile up at round numbers, and does such a heap lie on a cutoff? */
import { type Heap, heapingOf } from '../checks/index.js'
import { numbersOf, type Table } from '../records/index.js'
import type { CheckResult } from '../results.js'
import type { Study } from '../study/index.js'
import type { Placed } from './placing.js'
import { shown } from './words.js'

/** Of the scores as recorded, or of ready-made distances; a border has none. */
export function heapingChecks(study: Study, table: Table, { placement }: Placed): CheckResult[] {
  const { line } = study
  if (line.kind === 'border') return []
  const check = 'heaping'
  const column = numbersOf(table, line.kind === 'score' ? line.score : line.distance)
  const units = placement.unit.filter((unit, e) => e === 0 || unit !== placement.unit[e - 1])
  const made = heapingOf(Float64Array.from(units, (unit) => column[unit]))
  if (!made.ok) return [{ check, verdict: 'not possible', says: made.reason }]
  const flagged = made.rows.filter(({ pHolm }) => pHolm < 1 - study.estimation.level)
  const step = made.isRounded ? `recorded in steps of ${shown(made.step)}; ` : ''
  if (flagged.length === 0) {
    const least = made.rows.reduce((a, b) => (b.p < a.p ? b : a))
    const multiples = made.rows.map(({ multiple }) => multiple)
    const says = `${step}no round number from ${shown(Math.min(...multiples))} to ${shown(Math.max(...multiples))} has multiples that hold more units than the scores beside them by more than chance`
    return [{ check, statistic: least.z, p: least.p, p_holm: least.pHolm, verdict: 'fine', says }]
  }
  const first = flagged.reduce((a, b) => (b.z > a.z ? b : a))
  const times = `multiples of ${shown(first.multiple)} hold ${shown(first.units / first.expected)} times the units that scores beside them have`
  const heaps = made.heaps.filter((heap) => heap.units >= study.disclosure.smallestCell)
  const says = `${step}${times}${heapWords(heaps)}${onCutoffs(heaps, placement.lines)}: leave the heaps out by a donut, or ask who wrote the scores down`
  return [{ check, statistic: first.z, p: first.p, p_holm: first.pHolm, verdict: 'doubt', says }]
}

function heapWords(heaps: readonly Heap[]): string {
  if (heaps.length === 0) return ''
  const named = heaps.map(({ score, units, expected }) => `${score} (${units} units, ${shown(expected)} expected)`)
  return `; the largest heaps are at ${named.join(', ')}`
}

function onCutoffs(heaps: readonly Heap[], lines: Placed['placement']['lines']): string {
  const on = lines.filter(({ cutoff }) => cutoff !== undefined && heaps.some(({ score }) => score === cutoff))
  if (on.length === 0) return ''
  const [{ label }] = on
  return on.length === 1 ? `; one lies on the cutoff of ${label}` : `; heaps lie on the cutoffs of ${on.length} lines`
}
