/** What the rules of a border study cost and found: the waterfall, what else changes here, record against map. */
import { capital } from './lineTable.js'
import { missing } from './numbers.js'
import { type Cell, countCell, numberCell, significantCell, unitsCell } from './tableCells.js'
import type { TextTable } from './tables.js'
import type { View } from './view.js'

/** Rule by rule, what is left of the border and of the units; nothing for scores. */
export function waterfallTable(view: View): TextTable | undefined {
  const border = view.results.border
  if (!border) return undefined
  return {
    caption: 'What each rule leaves of the border',
    columns: [
      { head: 'Rule', isText: true },
      { head: 'Pieces left' },
      { head: 'Border, km' },
      { head: 'Zone pairs' },
      { head: 'Units placed' },
    ],
    rows: border.waterfall.map(({ rule, pieces, km, pairs, units }) => [
      capital(rule),
      countCell(pieces),
      significantCell(km),
      countCell(pairs),
      countCell(units),
    ]),
    notes: ['Rules apply in this order; units are those that would be placed under the rules so far.'],
  }
}

/** Share of each pair's border along which a layer's own lines run; nothing without layers. */
export function whatElseTable(view: View): TextTable | undefined {
  const found = view.results.border?.what_else_changes
  if (!found) return undefined
  const row = (name: string, km: number, shares: readonly (number | null)[]) => [
    name,
    significantCell(km),
    ...shares.map(percent),
  ]
  return {
    caption: 'What else changes here: share of the border in use along each layer',
    columns: [
      { head: 'Border between', isText: true },
      { head: 'Length, km' },
      ...found.layers.map((head) => ({ head })),
    ],
    rows: [
      row('All', found.whole.km, found.whole.shares),
      ...found.pairs.map(({ zones, km, shares }) => row(zones.join(' | '), km, shares)),
    ],
    notes: ['Where a layer runs along the border, the jump may belong to what it stands for.'],
  }
}

function percent(share: number | null): Cell {
  if (share === null) return missing
  return numberCell(share, share > 0 && share < 0.005 ? '<1%' : `${Math.round(share * 100)}%`)
}

/** Units whose zone by the record is not that of the map; nothing where the study has no such column. */
export function conflictTable(view: View): TextTable | undefined {
  const conflicts = view.results.border?.conflicts
  if (!conflicts) return undefined
  return {
    caption: 'Zone by the record against zone by the map',
    columns: [{ head: 'Record', isText: true }, { head: 'Map', isText: true }, { head: 'Units' }],
    rows: conflicts.map(({ record, map, units }) => [record, map, unitsCell(units, view.smallestCell)]),
    notes: [conflicts.length === 0 ? 'They agree for every unit.' : 'Units that agree are not listed.'],
  }
}
