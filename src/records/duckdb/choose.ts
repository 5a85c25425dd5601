import type { DuckDBConnection } from '@duckdb/node-api'
import type { Problem } from '../../problem.js'
import type { WantedColumn } from '../table.js'
import { isNumberKinds, kindsSql, useOf } from './cells.js'
import { rowsOf } from './connection.js'
import { nameAdvice } from './names.js'
import { alias, type Source } from './source.js'

/** A column that will be read. */
export interface Chosen {
  readonly name: string
  readonly kind: 'number' | 'label'
  readonly askedBy: string
  /** Where it stands in the source. */
  readonly position: number
  readonly type: string
}

/** Wanted columns that exist and can be read so. A column wanted both ways is read as numbers. */
export function chooseWanted(source: Source, wanted: readonly WantedColumn[], problems: Problem[]): Chosen[] {
  const chosen = new Map<string, Chosen>()
  for (const { name, kind, askedBy } of wanted) {
    const position = source.names.indexOf(name)
    if (position === -1 || name === '') {
      problems.push({
        file: source.file,
        what: `${askedBy}: no such column in the file`,
        found: name,
        todo: nameAdvice(name, source.names),
      })
      continue
    }
    const type = source.types[position]
    const use = useOf(type)
    if (use === 'other' || (use === 'time' && kind === 'number')) {
      problems.push({
        file: source.file,
        what: `${name} (${askedBy}): must be ${kind === 'number' ? 'numbers' : 'text or numbers'}`,
        found: `a column of type ${type}`,
        todo: 'name another column, or convert this one',
      })
      continue
    }
    if (kind === 'number' || !chosen.has(name)) chosen.set(name, { name, kind, askedBy, position, type })
  }
  return [...chosen.values()]
}

/** Every column not chosen yet that can be read: as numbers where nothing is lost by it, as labels otherwise. */
export async function chooseRest(
  connection: DuckDBConnection,
  source: Source,
  chosen: readonly Chosen[],
): Promise<Chosen[]> {
  const taken = new Set(chosen.map((column) => column.position))
  const rest = source.names
    .map((name, position) => ({ name, position, type: source.types[position], askedBy: 'all columns' }))
    .filter(({ name, position, type }) => !taken.has(position) && name !== '' && useOf(type) !== 'other')
  const kinds = await kindsOf(
    connection,
    source,
    rest.filter(({ type }) => type === 'VARCHAR').map(({ position }) => position),
  )
  return rest.map((column) => {
    const use = useOf(column.type)
    const isNumber =
      use === 'number' || use === 'truth' || (column.type === 'VARCHAR' && isNumberKinds(kinds.get(column.position)!))
    return {
      ...column,
      kind:
        isNumber && !hasTypes(source, column.type)
          ? 'number'
          : use === 'number' || use === 'truth'
            ? 'number'
            : 'label',
    }
  })
}

/** A VARCHAR column of a file with types of its own is text, whatever it looks like. */
function hasTypes(source: Source, type: string): boolean {
  return source.place === 'row' && type === 'VARCHAR'
}

/** What columns of texts hold, by position (bits of `kindsSql`). Reads every row. */
export async function kindsOf(
  connection: DuckDBConnection,
  source: Source,
  positions: readonly number[],
): Promise<ReadonlyMap<number, number>> {
  if (positions.length === 0) return new Map()
  const kinds = positions.map((position) => kindsSql(alias(position))).join(', ')
  const [row] = await rowsOf(connection, `SELECT ${kinds} FROM (${source.query(positions)})`)
  return new Map(positions.map((position, i) => [position, Number(row[i])]))
}
