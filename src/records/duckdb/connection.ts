import { type DuckDBConnection, DuckDBInstance } from '@duckdb/node-api'

/** Rows wait here, at most, between the threads that parse and the one that reads. */
const STREAM_BUFFER = '256MB'

/** Extensions that aren't inside the package are never fetched. */
const OFFLINE = { autoinstall_known_extensions: 'false', autoload_known_extensions: 'false' }

/**
 * A database in memory for one job, closed at its end.
 * With `readable`, SQL can read that one file and nothing else: no other file, no network, no change of these settings.
 */
export async function withDatabase<T>(
  job: (connection: DuckDBConnection) => Promise<T>,
  readable?: string,
): Promise<T> {
  const instance = await DuckDBInstance.create(':memory:', OFFLINE)
  try {
    const connection = await instance.connect()
    try {
      await connection.run(`SET streaming_buffer_size = '${STREAM_BUFFER}'`)
      await connection.run("SET TimeZone = 'UTC'")
      if (readable !== undefined) await lockDown(connection, readable)
      return await job(connection)
    } finally {
      connection.closeSync()
    }
  } finally {
    instance.closeSync()
  }
}

async function lockDown(connection: DuckDBConnection, readable: string): Promise<void> {
  await connection.run(`SET allowed_paths = [${literal(readable)}]`)
  await connection.run('SET enable_external_access = false')
  await connection.run('SET lock_configuration = true')
}

/** All rows of a small result. */
export async function rowsOf(connection: DuckDBConnection, sql: string): Promise<unknown[][]> {
  const reader = await connection.runAndReadAll(sql)
  return reader.getRowsJS() as unknown[][]
}

/** A text as SQL. */
export function literal(text: string): string {
  return `'${text.replaceAll("'", "''")}'`
}

/** A name as SQL. */
export function identifier(name: string): string {
  return `"${name.replaceAll('"', '""')}"`
}

/** The first line of DuckDB's message, without the kind of error before it. */
export function reasonOf(error: unknown): string {
  const message = error instanceof Error ? error.message : String(error)
  return message
    .split('\n', 1)[0]
    .replace(/^(\w+ )*Error: /, '')
    .trim()
}
