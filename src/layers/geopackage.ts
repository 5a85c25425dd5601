/** GeoPackages (OGC 12-128r18): an SQLite database with geometries as WKB behind a header of their own. */
import { createRequire } from 'node:module'
import type { Feature } from 'geojson'
import initSqlJs, { type Database, type SqlValue } from 'sql.js'
import wkx from 'wkx'
import type { Checked, Problem } from '../problem.js'
import type { RawLayer } from './raw.js'
import { type FileSource, names, sha256Of } from './source.js'

const require = createRequire(import.meta.url)

export async function geopackageLayer(
  file: FileSource,
  shownAs: string,
  askedBy: string,
  layer: string | undefined,
): Promise<Checked<RawLayer>> {
  const refuse = (what: string, found: string, todo: string): Checked<never> => {
    const problem: Problem = { file: shownAs, what: `${askedBy}: ${what}`, found, todo }
    return { ok: false, problems: [problem] }
  }
  const SQL = await initSqlJs({ locateFile: (name) => require.resolve(`sql.js/dist/${name}`) })
  let database: Database | undefined
  try {
    database = new SQL.Database(file.bytes)
    const tables = rowsOf(database, 'SELECT table_name, column_name, srs_id FROM gpkg_geometry_columns ORDER BY 1')
    const all = tables.map(([name]) => String(name))
    const wanted = layer ?? (all.length === 1 ? all[0] : undefined)
    const found = tables.find(([name]) => name === wanted)
    if (!found) return refuse('layer', layer ?? 'not named', `name the one to read: ${names(all)}`)
    const [table, column, srs] = found
    const { features, broken } = featuresOf(database, String(table), String(column))
    if (broken.length > 0)
      return refuse('a geometry that is none', `in row ${broken[0]} of ${table}`, 'repair it, or leave the row out')
    return {
      ok: true,
      value: {
        format: 'GeoPackage',
        features,
        crs: crsOf(database, Number(srs)),
        without: 'no coordinate system in gpkg_spatial_ref_sys',
        sha256: sha256Of(file.bytes),
      },
    }
  } catch (error) {
    return refuse('not a GeoPackage that can be read', (error as Error).message, 'write it again')
  } finally {
    database?.close()
  }
}

function rowsOf(database: Database, sql: string): SqlValue[][] {
  return database.exec(sql)[0]?.values ?? []
}

const quoted = (name: string) => `"${name.replaceAll('"', '""')}"`

function featuresOf(database: Database, table: string, column: string): { features: Feature[]; broken: number[] } {
  const [result] = database.exec(`SELECT * FROM ${quoted(table)}`)
  const broken: number[] = []
  const features = (result?.values ?? []).map((row, i): Feature => {
    const properties: Record<string, SqlValue> = {}
    let geometry: Feature['geometry'] | null = null
    result.columns.forEach((name, c) => {
      if (name !== column) properties[name] = row[c]
      else if (row[c] instanceof Uint8Array) {
        try {
          geometry = geometryOf(row[c])
        } catch {
          broken.push(i + 1)
        }
      }
    })
    return { type: 'Feature', properties, geometry: geometry as unknown as Feature['geometry'] }
  })
  return { features, broken }
}

/** Header: "GP", version, flags (envelope in bits 1 to 3, empty in bit 4), srs; then the envelope and the WKB. */
function geometryOf(blob: Uint8Array): Feature['geometry'] | null {
  const isHeader = blob[0] === 0x47 && blob[1] === 0x50
  if (!isHeader) throw new Error('no GeoPackage geometry')
  if ((blob[3] & 0x10) !== 0) return null
  const envelope = [0, 32, 48, 48, 64][(blob[3] >> 1) & 7]
  if (envelope === undefined) throw new Error('an envelope of unknown length')
  return wkx.Geometry.parse(Buffer.from(blob.subarray(8 + envelope))).toGeoJSON() as Feature['geometry']
}

/** -1 and 0 stand for an undefined system. */
function crsOf(database: Database, srs: number): RawLayer['crs'] {
  const [row] = rowsOf(
    database,
    `SELECT organization, organization_coordsys_id, definition FROM gpkg_spatial_ref_sys WHERE srs_id = ${srs}`,
  )
  if (srs <= 0 || row === undefined) return undefined
  const [organization, code, definition] = row.map(String)
  const where = 'gpkg_spatial_ref_sys'
  return /^(EPSG|ESRI)$/i.test(organization)
    ? { text: `${organization.toUpperCase()}:${code}`, where }
    : { text: definition, where }
}
