/** What `scarp measure` writes: one row for each unit read, placed or not. */
import type { Placed } from '../analyze.js'
import type { OutColumn } from '../records/files.js'
import type { Table } from '../records/index.js'

/**
 * Columns: `row` (from 1), the columns of the records as they are, then zone, line, piece, side, x, foot_lon, foot_lat,
 * position_m and reason. A unit that was not placed has a reason, and no line, piece, side or x; its foot is that on the
 * nearest piece. A column of the records that has one of these names is written as NAME_in_records.
 */
export function measuredColumns(table: Table, placed: Placed): OutColumn[] {
  const { placement, ground, border, reason } = placed
  if (!ground || !border || !reason) throw new Error('nothing was placed on the ground')
  const { rows } = table
  const lineOfRow = new Int32Array(rows).fill(-1)
  const sideOfRow = new Int32Array(rows).fill(-1)
  const x = new Float64Array(rows).fill(Number.NaN)
  const piece = new Float64Array(rows).fill(Number.NaN)
  for (let e = 0; e < placement.unit.length; e++) {
    const row = placement.unit[e]
    lineOfRow[row] = placement.line[e]
    sideOfRow[row] = placement.treated[e]
    x[row] = placement.x[e]
    piece[row] = placement.lines[placement.line[e]].piece ?? Number.NaN
  }
  const row: OutColumn = { kind: 'integer', name: 'row', values: Int32Array.from(x, (_, i) => i + 1) }
  const own: OutColumn[] = [
    { kind: 'label', name: 'zone', codes: ground.zone, labels: border.names },
    { kind: 'label', name: 'line', codes: lineOfRow, labels: placement.lines.map(({ id }) => id) },
    { kind: 'number', name: 'piece', values: piece },
    { kind: 'label', name: 'side', codes: sideOfRow, labels: ['untreated', 'treated'] },
    { kind: 'number', name: 'x', values: x },
    { kind: 'number', name: 'foot_lon', values: ground.footLon },
    { kind: 'number', name: 'foot_lat', values: ground.footLat },
    { kind: 'number', name: 'position_m', values: ground.positionMetres },
    { kind: 'label', name: 'reason', ...reason },
  ]
  const taken = new Set([row, ...own].map(({ name }) => name))
  const brought = [...table.columns.values()].map((column) =>
    taken.has(column.name) ? { ...column, name: `${column.name}_in_records` } : column,
  )
  return [row, ...brought, ...own]
}
