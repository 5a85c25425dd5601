import type { DuckDBConnection } from '@duckdb/node-api'
import type { Checked, Problem } from '../../problem.js'
import { survey, type TextFile } from './bytes.js'
import { rowsOf } from './connection.js'
import { notUtf8 } from './csv.js'
import { type Frame, loadFeatures, objectNumber } from './features.js'
import { cellsQuery, keysOf, pointerPart, refuse } from './json.js'
import { consecutive, PROBLEM_LIMIT, type Source } from './source.js'

/** Columns that positions of points are read as. */
const POSITION = ['lon', 'lat'] as const

/**
 * A GeoJSON FeatureCollection: one record a feature, its properties the columns, counted from 0.
 * With positions from the geometry, `lon` and `lat` are columns too, in place of properties of those names;
 * every geometry must then be a Point or null (a position that is missing).
 */
export async function geojsonSource(
  connection: DuckDBConnection,
  file: string,
  path: string,
  hasPositions: boolean,
): Promise<Checked<Source>> {
  const text: TextFile = { path, isGzip: false }
  const members = membersOf(await loadFeatures(connection, text), file)
  if (!members.ok) {
    const { notUtf8Line } = await survey(text)
    return notUtf8Line === undefined ? members : { ok: false, problems: [notUtf8(file, notUtf8Line)] }
  }
  const { first, count } = members.value
  if (count === 0) return refuse(file, 'the file is empty', 'no features', 'give a FeatureCollection of points')
  const features = `SELECT json FROM features WHERE rowid >= ${first} AND rowid < ${first + count}`
  const problems = await featureProblems(connection, file, members.value, hasPositions)
  if (problems.length > 0) return { ok: false, problems }
  const properties = await keysOf(
    connection,
    `SELECT json FROM (SELECT json_extract(json, '/properties') AS json FROM (${features})) WHERE json_type(json) = 'OBJECT'`,
  )
  if (!properties.ok) throw new Error(properties.reason)
  const names = hasPositions
    ? [...POSITION, ...properties.names.filter((name) => name !== 'lon' && name !== 'lat')]
    : properties.names
  const pointer = (position: number) =>
    hasPositions && position < 2 ? `/geometry/coordinates/${position}` : `/properties/${pointerPart(names[position])}`
  return {
    ok: true,
    value: {
      file,
      names,
      types: names.map(() => 'VARCHAR'),
      place: 'feature',
      query: (positions) => cellsQuery(features, positions, pointer),
      survey: async () => {
        const { sha256, lines, notUtf8Line } = await survey(text)
        const problems = notUtf8Line === undefined ? [] : [notUtf8(file, notUtf8Line)]
        return { sha256, lines, delimiters: 0, problems }
      },
      locate: async (outcome) => {
        if ('failure' in outcome) throw outcome.failure
        return { lineOfRow: consecutive(0, outcome.rows) }
      },
    },
  }
}

/** The features among the objects that were cut out: from `first` on. */
interface Members {
  readonly first: number
  readonly count: number
}

/** Where the features stand among the objects that were cut out, or why the file is no collection. */
function membersOf({ text }: Frame, file: string): Checked<Members> {
  const fault = (found: string) =>
    refuse(file, 'must be a GeoJSON FeatureCollection', found, 'export the points again as GeoJSON')
  if (text.trim() === '') return refuse(file, 'the file is empty', 'no features', 'give a FeatureCollection of points')
  let collection: { readonly type?: unknown; readonly features?: unknown }
  try {
    collection = JSON.parse(text)
  } catch (error) {
    return fault(`broken JSON (${withoutPlace((error as Error).message)})`)
  }
  if (collection === null || typeof collection !== 'object' || Array.isArray(collection))
    return fault('JSON that is no object')
  if (collection.type !== 'FeatureCollection')
    return fault(collection.type === undefined ? 'no "type"' : `type ${collection.type}`)
  const { features } = collection
  if (!Array.isArray(features)) return fault('no array of features')
  const numbers = features.map(objectNumber)
  const problems = numbers.flatMap((number, feature): Problem[] =>
    number === undefined ? [noFeature(file, feature, JSON.stringify(features[feature]))] : [],
  )
  return problems.length > 0
    ? { ok: false, problems: problems.slice(0, PROBLEM_LIMIT) }
    : { ok: true, value: { first: numbers[0] ?? 0, count: numbers.length } }
}

/** What a parser says, without its place and without the text there: both are the frame's, not the file's. */
function withoutPlace(message: string): string {
  return message.split(/ in JSON at| at position|, "|, \.\.\."/)[0]
}

function noFeature(file: string, feature: number, found: string): Problem {
  return { file, feature, what: 'each member of features must be a Feature', found, todo: 'mend or delete it' }
}

/** Features that are broken or no features and, where positions are wanted, geometries that are no points. */
async function featureProblems(
  connection: DuckDBConnection,
  file: string,
  { first, count }: Members,
  hasPositions: boolean,
): Promise<readonly Problem[]> {
  const within = `FROM features WHERE rowid >= ${first} AND rowid < ${first + count}`
  const broken = await rowsOf(
    connection,
    `SELECT CAST(rowid - ${first} AS INTEGER), json ${within} AND NOT json_valid(json) ORDER BY 1 LIMIT ${PROBLEM_LIMIT}`,
  )
  if (broken.length > 0)
    return broken.map(([feature, json]) =>
      noFeature(file, feature as number, `broken JSON (${parseFault(json as string)})`),
    )
  const isNumber = (part: string) => `json_type(${part}) IN ('DOUBLE', 'BIGINT', 'UBIGINT')`
  const isPoint = `coalesce(json_type(parts[2]) = 'NULL' OR
    (parts[3] ->> '$') = 'Point' AND ${isNumber('parts[4]')} AND ${isNumber('parts[5]')}, false)`
  const wrong = `NOT coalesce((parts[1] ->> '$') = 'Feature', false)${hasPositions ? ` OR NOT ${isPoint}` : ''}`
  const rows = await rowsOf(
    connection,
    `SELECT CAST(feature AS INTEGER), parts[1] ->> '$', parts[3] ->> '$' FROM (SELECT rowid - ${first} AS feature, json_extract(json,
       ['/type', '/geometry', '/geometry/type', '/geometry/coordinates/0', '/geometry/coordinates/1']) AS parts ${within})
     WHERE ${wrong} ORDER BY 1 LIMIT ${PROBLEM_LIMIT + 1}`,
  )
  const problems = rows
    .slice(0, PROBLEM_LIMIT)
    .map(([feature, type, geometry]) =>
      type === 'Feature'
        ? noPoint(file, feature as number, geometry as string | null)
        : noFeature(file, feature as number, `${type ?? 'no type'}`),
    )
  if (rows.length > PROBLEM_LIMIT)
    problems.push({ file, what: 'more features like these', found: 'not listed', todo: 'mend the file' })
  return problems
}

function noPoint(file: string, feature: number, geometry: string | null): Problem {
  return geometry === 'Point'
    ? {
        file,
        feature,
        what: 'geometry: must have two coordinates that are numbers',
        found: 'something else',
        todo: 'write [longitude, latitude]',
      }
    : {
        file,
        feature,
        what: 'geometry: must be a Point',
        found: geometry ?? 'no geometry',
        todo: 'give points, or name position columns',
      }
}

function parseFault(json: string): string {
  try {
    JSON.parse(json)
    return 'not by RFC 8259'
  } catch (error) {
    return (error as Error).message.slice(0, 200)
  }
}
