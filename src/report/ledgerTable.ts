/** From rows read to units used: what left at each step and why, and what border was set aside. */
import { capital } from './lineTable.js'
import { count, missing } from './numbers.js'
import { countCell, pCell, significantCell } from './tableCells.js'
import type { TextTable } from './tables.js'
import type { View } from './view.js'

export function ledgerTable(view: View): TextTable {
  const { ledger, placement } = view.results
  const onGround = ledger.some((step) => step.km !== undefined || step.pairs !== undefined)
  const border = (step: (typeof ledger)[number]) => [
    step.km === undefined ? missing : significantCell(step.km),
    step.pairs === undefined ? missing : countCell(step.pairs),
  ]
  return {
    caption: 'From rows read to units used',
    columns: [
      { head: 'Step', isText: true },
      { head: 'In' },
      { head: 'Set aside' },
      { head: 'Out' },
      ...(onGround ? [{ head: 'Border, km' }, { head: 'Zone pairs' }] : []),
      { head: 'Why', isText: true },
    ],
    rows: ledger.map((step) => [
      capital(step.step),
      countCell(step.in),
      countCell(step.in - step.out),
      countCell(step.out),
      ...(onGround ? border(step) : []),
      Object.entries(step.reasons)
        .map(([reason, units]) => `${reason}: ${count(units)}`)
        .join('; ') || missing,
    ]),
    notes: [
      `${count(placement.read)} rows read, ${count(placement.placed)} units placed against a line. In each row, in − set aside = out.`,
    ],
  }
}

/** Border that exists and was not used, by reason; nothing where all of it was. */
export function setAsideTable(view: View): TextTable | undefined {
  const pieces = (view.exhibits.map?.pieces ?? []).filter((piece) => piece.line === null)
  if (pieces.length === 0) return undefined
  const reasons = new Map<string, { pieces: number; metres: number }>()
  for (const piece of pieces) {
    const reason = piece.setAside ?? 'not used'
    const sum = reasons.get(reason) ?? { pieces: 0, metres: 0 }
    reasons.set(reason, { pieces: sum.pieces + 1, metres: sum.metres + piece.lengthMetres })
  }
  return {
    caption: 'Border set aside',
    columns: [{ head: 'Reason', isText: true }, { head: 'Pieces' }, { head: 'Length, km' }],
    rows: [...reasons].map(([reason, sum]) => [
      capital(reason),
      countCell(sum.pieces),
      significantCell(sum.metres / 1000),
    ]),
    notes: ['Units whose nearest piece was set aside were set aside with it.'],
  }
}

/** Every check by outcome; nothing where none was run. */
export function checksTable(view: View): TextTable | undefined {
  const rows = view.outcomes.flatMap(({ result }) => result.checks.map((check) => ({ outcome: result.outcome, check })))
  if (rows.length === 0) return undefined
  return {
    caption: 'Checks of credibility',
    columns: [
      { head: 'Check', isText: true },
      { head: 'Outcome', isText: true },
      { head: capital(view.words.line), isText: true },
      { head: 'Verdict', isText: true },
      { head: 'Statistic' },
      { head: 'p' },
      { head: 'p, Holm' },
      { head: 'What it says', isText: true },
    ],
    rows: rows.map(({ outcome, check }) => [
      capital(check.check),
      outcome,
      check.line === undefined ? 'all' : (view.lineOf.get(check.line)?.label ?? check.line),
      check.verdict,
      significantCell(check.statistic),
      pCell(check.p),
      pCell(check.p_holm),
      check.says,
    ]),
    notes: [],
  }
}
