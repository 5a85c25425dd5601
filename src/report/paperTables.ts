/** Every table of tables/, by the name of its files; the page has some of them too. */
import { auditTable } from './auditTable.js'
import { conflictTable, waterfallTable, whatElseTable } from './borderTables.js'
import { comparisonTable, contrastTable } from './comparisonTable.js'
import { ladderTable, placeboTable, standardsTable } from './ladderTable.js'
import { checksTable, ledgerTable } from './ledgerTable.js'
import { paperLineTable } from './lineTable.js'
import { awayTable, movedTable } from './movedTable.js'
import { paperPooledTable } from './pooledTable.js'
import { sharedTable } from './sharedTable.js'
import type { TextTable } from './tables.js'
import { variantTable } from './variantTable.js'
import type { View } from './view.js'

export interface NamedTable {
  readonly name: string
  readonly table: TextTable
}

/** In the order of an appendix. */
export function paperTables(view: View): NamedTable[] {
  const { outcomes } = view
  const all: (readonly [string, TextTable | undefined])[] = [
    ['pooled', paperPooledTable(view)],
    ...outcomes.map((outcome) => [`lines-${outcome.slug}`, paperLineTable(view, outcome)] as const),
    ['comparison', view.results.lines.length > 1 ? comparisonTable(view) : undefined],
    ...outcomes.flatMap((outcome) => [
      [`contrasts-${outcome.slug}`, contrastTable(view, outcome)] as const,
      [`variants-${outcome.slug}`, variantTable(view, outcome)] as const,
      [`moved-${outcome.slug}`, movedTable(view, outcome)] as const,
      [`away-${outcome.slug}`, awayTable(view, outcome)] as const,
    ]),
    ['waterfall', waterfallTable(view)],
    ['what-else', whatElseTable(view)],
    ['sides', conflictTable(view)],
    ['shared-units', sharedTable(view)],
    ['checks', checksTable(view)],
    ...outcomes.flatMap((outcome) => [
      [`ladders-${outcome.slug}`, ladderTable(view, outcome)] as const,
      [`placebos-${outcome.slug}`, placeboTable(view, outcome)] as const,
      [`standards-${outcome.slug}`, standardsTable(outcome)] as const,
    ]),
    ['audit', auditTable(view)],
    ['ledger', ledgerTable(view)],
  ]
  return all.flatMap(([name, table]) => (table ? [{ name, table }] : []))
}
