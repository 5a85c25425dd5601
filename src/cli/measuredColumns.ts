/** What `scarp measure` writes: one row for each unit read, placed or not. */
import type { Placed } from '../analyze.js'
import type { OutColumn } from '../records/files.js'
import { numbersOf, type Table } from '../records/index.js'

/**
 * Columns: `row` (from 1), the columns of the records as they are, then zone, line, piece, side, x, foot_lon, foot_lat,
 * position_m and reason. A column of the records that has one of these names is written as NAME_in_records.
 * `position`: the columns of longitude and latitude, degrees.
 */
export async function measuredColumns(
  table: Table,
  placed: Placed,
  position: readonly [string, string],
): Promise<OutColumn[]> {
  const { placement, ground, border } = placed
  if (!ground || !border) throw new Error('nothing was placed on the ground')
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
  const [lon, lat] = position.map((name) => numbersOf(table, name))
  const why = await reasons(placed, lineOfRow, lon, lat)
  const row: OutColumn = { kind: 'integer', name: 'row', values: Int32Array.from(x, (_, i) => i + 1) }
  const own: OutColumn[] = [
    { kind: 'label', name: 'zone', codes: ground.zone, labels: border.zones.names },
    { kind: 'label', name: 'line', codes: lineOfRow, labels: placement.lines.map(({ id }) => id) },
    { kind: 'number', name: 'piece', values: piece },
    { kind: 'label', name: 'side', codes: sideOfRow, labels: ['untreated', 'treated'] },
    { kind: 'number', name: 'x', values: x },
    { kind: 'number', name: 'foot_lon', values: ground.footLon },
    { kind: 'number', name: 'foot_lat', values: ground.footLat },
    { kind: 'number', name: 'position_m', values: ground.positionMetres },
    { kind: 'label', name: 'reason', ...why },
  ]
  const taken = new Set([row, ...own].map(({ name }) => name))
  const brought = [...table.columns.values()].map((column) =>
    taken.has(column.name) ? { ...column, name: `${column.name}_in_records` } : column,
  )
  return [row, ...brought, ...own]
}

const onBorderMetres = 0.001

/** Why each unit was not placed: codes and labels. The words are those of the border's own count. */
async function reasons(
  { ground, border, setAside }: Placed,
  lineOfRow: Int32Array,
  lon: Float64Array,
  lat: Float64Array,
): Promise<{ codes: Int32Array; labels: string[] }> {
  const { nearestEdges } = await import('../borders/index.js')
  const rows: number[] = []
  for (let row = 0; row < lineOfRow.length; row++) if (lineOfRow[row] < 0) rows.push(row)
  const nearest = nearestEdges(
    border!.tree,
    Float64Array.from(rows, (row) => lon[row]),
    Float64Array.from(rows, (row) => lat[row]),
  )
  const outside = ['in no zone', 'in more than one zone'].filter((reason) => setAside.has(reason))
  const labels = ['position missing', 'position out of range', 'exactly on the border', outside.join(' or ')]
  const codes = new Int32Array(lineOfRow.length).fill(-1)
  rows.forEach((row, i) => {
    if (Number.isNaN(lon[row]) || Number.isNaN(lat[row])) codes[row] = 0
    else if (Number.isNaN(nearest.distanceMetres[i])) codes[row] = 1
    else codes[row] = nearest.distanceMetres[i] < onBorderMetres || ground!.zone[row] >= 0 ? 2 : 3
  })
  return { codes, labels }
}
