/** Lines at which the audited column breaks elsewhere. */
import { count, significant } from './numbers.js'
import { pCell, severalCell, significantCell } from './tableCells.js'
import type { TextTable } from './tables.js'
import { howMany, labelOf, type View } from './view.js'

/** Nothing where the study asks for no audit. */
export function auditTable(view: View): TextTable | undefined {
  const { audit } = view.results
  if (!audit) return undefined
  const skipped = audit.not_possible.length > 0 ? ` ${count(audit.not_possible.length)} have too few units for it.` : ''
  const none = audit.elsewhere.length === 0 ? ' None breaks elsewhere.' : ''
  return {
    caption: `Does ${audit.column} jump where the lines are said to be?`,
    columns: [
      { head: 'Line', isText: true },
      { head: 'Its break, from the line', parts: ['at', 'within'] },
      { head: 'Jump there' },
      { head: 'p, Holm' },
      { head: 'Jump at the line' },
      { head: 'p' },
    ],
    rows: audit.elsewhere.map((found) => [
      labelOf(view, found.line),
      severalCell(`${significant(found.at)} ± ${significant(found.within)}`, [
        significantCell(found.at),
        significantCell(found.within),
      ]),
      significantCell(found.jump),
      pCell(found.p_holm),
      significantCell(found.jump_at_line),
      pCell(found.p_at_line),
    ]),
    notes: [
      `${howMany(view, audit.audited)} audited.${none}${skipped} The place is looked for in one half of the units and tested in the other. Nothing is changed: ask who keeps the schedule.`,
    ],
  }
}
