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
  const problems = await featureProblems(connection, file, features, hasPositions)
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

/** Where the features stand among the objects that were cut out, or why the file is no collection. */
function membersOf({ text }: Frame, file: string): Checked<{ readonly first: number; readonly count: number }> {
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

/** Features that are no features and, where positions are wanted, geometries that are no points. */
async function featureProblems(
  connection: DuckDBConnection,
  file: string,
  features: string,
  hasPositions: boolean,
): Promise<readonly Problem[]> {
  const broken = await rowsOf(
    connection,
    `SELECT CAST(feature AS INTEGER), json FROM (SELECT json, row_number() OVER () - 1 AS feature FROM (${features}))
     WHERE NOT json_valid(json) ORDER BY 1 LIMIT ${PROBLEM_LIMIT}`,
  )
  if (broken.length > 0)
    return broken.map(([feature, json]) =>
      noFeature(file, feature as number, `broken JSON (${parseFault(json as string)})`),
    )
  const isFeature = `coalesce(json_extract_string(json, '/type') = 'Feature', false)`
  const isPoint = `coalesce(json_type(json, '/geometry') = 'NULL', false) OR (
    coalesce(json_extract_string(json, '/geometry/type') = 'Point', false) AND coalesce(json_type(json, '/geometry/coordinates/0')
      IN ('DOUBLE', 'BIGINT', 'UBIGINT') AND json_type(json, '/geometry/coordinates/1') IN ('DOUBLE', 'BIGINT', 'UBIGINT'), false))`
  const wrong = hasPositions ? `NOT ${isFeature} OR NOT (${isPoint})` : `NOT ${isFeature}`
  const rows = await rowsOf(
    connection,
    `SELECT CAST(feature AS INTEGER), json_extract_string(json, '/type'), json_extract_string(json, '/geometry/type'), count(*) OVER ()
     FROM (SELECT json, row_number() OVER () - 1 AS feature FROM (${features})) WHERE ${wrong} ORDER BY 1 LIMIT ${PROBLEM_LIMIT}`,
  )
  const problems = rows.map(([feature, type, geometry]): Problem => {
    const at = { file, feature: feature as number }
    if (type !== 'Feature') return noFeature(file, at.feature, `${type ?? 'no type'}`)
    if (geometry === 'Point')
      return {
        ...at,
        what: 'geometry: must have two coordinates that are numbers',
        found: 'something else',
        todo: 'write [longitude, latitude]',
      }
    return {
      ...at,
      what: 'geometry: must be a Point',
      found: `${geometry ?? 'no geometry'}`,
      todo: 'give points, or name position columns',
    }
  })
  const count = Number(rows[0]?.[3] ?? 0)
  if (count > rows.length)
    problems.push({ file, what: 'more features like these', found: `${count - rows.length}`, todo: 'mend the file' })
  return problems
}

function parseFault(json: string): string {
  try {
    JSON.parse(json)
    return 'not by RFC 8259'
  } catch (error) {
    return (error as Error).message.slice(0, 200)
  }
}
