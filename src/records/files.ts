/** Tables on disk, for Node alone: every format that is read or written, through DuckDB inside the process and offline. */
import { realpath, stat } from 'node:fs/promises'
import type { DuckDBConnection } from '@duckdb/node-api'
import type { Checked, Problem } from '../problem.js'
import { withDatabase } from './duckdb/connection.js'
import { csvSource } from './duckdb/csv.js'
import { geojsonSource } from './duckdb/geojson.js'
import { jsonSource } from './duckdb/json.js'
import { parquetSource } from './duckdb/parquet.js'
import { readColumns } from './duckdb/read.js'
import type { Source } from './duckdb/source.js'
import type { Table, WantedColumn } from './table.js'

export { type NumberOfRow, type OutColumn, type PointPositions, writeTable } from './duckdb/write.js'

export interface ReadOptions {
  /** A column wanted both as numbers and as labels is read as numbers (`labelsOf` gives labels of those too). */
  readonly wanted: readonly WantedColumn[]
  /**
   * SQL condition over all columns of the file in their natural types, spelled as in the file. Rows for which it is
   * false, or can't be decided because a cell it looks at is missing, are not kept.
   */
  readonly keep?: string
  /** The key that holds `keep`, for messages: `records.keep` by default. */
  readonly keepAskedBy?: string
  /** File name for messages. */
  readonly shownAs: string
  /** GeoJSON: positions of points are columns `lon` and `lat`. */
  readonly positionFromGeometry?: boolean
  /** Every other column of the file too: as numbers where nothing is lost by it, as labels otherwise. */
  readonly all?: boolean
}

type Format = 'csv' | 'tsv' | 'json' | 'parquet' | 'geojson'

const FORMATS: readonly { readonly ending: RegExp; readonly format: Format; readonly isGzip: boolean }[] = [
  { ending: /\.csv$/i, format: 'csv', isGzip: false },
  { ending: /\.csv\.gz$/i, format: 'csv', isGzip: true },
  { ending: /\.(tsv|tab)$/i, format: 'tsv', isGzip: false },
  { ending: /\.(tsv|tab)\.gz$/i, format: 'tsv', isGzip: true },
  { ending: /\.(jsonl|ndjson|json)$/i, format: 'json', isGzip: false },
  { ending: /\.(jsonl|ndjson|json)\.gz$/i, format: 'json', isGzip: true },
  { ending: /\.parquet$/i, format: 'parquet', isGzip: false },
  { ending: /\.geojson$/i, format: 'geojson', isGzip: false },
]

/**
 * Reads csv, tsv, JSON lines (each also .gz), parquet and GeoJSON, by the file's ending; `.json` may be lines or one array.
 * Rows keep the file's order. In number columns empty cells, NA, N/A, NaN, null and '.' (capitals or not) are NaN, true
 * and false are 1 and 0, and any other text that is no finite number is a problem, unless `keep` drops its row.
 * Label columns hold text as written; of numbers in parquet and JSON their shortest text; empty is missing.
 * `lineOfRow` is the physical line in a text file (the header is line 1), the row in parquet (from 1), the feature in
 * GeoJSON (from 0). Everything wrong that can be found is found at once; nothing a file can hold makes it throw.
 */
export async function readTable(path: string, options: ReadOptions): Promise<Checked<Table>> {
  const { wanted, keep, keepAskedBy = 'records.keep', shownAs, positionFromGeometry = false, all = false } = options
  return withSource(path, shownAs, positionFromGeometry, (connection, source) =>
    readColumns(connection, source, { wanted, keep, keepAskedBy, all }),
  )
}

/** Column names in the file's order; of GeoJSON, the properties. */
export async function headerOf(path: string, shownAs: string): Promise<Checked<readonly string[]>> {
  return withSource(path, shownAs, false, async (_connection, source) => ({ ok: true, value: source.names }))
}

/** Opens a file as what its ending says, in a database that can read that file and nothing else. */
async function withSource<T>(
  path: string,
  shownAs: string,
  hasPositions: boolean,
  job: (connection: DuckDBConnection, source: Source) => Promise<Checked<T>>,
): Promise<Checked<T>> {
  const found = FORMATS.find(({ ending }) => ending.test(path))
  const refused = await refusal(path, shownAs, found !== undefined)
  if (refused !== undefined) return { ok: false, problems: [refused] }
  const { format, isGzip } = found!
  const readable = await realpath(path)
  const text = { path: readable, isGzip }
  try {
    return await withDatabase(async (connection): Promise<Checked<T>> => {
      const source =
        format === 'csv' || format === 'tsv'
          ? await csvSource(shownAs, text, format === 'csv' ? ',' : '\t')
          : format === 'json'
            ? await jsonSource(connection, shownAs, text)
            : format === 'parquet'
              ? await parquetSource(connection, shownAs, readable)
              : await geojsonSource(connection, shownAs, readable, hasPositions)
      return source.ok ? await job(connection, source.value) : source
    }, readable)
  } catch (error) {
    const problem = fileProblem(shownAs, error)
    if (problem === undefined) throw error
    return { ok: false, problems: [problem] }
  }
}

/** What keeps a path from being opened at all. */
async function refusal(path: string, file: string, isKnown: boolean): Promise<Problem | undefined> {
  try {
    const status = await stat(path)
    if (status.isDirectory())
      return { file, what: "the file can't be read", found: 'a folder', todo: 'name a file in it' }
  } catch (error) {
    const problem = fileProblem(file, error)
    if (problem === undefined) throw error
    return problem
  }
  if (!isKnown)
    return {
      file,
      what: 'the ending says no format',
      found: /\.[^./\\]+$/.exec(path)?.[0] ?? 'no ending',
      todo: 'use .csv, .tsv, .jsonl (each also .gz), .parquet or .geojson',
    }
  if (/[*?]/.test(path))
    return { file, what: "the file can't be read", found: '* or ? in its path', todo: 'rename the file or its folder' }
  return undefined
}

/** Failures of the file system and of decompression, as problems; undefined for any other failure. */
function fileProblem(file: string, error: unknown): Problem | undefined {
  const code = (error as { code?: unknown }).code
  if (typeof code !== 'string') return undefined
  if (code.startsWith('Z_'))
    return { file, what: 'not a whole gzip file', found: (error as Error).message, todo: 'compress it again' }
  const what = "the file can't be read"
  if (code === 'ENOENT') return { file, what, found: 'no such file', todo: 'check the path and its spelling' }
  if (code === 'EACCES' || code === 'EPERM')
    return { file, what, found: 'no permission', todo: 'change its permissions' }
  return /^E[A-Z]+$/.test(code) ? { file, what, found: code, todo: 'check the disk and the path' } : undefined
}
