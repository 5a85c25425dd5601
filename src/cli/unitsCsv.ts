/** units.csv: one row for each unit and line it is placed against. The one output that carries ids and places. */
import type { Table } from '../records/index.js'
import type { Analysis } from '../results.js'

const rowsInPart = 20_000

/** The file in parts of some thousand rows. `id` is the column of ids; without it the unit's row, from 1. */
export function* unitsCsv(analysis: Pick<Analysis, 'results' | 'units'>, table: Table, id?: string): Generator<string> {
  const { unit, line, treated, x, ground } = analysis.units
  const idOf = idText(table, id)
  const lines = analysis.results.lines.map((summary) => csvCell(summary.line))
  const zones = ground?.zoneNames.map(csvCell) ?? []
  const pieces = analysis.results.lines.map((summary) => summary.piece ?? '')
  yield `id,line,side,x${ground ? ',zone,piece,foot_lon,foot_lat,position_m' : ''}\n`
  for (let start = 0; start < unit.length; start += rowsInPart) {
    const end = Math.min(start + rowsInPart, unit.length)
    let part = ''
    for (let i = start; i < end; i++) {
      part += `${idOf(unit[i])},${lines[line[i]]},${treated[i] === 1 ? 'treated' : 'untreated'},${cell(x[i])}`
      if (ground)
        part += `,${zones[ground.zone[i]] ?? ''},${pieces[line[i]]},${cell(ground.footLon[i])},${cell(ground.footLat[i])},${cell(ground.positionMetres[i])}`
      part += '\n'
    }
    yield part
  }
}

/** What names a row of the table: its id, or its number from 1. An empty id is an empty cell. */
export function idText(table: Table, id?: string): (row: number) => string | number {
  const column = id === undefined ? undefined : table.columns.get(id)
  if (id !== undefined && column === undefined) throw new Error(`column ${id} was not read`)
  if (column?.kind === 'number') return (row) => cell(column.values[row])
  if (column?.kind === 'label') {
    const quoted = column.labels.map(csvCell)
    return (row) => quoted[column.codes[row]] ?? ''
  }
  return (row) => row + 1
}

function cell(value: number): number | string {
  return Number.isNaN(value) ? '' : value
}

/** RFC 4180. */
export function csvCell(text: string): string {
  return /[",\r\n]|^\s|\s$/.test(text) ? `"${text.replaceAll('"', '""')}"` : text
}
