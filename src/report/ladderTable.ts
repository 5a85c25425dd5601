/** The pooled estimate made again with one choice changed, and at lines and borders that change nothing. */
import type { Jump, Rung } from '../results.js'
import { intervalCell, intervalParts, sideParts } from './lineTable.js'
import { missing, type Places, p, sharedPlaces, significant } from './numbers.js'
import { type Cell, fixedCell, pCell, severalCell, significantCell, unitsCell } from './tableCells.js'
import type { TableRow, TextTable } from './tables.js'
import { isEstimated, type OutcomeView, reasonText, type View, widthText } from './view.js'

export type RungMade = Extract<Rung, { readonly estimate: number }>

/** The study's own estimate beside its ladders: with take-up, of eligibility, as they are. */
export function ownRung(pooled: Jump): RungMade {
  const { bandwidth, units_in_bandwidth: units, take_up: takeUp, corrected } = pooled
  return { ...(takeUp ? takeUp.eligibility.corrected : corrected), bandwidth, units }
}

/** Places that all estimates of an outcome's ladders share. */
export function ladderPlaces({ result: { ladders, pooled } }: OutcomeView): Places {
  const rungs = ladders
    ? [...ladders.bandwidth, ...ladders.donut, ...ladders.order_kernel, ...ladders.placebo_lines]
    : []
  const made: { readonly estimate: number; readonly standard_error: number }[] = rungs.flatMap((rung) =>
    'not_estimated' in rung ? [] : [rung],
  )
  if (isEstimated<Jump>(pooled)) made.unshift(ownRung(pooled))
  return sharedPlaces(
    made.map((rung) => rung.standard_error),
    made.map(({ estimate }) => estimate),
  )
}

/** Nothing where no checks were run. */
export function ladderTable(view: View, outcome: OutcomeView): TextTable | undefined {
  const { result } = outcome
  const { ladders, pooled } = result
  if (!ladders || !isEstimated<Jump>(pooled)) return undefined
  const own = ownRung(pooled)
  const rungs: readonly (readonly [string, Rung])[] = [
    ['the study', own],
    ...ladders.bandwidth.map((rung) => [`${rung.scale} times the bandwidth`, rung] as const),
    ...ladders.donut.map((rung) => [`without units nearer than ${significant(rung.donut)}`, rung] as const),
    ...ladders.order_kernel.map((rung) => [`order ${rung.order}, ${rung.kernel}`, rung] as const),
    ...ladders.placebo_lines.map((rung) => [`line that is none at ${significant(rung.at)}`, rung] as const),
  ]
  const places = ladderPlaces(outcome)
  return {
    caption: `${result.outcome}: the pooled estimate with one choice changed`,
    columns: [
      { head: 'Change', isText: true },
      { head: 'N untreated' },
      { head: 'N treated' },
      { head: 'Bandwidth', parts: sideParts },
      { head: 'Estimate' },
      { head: 'Standard error' },
      { head: `${view.words.level} interval`, parts: intervalParts },
      { head: 'p' },
    ],
    rows: rungs.map(([head, rung]) => rungRow(view, head, rung, places)),
    notes: [
      'Corrected estimates. Other orders and kernels, and lines that are none, have bandwidths of their own; those lines use the units of one side alone.',
    ],
  }
}

function rungRow(view: View, head: string, rung: Rung, places: Places): TableRow {
  if ('not_estimated' in rung) return { head, across: `not estimated: ${reasonText(view, rung.not_estimated)}` }
  return [
    head,
    unitsCell(rung.units.untreated, view.smallestCell),
    unitsCell(rung.units.treated, view.smallestCell),
    widthWithUnit(view, rung.bandwidth),
    fixedCell(rung.estimate, places),
    fixedCell(rung.standard_error, places),
    intervalCell(rung, places),
    pCell(rung.p),
  ]
}

function widthWithUnit(view: View, width: Jump['bandwidth']): Cell {
  return severalCell(widthText(view, width), [significantCell(width.untreated), significantCell(width.treated)])
}

const placebosShown = 30

/** Effects at borders between zones of equal status, largest |t| first; nothing where there are none. */
export function placeboTable(view: View, { result }: OutcomeView): TextTable | undefined {
  const found = result.placebo_borders
  if (!found || found.placebos.length === 0) return undefined
  const places = sharedPlaces(
    found.placebos.map((effect) => effect.standard_error),
    found.placebos.map(({ estimate }) => estimate),
  )
  const sorted = [...found.placebos].sort(
    (a, b) => Math.abs(b.estimate / b.standard_error) - Math.abs(a.estimate / a.standard_error),
  )
  const rank =
    found.rank === undefined
      ? 'Too few for a rank.'
      : `Among them the real effect ranks ${found.rank} of ${found.of} by |t| (p = ${p(found.p)}).`
  const more =
    sorted.length > placebosShown ? ` ${sorted.length - placebosShown} smaller ones are in results.json.` : ''
  return {
    caption: `${result.outcome}: borders that change nothing`,
    columns: [
      { head: 'Border between', isText: true },
      { head: 'Units' },
      { head: 'Effect' },
      { head: 'Standard error' },
      { head: `${view.words.level} interval`, parts: intervalParts },
      { head: 'p' },
    ],
    rows: sorted
      .slice(0, placebosShown)
      .map((effect) => [
        effect.pair.join(' | '),
        unitsCell(effect.units, view.smallestCell),
        fixedCell(effect.estimate, places),
        fixedCell(effect.standard_error, places),
        intervalCell(effect, places),
        pCell(effect.p),
      ]),
    notes: [
      `${rank} Both zones of a pair have the same status; which counts as treated is arbitrary, so read sizes and not signs.${more}`,
    ],
  }
}

/** Requirements of the handbook, answered; nothing where no checks were run. */
export function standardsTable({ result }: OutcomeView): TextTable | undefined {
  const { standards } = result
  if (!standards) return undefined
  return {
    caption: `${result.outcome}: what the What Works Clearinghouse handbook asks of such designs`,
    columns: [
      { head: 'Requirement', isText: true },
      { head: 'Answer', isText: true },
      { head: 'What it rests on', isText: true },
      { head: 'Shown in', isText: true },
    ],
    rows: standards.map(({ requirement, answer, says, exhibit }) => [requirement, answer, says || missing, exhibit]),
    notes: [
      'The wording of the requirements is ours, from memory, and not a quotation; the handbook itself decides. No requirement counts as met without a number behind it.',
    ],
  }
}
