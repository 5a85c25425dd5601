/** As if at random next to the line: a window in which predetermined columns are balanced, and Fisher's test of the outcome in it. */
import { balancedWindow, randomisationTest } from '../checks/index.js'
import { streamOf } from '../math/index.js'
import { numbersOf, type Table } from '../records/index.js'
import type { CheckResult } from '../results.js'
import type { Study } from '../study/index.js'
import type { Placed } from './placing.js'
import { shown } from './words.js'

const draws = 999
/** Windows grow with the number of lines up to this many. */
const mostTimes = 20

interface Window {
  readonly x: Float64Array
  readonly treated: Uint8Array
  readonly group: Int32Array
  readonly unit: Int32Array
  readonly width: number
}

export type WindowFound =
  | { readonly ok: true; readonly window: Window }
  | { readonly ok: false; readonly reason: string }

/** The window, and the entries in it. */
export function windowOf(study: Study, table: Table, { placement, cluster }: Placed): WindowFound {
  if (cluster) return { ok: false, reason: 'units come in clusters, and single units were not assigned by themselves' }
  const { x, treated, line: group, unit, lines } = placement
  const columns = study.predetermined.map((name) => {
    const values = numbersOf(table, name)
    return Float64Array.from(unit, (row) => values[row])
  })
  const times = Math.min(lines.length, mostTimes)
  const found = balancedWindow(x, columns, treated, { draws, group, times }, streamOf(study.seed, 6))
  if (!found.ok) return found
  const within = x.map((_, e) => e).filter((e) => Math.abs(x[e]) <= found.window)
  const of = <T extends Float64Array | Uint8Array | Int32Array>(values: T, made: T): T => {
    within.forEach((e, i) => {
      made[i] = values[e]
    })
    return made
  }
  const count = within.length
  return {
    ok: true,
    window: {
      x: of(x, new Float64Array(count)),
      treated: of(treated, new Uint8Array(count)),
      group: of(group, new Int32Array(count)),
      unit: of(unit, new Int32Array(count)),
      width: found.window,
    },
  }
}

/** `estimate`: the study's own, whose sign the window should not contradict. */
export function windowChecks(
  study: Study,
  table: Table,
  found: WindowFound,
  outcome: string,
  estimate: number | undefined,
): CheckResult[] {
  const check = 'window randomisation'
  if (!found.ok) return [{ check, verdict: 'not possible', says: found.reason }]
  const { x, treated, group, unit, width } = found.window
  const values = numbersOf(table, outcome)
  const y = Float64Array.from(unit, (row) => (Number.isFinite(values[row]) ? values[row] : Number.NaN))
  const options = { window: width, draws, statistic: 'means', group } as const
  const made = randomisationTest(x, y, treated, options, streamOf(study.seed, 7))
  if (!made.ok) return [{ check, verdict: 'not possible', says: `within ${shown(width)} of the line: ${made.reason}` }]
  const isContrary = made.p < 1 - study.estimation.level && estimate !== undefined && estimate * made.statistic < 0
  const basis =
    study.predetermined.length > 0 ? 'the widest in which predetermined columns are balanced' : 'the narrowest'
  const lines = new Set(group).size > 1 ? ', reassigned within lines' : ''
  const meaning = isContrary ? ': the other sign than the estimate' : ''
  const says = `within ${shown(width)} of the line (${basis}; ${made.units.untreated} and ${made.units.treated} units${lines}) the means differ by ${shown(made.statistic)}, p = ${shown(made.p)} by ${draws} seeded draws${meaning}`
  return [{ check, statistic: made.statistic, p: made.p, verdict: isContrary ? 'doubt' : 'fine', says }]
}
