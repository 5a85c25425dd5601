/** The study's pooled estimate made again on other lines, by the same options. */
import type { Study } from '../study/index.js'
import { entriesOfLine, type OutcomeEntries } from './entries.js'
import { type OutcomeEstimates, pooledOnly } from './estimating.js'
import type { Placed } from './placing.js'

/** Pools lines `from` to before `to` of a placement, whose entries stand together. */
export function pooledOverLines(
  study: Study,
  placed: Placed,
  entries: OutcomeEntries,
  from: number,
  to: number,
): OutcomeEstimates['pooled'] {
  const bounds = Int32Array.of(entries.start[from], entries.start[to])
  const all = entriesOfLine({ ...entries, start: bounds }, 0)
  const group = entries.all.group?.slice(bounds[0], bounds[1]).map((line) => line - from)
  const start = entries.start.slice(from, to + 1).map((at) => at - bounds[0])
  const few = { ...placed, placement: { ...placed.placement, lines: placed.placement.lines.slice(from, to) } }
  return pooledOnly(study, few, { ...entries, all: { ...all, group, repeats: entries.all.repeats }, start })
}
