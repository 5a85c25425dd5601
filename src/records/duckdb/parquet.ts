import type { DuckDBConnection } from '@duckdb/node-api'
import type { Checked } from '../../problem.js'
import { eachChunk } from './bytes.js'
import { identifier, literal, reasonOf, rowsOf } from './connection.js'
import { alias, consecutive, type Source } from './source.js'

/** Apache Parquet: columns have types of their own. Messages count rows from 1. */
export async function parquetSource(
  connection: DuckDBConnection,
  file: string,
  path: string,
): Promise<Checked<Source>> {
  const table = `read_parquet(${literal(path)})`
  let described: unknown[][]
  try {
    described = await rowsOf(connection, `DESCRIBE SELECT * FROM ${table}`)
  } catch (error) {
    return {
      ok: false,
      problems: [
        {
          file,
          what: 'not a Parquet file',
          found: shortened(reasonOf(error), path, file),
          todo: 'write it again, or correct its ending',
        },
      ],
    }
  }
  const names = described.map(([name]) => name as string)
  return {
    ok: true,
    value: {
      file,
      names,
      types: described.map(([, type]) => type as string),
      place: 'row',
      query: (positions) => {
        const chosen = positions.map((position) => `${identifier(names[position])} AS ${alias(position)}`)
        return `SELECT ${chosen.length === 0 ? '1' : chosen.join(', ')} FROM ${table}`
      },
      survey: async () => ({
        sha256: await eachChunk({ path, isGzip: false }, () => {}),
        problems: [],
        lines: 0,
        delimiters: 0,
      }),
      locate: async (outcome) =>
        'rows' in outcome
          ? { lineOfRow: consecutive(1, outcome.rows) }
          : {
              problems: [
                {
                  file,
                  what: 'the Parquet file is damaged',
                  found: shortened(reasonOf(outcome.failure), path, file),
                  todo: 'write it again',
                },
              ],
            },
    },
  }
}

/** DuckDB's message with the file as the user named it. */
function shortened(reason: string, path: string, file: string): string {
  return reason.replaceAll(path, file)
}
