/** What `scarp measure` writes: one row for each unit read, placed or not. */
import type { Placed } from '../analyze.js'
import { manyZones, type RunnerUps } from '../borders/index.js'
import type { OutColumn } from '../records/files.js'
import type { Table } from '../records/index.js'

/** The zone of a unit that lies in more than one. */
export const severalZones = '(several)'

export interface MeasuredExtras {
  /** The nearest border of another pair of zones, by row. */
  readonly runnerUp?: RunnerUps
  /** Leave out what says where a unit is: these columns of the records, and its foot. */
  readonly withoutCoordinates?: readonly string[]
}

/**
 * Columns: `row` (from 1), the columns of the records as they are, then zone, line, piece, side, x, foot_lon, foot_lat,
 * position_m, distance_m, nearest (piece) and reason; with runners-up, runner_up and runner_up_m. A unit that was not
 * placed has a reason, and no line, piece, side or x; its foot is that on the nearest piece. A column of the records
 * that has one of these names is written as NAME_in_records.
 */
export function measuredColumns(table: Table, placed: Placed, extras: MeasuredExtras = {}): OutColumn[] {
  const { placement, ground, border, reason, known } = placed
  if (!ground || !border || !reason || !known) throw new Error('nothing was placed on the ground')
  const { runnerUp, withoutCoordinates } = extras
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
  const pieces = border.pieces.map(({ label }) => label)
  const zones = border.names.length
  const own: OutColumn[] = [
    {
      kind: 'label',
      name: 'zone',
      codes: ground.zone.map((zone) => (zone === manyZones ? zones : zone)),
      labels: [...border.names, severalZones],
    },
    { kind: 'label', name: 'line', codes: lineOfRow, labels: placement.lines.map(({ id }) => id) },
    { kind: 'number', name: 'piece', values: piece },
    { kind: 'label', name: 'side', codes: sideOfRow, labels: ['untreated', 'treated'] },
    { kind: 'number', name: 'x', values: x },
    ...(withoutCoordinates
      ? []
      : [
          { kind: 'number', name: 'foot_lon', values: ground.footLon } as const,
          { kind: 'number', name: 'foot_lat', values: ground.footLat } as const,
        ]),
    { kind: 'number', name: 'position_m', values: ground.positionMetres },
    { kind: 'number', name: 'distance_m', values: known.measured.distanceMetres.map(finiteOrMissing) },
    { kind: 'label', name: 'nearest', codes: ground.piece.map((at) => Math.max(at, -1)), labels: pieces },
    ...(runnerUp
      ? [
          { kind: 'label', name: 'runner_up', codes: runnerUp.piece, labels: pieces } as const,
          { kind: 'number', name: 'runner_up_m', values: runnerUp.distanceMetres } as const,
        ]
      : []),
    { kind: 'label', name: 'reason', ...reason },
  ]
  const taken = new Set([row, ...own].map(({ name }) => name))
  const kept = [...table.columns.values()].filter(({ name }) => !withoutCoordinates?.includes(name))
  const brought = kept.map((column) =>
    taken.has(column.name) ? { ...column, name: `${column.name}_in_records` } : column,
  )
  return [row, ...brought, ...own]
}

function finiteOrMissing(value: number): number {
  return value < Number.POSITIVE_INFINITY ? value : Number.NaN
}
