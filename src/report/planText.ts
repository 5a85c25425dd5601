/** A plan as aligned lines for the terminal. */
import type { Plan } from '../results.js'
import { count, significant } from './numbers.js'
import { padded } from './padded.js'

const linesShown = 40
const barWidth = 40

export function planLines(plan: Plan): string[] {
  const power = `${Math.round(plan.power * 100)}%`
  const { effect } = plan
  const asked = effect === undefined ? [] : [`power at ${significant(effect)}`, `units for ${power}`]
  const head = ['line', 'units', 'standard error', `found with ${power}`, ...asked]
  const rows = plan.rows.map((row): string[] => {
    const name = row.outcome === undefined ? row.line : `${row.outcome}, ${row.line}`
    if ('not_planned' in row) return [name, `not planned: ${row.not_planned}`]
    const more =
      effect === undefined ? [] : [`${Math.round((row.power_at_effect ?? 0) * 100)}%`, count(row.units_needed)]
    return [name, count(row.units), significant(row.standard_error), significant(row.smallest_detectable), ...more]
  })
  const shown = rows.slice(0, linesShown)
  const leftOut = rows.length - shown.length
  const from =
    plan.from === 'records'
      ? 'from the records, by the standard error of each corrected estimate; units are those within the bandwidth'
      : 'from assumptions alone; units are those at the line'
  return [
    plan.title,
    from,
    ...padded([head, ...shown]),
    ...(leftOut > 0 ? [`and ${count(leftOut)} more; --json has them all`] : []),
    ...curveLines(plan),
    `two-sided tests at ${significant((1 - plan.level) * 100)}%; an effect is found with ${power} power if it is ${plan.multiple.toFixed(3)} standard errors`,
  ]
}

/** The power curve of the first row that has one: the pooled one where there are several lines. */
function curveLines({ rows }: Plan): string[] {
  const row = rows.find((one) => !('not_planned' in one))
  if (!row || 'not_planned' in row) return []
  const text = row.curve
    .filter((_, i) => i % 2 === 0)
    .map(({ effect, power }) => [
      `  ${significant(effect)}`,
      `${Math.round(power * 100)}%`,
      '#'.repeat(Math.round(power * barWidth)),
    ])
  const name = row.outcome === undefined ? row.line : `${row.outcome}, ${row.line}`
  return [`power by size of effect, ${name}`, ...padded(text, [0, 2])]
}
