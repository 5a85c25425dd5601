/** The CSV behind each figure against results.json, double by double; for tests only. */
import { expect } from 'vitest'
import type { Jump, OutcomeResult, Results, Rung } from '../../src/results.js'
import type { readCsv } from './reading.js'

type Rows = ReturnType<typeof readCsv>
type Numbers = Readonly<Record<string, number | null | undefined>>

/** Every column of `expected` reads back as the same double; nothing stands for null. */
function same(row: Rows[number] | undefined, expected: Numbers): void {
  for (const [column, value] of Object.entries(expected)) {
    const text = row?.[column]
    expect(text === '' ? null : Number(text), `${column} of ${JSON.stringify(row)}`).toBe(value ?? null)
  }
}

/** Returns how many figures were compared. `rowsOf`: the rows of figures/NAME.csv. */
export function compareFigures(results: Results, rowsOf: (name: string) => Rows): number {
  const compared = results.outcomes.map((outcome) =>
    compareOutcome(outcome, (kind) => rowsOf(`${outcome.outcome}-${kind}`)),
  )
  const ledger = rowsOf('ledger')
  results.ledger.forEach((step, i) => {
    same(ledger[i], { in: step.in, out: step.out, set_aside: step.in - step.out })
  })
  let shared = 1
  const { waterfall } = results.border ?? {}
  if (waterfall) {
    const rows = rowsOf('waterfall')
    waterfall.forEach(({ rule: _, ...numbers }, i) => {
      same(rows[i], numbers)
    })
    shared++
  }
  if (results.balance) {
    const rows = rowsOf('balance')
    expect(rows.map(({ column }) => column)).toEqual(results.balance.map(({ column }) => column))
    results.balance.forEach((row, i) => {
      if ('not_estimated' in row) throw new Error(row.not_estimated)
      const { estimate, low, high, p_holm, standard_deviation, standardised, units } = row
      same(rows[i], { estimate, low, high, p_holm, standard_deviation, units_treated: units.treated })
      same(rows[i], { standardised_estimate: standardised?.estimate, standardised_high: standardised?.high })
      expect(standardised?.estimate).toBe(estimate / standard_deviation)
    })
    shared++
  }
  return shared + compared.reduce((sum, one) => sum + one, 0)
}

const made = (rung: Rung): Numbers =>
  'not_estimated' in rung
    ? { estimate: null }
    : {
        estimate: rung.estimate,
        standard_error: rung.standard_error,
        low: rung.low,
        high: rung.high,
        p: rung.p,
        units_treated: rung.units.treated,
      }

function compareOutcome(outcome: OutcomeResult, rowsOf: (kind: string) => Rows): number {
  const { ladders, placebo_borders: borders, shifted_lines: shifted, along } = outcome
  const pooled = outcome.pooled as Jump
  let compared = 0
  if (ladders) {
    const bandwidths = rowsOf('bandwidth')
    expect(bandwidths.length).toBe(ladders.bandwidth.length + 1)
    for (const rung of ladders.bandwidth)
      same(
        bandwidths.find(({ scale }) => Number(scale) === rung.scale),
        made(rung),
      )
    same(
      bandwidths.find(({ scale }) => scale === '1'),
      { estimate: pooled.corrected.estimate, low: pooled.corrected.low },
    )
    const [own, ...rungs] = rowsOf('ladders')
    same(own, { estimate: pooled.corrected.estimate, high: pooled.corrected.high })
    const changed = [...ladders.donut, ...ladders.order_kernel]
    changed.forEach((rung, i) => {
      same(rungs[i], made(rung))
    })
    compared += 2
  }
  const placebos = [...(ladders?.placebo_lines ?? []), ...(shifted?.shifted ?? [])]
  if (placebos.length > 0) {
    const [own, ...rows] = rowsOf('placebo-lines')
    same(own, { at: 0, estimate: pooled.corrected.estimate })
    placebos.forEach((one, i) => {
      if (!('not_estimated' in one)) same(rows[i], { at: one.at, estimate: one.estimate, low: one.low, high: one.high })
    })
    compared++
  }
  if (borders) {
    const rows = rowsOf('placebo-borders')
    expect(rows.length).toBe(borders.placebos.length + 1)
    for (const effect of borders.placebos) {
      const row = rows.find(({ border }) => border === effect.pair.join(' | '))
      same(row, { estimate: effect.estimate, standard_error: effect.standard_error, low: effect.low, p: effect.p })
    }
    if (borders.rank !== undefined)
      expect(rows.findIndex(({ border }) => border === 'The real borders')).toBe(borders.rank - 1)
    compared++
  }
  const curve = pooled.bias_aware?.curve
  if (curve) {
    const rows = rowsOf('smoothness')
    curve.forEach((one, i) => {
      same(rows[i], { smoothness: one.smoothness, low: one.low, high: one.high })
    })
    same(rows[curve.length], { smoothness: pooled.bias_aware?.smoothness, estimate: pooled.bias_aware?.estimate })
    compared++
  }
  const slope = outcome.comparison?.slope
  if (slope && !('not_estimated' in slope) && slope.attribute === 'cutoff') {
    const rows = rowsOf('slope')
    same(rows.at(-2), { estimate: slope.estimate, low: slope.low, high: slope.high })
    same(rows.at(-1), { estimate: slope.intercept })
    for (const line of outcome.lines) {
      const row = rows.find((one) => one.line === line.line)
      if (!('not_estimated' in line)) same(row, { estimate: line.corrected.estimate, high: line.corrected.high })
    }
    compared++
  }
  if (along) {
    const rows = rowsOf('along')
    expect(Object.keys(rows[0])).not.toContain('lon')
    along.forEach((point, i) => {
      const { position_m, estimate, standard_error, low, high, uniform_low, uniform_high } = point
      same(rows[i], { position_m, estimate, standard_error, low, high, uniform_low, uniform_high })
    })
    compared++
  }
  return compared
}
