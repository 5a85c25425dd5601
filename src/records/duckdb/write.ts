import { open } from 'node:fs/promises'
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

/** The number of a row, from 0: for a column that takes no memory of its own. */
export type NumberOfRow = (row: number) => number

/** A column to be written; all have one element a row. */
export type OutColumn =
  /** NaN is written as missing. */
  | { readonly name: string; readonly kind: 'number'; readonly values: Float64Array | NumberOfRow }
  | { readonly name: string; readonly kind: 'integer'; readonly values: Int32Array | NumberOfRow }
  /** Codes index `labels`; -1 is missing. */
  | {
      readonly name: string
      readonly kind: 'label'
      readonly codes: Int32Array | NumberOfRow
      readonly labels: readonly string[]
    }
  | { readonly name: string; readonly kind: 'text'; readonly values: readonly string[] }

/** Positions that become geometry, in degrees: names of two number columns, or the numbers themselves. */
export interface PointPositions {
  readonly lon: string | Float64Array
  readonly lat: string | Float64Array
}

const BUFFER_BYTES = 1 << 20
const ROWS_PER_BLOCK = 256
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
  const elements = column.kind === 'label' ? column.codes : column.values
  if (typeof elements !== 'function' && elements.length !== rows)
    throw new RangeError(`column ${column.name} has ${elements.length} rows, the table has ${rows}`)
  if (column.kind !== 'number') return
  const numberAt = ofRow(column.values)
  for (let row = 0; row < rows; row++) {
    const value = numberAt(row)
    if (value === Infinity || value === -Infinity)
      throw new RangeError(`column ${column.name} is infinite in row ${row}`)
  }
}

function ofRow(elements: Float64Array | Int32Array | NumberOfRow): NumberOfRow {
  return typeof elements === 'function' ? elements : (row) => elements[row]
}

/** Writes head, rows and foot through one buffer: text on its way to the disk would fill memory faster than it is cleared. */
async function writeLines(
  path: string,
  rows: number,
  lineOf: (row: number) => string,
  [head, foot]: readonly [string, string],
): Promise<void> {
  const handle = await open(path, 'w')
  try {
    const buffer = Buffer.allocUnsafe(BUFFER_BYTES)
    let used = 0
    await handle.writeFile(head)
    for (let row = 0; row < rows; row++) {
      const line = lineOf(row)
      // a character takes three bytes at most, or four where two make one
      if (used + 3 * line.length > BUFFER_BYTES) {
        await handle.writeFile(buffer.subarray(0, used))
        used = 0
      }
      if (3 * line.length > BUFFER_BYTES) await handle.writeFile(line)
      else used += buffer.write(line, used)
    }
    await handle.writeFile(buffer.subarray(0, used))
    await handle.writeFile(foot)
  } finally {
    await handle.close()
  }
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
    case 'integer':
      return numberCell(ofRow(column.values), '')
    case 'label':
      return labelCell(ofRow(column.codes), column.labels.map(quoted), '')
    case 'text':
      return (row) => quoted(column.values[row])
  }
}

/**
 * Texts of numbers, a block of rows at a time: as JSON they are the same, and the engine keeps none of them, where it
 * puts each text of `String(value)` in a cache that only a full collection clears.
 */
function numberCell(numberAt: NumberOfRow, missing: string): (row: number) => string {
  const values = new Array<number>(ROWS_PER_BLOCK)
  let texts: string[] = []
  let block = -1
  return (row) => {
    const at = row % ROWS_PER_BLOCK
    if (row - at !== block) {
      block = row - at
      for (let i = 0; i < ROWS_PER_BLOCK; i++) values[i] = numberAt(block + i)
      texts = JSON.stringify(values).slice(1, -1).split(',')
    }
    if (Object.is(values[at], -0)) return '-0'
    return Number.isNaN(values[at]) ? missing : texts[at]
  }
}

function labelCell(codeAt: NumberOfRow, labels: readonly string[], missing: string): (row: number) => string {
  return (row) => {
    const code = codeAt(row)
    return code < 0 ? missing : labels[code]
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
  if (typeof values === 'function' || values?.length !== rows)
    throw new RangeError(`GeoJSON needs ${rows} positions, got ${values?.length ?? position}`)
  return values
}

function jsonCell(column: OutColumn): (row: number) => string {
  switch (column.kind) {
    case 'number':
    case 'integer':
      return numberCell(ofRow(column.values), 'null')
    case 'label':
      return labelCell(
        ofRow(column.codes),
        column.labels.map((label) => JSON.stringify(label)),
        'null',
      )
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
  const cell = valueCell(column)
  return Array.from({ length: count }, (_, i) => cell(first + i))
}

function valueCell(column: OutColumn): (row: number) => DuckDBValue {
  if (column.kind === 'text') return (row) => column.values[row]
  if (column.kind === 'label') {
    const codeAt = ofRow(column.codes)
    return (row) => column.labels[codeAt(row)] ?? null
  }
  const numberAt = ofRow(column.values)
  return (row) => (Number.isNaN(numberAt(row)) ? null : numberAt(row))
}
