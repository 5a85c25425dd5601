/** What `scarp measure` writes: one row for each unit read, placed or not. */
import type { Placed } from '../analyze.js'
import { manyZones, type RunnerUps } from '../borders/index.js'
import type { NumberOfRow, OutColumn } from '../records/files.js'
import type { Table } from '../records/index.js'

/** The zone of a unit that lies in more than one. */
export const severalZones = '(several)'

export interface MeasuredExtras {
  /** The nearest border of another pair of zones, by row. */
  readonly runnerUp?: RunnerUps
  /** Leave out what says where a unit is: these columns of the records, its foot, and the position along the border. */
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
  const { lines } = placement
  const entryOf = entryFinder(placement.unit)
  const ofEntry =
    (numberAt: (entry: number) => number, otherwise: number): NumberOfRow =>
    (row) => {
      const entry = entryOf(row)
      return entry < 0 ? otherwise : numberAt(entry)
    }
  const lineOf = ofEntry((entry) => placement.line[entry], -1)
  const sideOf = ofEntry((entry) => placement.treated[entry], -1)
  const pieceOf = ofEntry((entry) => lines[placement.line[entry]].piece ?? Number.NaN, Number.NaN)
  const { distanceMetres } = known.measured
  const row: OutColumn = { kind: 'integer', name: 'row', values: (i) => i + 1 }
  const pieces = border.pieces.map(({ label }) => label)
  const zones = border.names.length
  const own: OutColumn[] = [
    {
      kind: 'label',
      name: 'zone',
      codes: (row) => (ground.zone[row] === manyZones ? zones : ground.zone[row]),
      labels: [...border.names, severalZones],
    },
    { kind: 'label', name: 'line', codes: lineOf, labels: lines.map(({ id }) => id) },
    { kind: 'number', name: 'piece', values: pieceOf },
    { kind: 'label', name: 'side', codes: sideOf, labels: ['untreated', 'treated'] },
    { kind: 'number', name: 'x', values: ofEntry((entry) => placement.x[entry], Number.NaN) },
    ...(withoutCoordinates
      ? []
      : [
          { kind: 'number', name: 'foot_lon', values: ground.footLon } as const,
          { kind: 'number', name: 'foot_lat', values: ground.footLat } as const,
          { kind: 'number', name: 'position_m', values: ground.positionMetres } as const,
        ]),
    { kind: 'number', name: 'distance_m', values: (row) => finiteOrMissing(distanceMetres[row]) },
    { kind: 'label', name: 'nearest', codes: (row) => Math.max(ground.piece[row], -1), labels: pieces },
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

/** The place of a row in `unit` (ascending), or -1: found by walking from that of the row asked for before. */
function entryFinder(unit: Int32Array): NumberOfRow {
  let entry = 0
  return (row) => {
    while (entry > 0 && unit[entry - 1] >= row) entry--
    while (entry < unit.length && unit[entry] < row) entry++
    return unit[entry] === row ? entry : -1
  }
}
