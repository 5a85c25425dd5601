import { once } from 'node:events'
import { createWriteStream } from 'node:fs'
import { finished } from 'node:stream/promises'
import {
  DOUBLE,
  type DuckDBAppender,
  type DuckDBConnection,
  DuckDBDataChunk,
  type DuckDBValue,
  INTEGER,
  VARCHAR,
} from '@duckdb/node-api'
import { identifier, literal, withDatabase } from './connection.js'

/** A column to be written; all have one element a row. */
export type OutColumn =
  /** NaN is written as missing. */
  | { readonly name: string; readonly kind: 'number'; readonly values: Float64Array }
  | { readonly name: string; readonly kind: 'integer'; readonly values: Int32Array }
  /** Codes index `labels`; -1 is missing. */
  | { readonly name: string; readonly kind: 'label'; readonly codes: Int32Array; readonly labels: readonly string[] }
  | { readonly name: string; readonly kind: 'text'; readonly values: readonly string[] }

/** Positions that become geometry, in degrees: names of two number columns, or the numbers themselves. */
export interface PointPositions {
  readonly lon: string | Float64Array
  readonly lat: string | Float64Array
}

const ROWS_PER_WRITE = 4096
const ROWS_PER_CHUNK = 2048

/**
 * Writes columns to .csv, .parquet or .geojson, by the path's ending. Numbers are written in full: reading them gives the
 * same doubles. For GeoJSON, columns named by `geometry` leave the properties; a missing position is a null geometry. Throws RangeError for columns of unequal length, for infinite numbers and for other endings.
 */
export async function writeTable(
  path: string,
  columns: readonly OutColumn[],
  rows: number,
  geometry?: PointPositions,
): Promise<void> {
  for (const column of columns) checkColumn(column, rows)
  if (/\.csv$/i.test(path))
    return writeLines(path, rows, csvRow(columns), [`${columns.map(({ name }) => quoted(name)).join(',')}\n`, ''])
  if (/\.geojson$/i.test(path)) return writeGeojson(path, columns, rows, geometry)
  if (/\.parquet$/i.test(path)) return writeParquet(path, columns, rows)
  throw new RangeError(`${path}: tables are written as .csv, .parquet or .geojson`)
}

function checkColumn(column: OutColumn, rows: number): void {
  const length = column.kind === 'label' ? column.codes.length : column.values.length
  if (length !== rows) throw new RangeError(`column ${column.name} has ${length} rows, the table has ${rows}`)
  if (column.kind !== 'number') return
  const infinite = column.values.findIndex((value) => value === Infinity || value === -Infinity)
  if (infinite !== -1) throw new RangeError(`column ${column.name} is infinite in row ${infinite}`)
}

/** Writes head, rows and foot, waiting whenever the disk is behind. */
async function writeLines(
  path: string,
  rows: number,
  lineOf: (row: number) => string,
  [head, foot]: readonly [string, string],
): Promise<void> {
  const out = createWriteStream(path)
  const done = finished(out)
  const write = async (text: string) => {
    if (!out.write(text)) await Promise.race([once(out, 'drain'), done])
  }
  await write(head)
  for (let first = 0; first < rows; first += ROWS_PER_WRITE) {
    let text = ''
    for (let row = first; row < Math.min(first + ROWS_PER_WRITE, rows); row++) text += lineOf(row)
    await write(text)
  }
  out.end(foot)
  await done
}

function csvRow(columns: readonly OutColumn[]): (row: number) => string {
  const cells = columns.map(csvCell)
  return (row) => {
    let line = ''
    for (let column = 0; column < cells.length; column++) line += (column === 0 ? '' : ',') + cells[column](row)
    return `${cells.length === 1 && line === '' ? '""' : line}\n`
  }
}

function csvCell(column: OutColumn): (row: number) => string {
  switch (column.kind) {
    case 'number':
      return (row) => (Number.isNaN(column.values[row]) ? '' : numberText(column.values[row]))
    case 'integer':
      return (row) => `${column.values[row]}`
    case 'label': {
      const labels = column.labels.map(quoted)
      return (row) => (column.codes[row] < 0 ? '' : labels[column.codes[row]])
    }
    case 'text':
      return (row) => quoted(column.values[row])
  }
}

/** The shortest text that reads as the same double, the sign of zero included. */
function numberText(value: number): string {
  return Object.is(value, -0) ? '-0' : `${value}`
}

function quoted(text: string): string {
  return /[",\r\n]|^ | $/.test(text) ? `"${text.replaceAll('"', '""')}"` : text
}

async function writeGeojson(
  path: string,
  columns: readonly OutColumn[],
  rows: number,
  geometry: PointPositions | undefined,
): Promise<void> {
  const lon = positionsOf(columns, rows, geometry?.lon)
  const lat = positionsOf(columns, rows, geometry?.lat)
  const properties = columns.filter(({ name }) => name !== geometry?.lon && name !== geometry?.lat)
  const cells = properties.map((column) => ({ name: JSON.stringify(column.name), text: jsonCell(column) }))
  await writeLines(
    path,
    rows,
    (row) => {
      const at = [lon[row], lat[row]]
      const point = at.some(Number.isNaN) ? 'null' : `{"type":"Point","coordinates":[${at.map(numberText).join(',')}]}`
      const inside = cells.map(({ name, text }) => `${name}:${text(row)}`).join(',')
      const feature = `{"type":"Feature","geometry":${point},"properties":{${inside}}}`
      return `${feature}${row === rows - 1 ? '' : ','}\n`
    },
    ['{"type":"FeatureCollection","features":[\n', ']}\n'],
  )
}

function positionsOf(
  columns: readonly OutColumn[],
  rows: number,
  position: string | Float64Array | undefined,
): Float64Array {
  const column = columns.find(({ name }) => name === position)
  const values = typeof position === 'object' ? position : column?.kind === 'number' ? column.values : undefined
  if (values?.length !== rows)
    throw new RangeError(`GeoJSON needs ${rows} positions, got ${values?.length ?? position}`)
  return values
}

function jsonCell(column: OutColumn): (row: number) => string {
  switch (column.kind) {
    case 'number':
      return (row) => (Number.isNaN(column.values[row]) ? 'null' : numberText(column.values[row]))
    case 'integer':
      return (row) => `${column.values[row]}`
    case 'label': {
      const labels = column.labels.map((label) => JSON.stringify(label))
      return (row) => (column.codes[row] < 0 ? 'null' : labels[column.codes[row]])
    }
    case 'text':
      return (row) => JSON.stringify(column.values[row])
  }
}

async function writeParquet(path: string, columns: readonly OutColumn[], rows: number): Promise<void> {
  await withDatabase(async (connection) => {
    const definitions = columns.map((column, i) => `c${i} ${sqlType(column)}`)
    await connection.run(`CREATE TABLE out (${definitions.join(', ')})`)
    await append(connection, columns, rows)
    const named = columns.map(({ name }, i) => `c${i} AS ${identifier(name)}`)
    await connection.run(`COPY (SELECT ${named.join(', ')} FROM out) TO ${literal(path)} (FORMAT parquet)`)
  })
}

function sqlType(column: OutColumn): string {
  return column.kind === 'number' ? 'DOUBLE' : column.kind === 'integer' ? 'INTEGER' : 'VARCHAR'
}

async function append(connection: DuckDBConnection, columns: readonly OutColumn[], rows: number): Promise<void> {
  const appender: DuckDBAppender = await connection.createAppender('out')
  const types = columns.map(({ kind }) => (kind === 'number' ? DOUBLE : kind === 'integer' ? INTEGER : VARCHAR))
  for (let first = 0; first < rows; first += ROWS_PER_CHUNK) {
    const count = Math.min(ROWS_PER_CHUNK, rows - first)
    const chunk = DuckDBDataChunk.create(types, count)
    columns.forEach((column, i) => {
      chunk.setColumnValues(i, valuesOf(column, first, count))
    })
    appender.appendDataChunk(chunk)
  }
  appender.closeSync()
}

function valuesOf(column: OutColumn, first: number, count: number): DuckDBValue[] {
  return Array.from({ length: count }, (_, i): DuckDBValue => {
    const row = first + i
    if (column.kind === 'label') return column.codes[row] < 0 ? null : column.labels[column.codes[row]]
    const value = column.values[row]
    return typeof value === 'number' && Number.isNaN(value) ? null : value
  })
}
