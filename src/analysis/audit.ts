/** Lines at which take-up, or a named column, breaks elsewhere than the schedule says; nothing is changed. */

import { auditLine } from '../checks/index.js'
import { argsortBy, streamOf } from '../math/index.js'
import { numbersOf } from '../records/index.js'
import type { CutoffAudit } from '../results.js'
import type { Study } from '../study/index.js'
import { adjustedFor } from './adjusted.js'
import { entriesOfLine, entriesOfValues, type OutcomeEntries } from './entries.js'
import type { AnalysisInputs } from './inputs.js'
import type { Placed } from './placing.js'

/** Undefined where the study asks for none. The units of each line are split in two by a seeded draw. */
export function auditOf(study: Study, { table }: AnalysisInputs, placed: Placed): CutoffAudit | undefined {
  if (study.audit === undefined) return undefined
  const entries = entriesOfValues(study, table, placed, numbersOf(table, study.audit))
  const { lines } = placed.placement
  const found = lines.map((line, i) => ({ line: line.id, ...auditLine(...halvesOf(entries, i, study.seed)) }))
  const tested = found.flatMap((one) => (one.ok ? [one] : []))
  const adjusted = adjustedFor(tested.map(({ p }) => p))
  return {
    column: study.audit,
    audited: tested.length,
    not_possible: found.flatMap((one) => (one.ok ? [] : [{ line: one.line, reason: one.reason }])),
    elsewhere: tested.flatMap((one, i) => {
      const isElsewhere = Math.abs(one.at) > one.step && one.isClearer
      if (!isElsewhere || !(adjusted[i].p_holm < 1 - study.estimation.level)) return []
      const { line, at, jump, p, jumpAtLine, pAtLine, step } = one
      return [{ line, at, within: step, jump, p, ...adjusted[i], jump_at_line: jumpAtLine, p_at_line: pAtLine }]
    }),
  }
}

type Half = Parameters<typeof auditLine>[0]

/** In the order of x and y, so that the order of rows does not decide which half a unit is in. */
function halvesOf(entries: OutcomeEntries, line: number, seed: number): [Half, Half] {
  const { x, y } = entriesOfLine(entries, line)
  const random = streamOf(seed, 1_000_000 + line)
  const halves: [number[], number[]] = [[], []]
  for (const i of argsortBy([x, y])) halves[random.next() < 0.5 ? 0 : 1].push(i)
  const half = (rows: readonly number[]): Half => ({
    x: Float64Array.from(rows, (i) => x[i]),
    y: Float64Array.from(rows, (i) => y[i]),
  })
  return [half(halves[0]), half(halves[1])]
}
