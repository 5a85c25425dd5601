import { stat } from 'node:fs/promises'
import type { DuckDBConnection } from '@duckdb/node-api'
import type { Checked, Problem } from '../../problem.js'
import { survey, type TextFile } from './bytes.js'
import { literal, reasonOf, rowsOf } from './connection.js'
import { notUtf8 } from './csv.js'
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
  const bytes = (await stat(path)).size
  if (bytes === 0) return refuse(file, 'the file is empty', 'no features', 'give a FeatureCollection of points')
  const whole = `maximum_object_size = ${Math.max(bytes + 1, 1 << 24)}, compression = 'uncompressed', format = 'unstructured'`
  const collection = await collectionProblem(connection, file, path, whole)
  if (collection !== undefined) {
    const { notUtf8Line } = await survey(text)
    return { ok: false, problems: [notUtf8Line === undefined ? collection : notUtf8(file, notUtf8Line)] }
  }
  const features = `SELECT unnest(features) AS json FROM read_json(${literal(path)}, columns = {features: 'JSON[]'}, ${whole})`
  const problems = await featureProblems(connection, file, features, hasPositions)
  if (problems.length > 0) return { ok: false, problems }
  const properties = await keysOf(
    connection,
    `SELECT * FROM (SELECT json -> '/properties' AS json FROM (${features})) WHERE json_type(json) = 'OBJECT'`,
  )
  if (!properties.ok) return refuse(file, "properties can't be read", properties.reason, 'write the file again')
  const [[count]] = await rowsOf(connection, `SELECT count(*) FROM (${features})`)
  if (Number(count) === 0) return refuse(file, 'the file is empty', 'no features', 'give a FeatureCollection of points')
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
        return { sha256, lines, delimiters: 0, problems: notUtf8Line === undefined ? [] : [notUtf8(file, notUtf8Line)] }
      },
      locate: async (outcome) => {
        if ('failure' in outcome) throw outcome.failure
        return { lineOfRow: consecutive(0, outcome.rows) }
      },
    },
  }
}

/** What keeps the file from being one FeatureCollection. */
async function collectionProblem(
  connection: DuckDBConnection,
  file: string,
  path: string,
  whole: string,
): Promise<Problem | undefined> {
  const fault = (found: string): Problem => ({
    file,
    what: 'must be a GeoJSON FeatureCollection',
    found,
    todo: 'export the points again as GeoJSON',
  })
  try {
    const rows = await rowsOf(
      connection,
      `SELECT json_extract_string(json, '/type'), json_type(json, '/features'), json_type(json)
       FROM read_json_objects(${literal(path)}, ${whole})`,
    )
    if (rows.length !== 1) return fault(`${rows.length} JSON values`)
    const [type, features, top] = rows[0]
    if (top !== 'OBJECT') return fault(`a JSON ${String(top).toLowerCase()}`)
    if (type !== 'FeatureCollection') return fault(type === null ? 'no "type"' : `type ${type}`)
    return features === 'ARRAY' ? undefined : fault('no array of features')
  } catch (error) {
    return fault(reasonOf(error).replace(/ in file "[^"]*"/, ''))
  }
}

/** Features that are no features and, where positions are wanted, geometries that are no points. */
async function featureProblems(
  connection: DuckDBConnection,
  file: string,
  features: string,
  hasPositions: boolean,
): Promise<readonly Problem[]> {
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
    if (type !== 'Feature')
      return {
        ...at,
        what: 'each member of features must be a Feature',
        found: `${type ?? 'no type'}`,
        todo: 'mend or delete it',
      }
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
