/** Tables with a column of well-known text (OGC 06-103r4), extended by `SRID=4326;` where it is. */
import { csvParseRows, tsvParseRows } from 'd3-dsv'
import type { Feature, Geometry } from 'geojson'
import wkx from 'wkx'
import type { Checked, Problem } from '../problem.js'
import type { RawLayer } from './raw.js'
import { type FileSource, names, sha256Of } from './source.js'

const keyword = /^\s*(SRID=\d+;)?\s*(MULTI)?(POINT|LINESTRING|POLYGON|GEOMETRYCOLLECTION)\b/i
const problemsShown = 20

/** Undefined where the text is no geometry. */
export function geometryOfText(text: string): { readonly geometry: Geometry; readonly srid?: string } | undefined {
  try {
    const srid = /^\s*SRID=(\d+);/i.exec(text)?.[1]
    const geometry = wkx.Geometry.parse(text.trim()).toGeoJSON() as Geometry
    return srid === undefined ? { geometry } : { geometry, srid }
  } catch {
    return undefined
  }
}

export function wktLayer(
  file: FileSource,
  shownAs: string,
  askedBy: string,
  wanted: string | undefined,
): Checked<RawLayer> {
  const text = new TextDecoder().decode(file.bytes).replace(/^\uFEFF/, '')
  const [head = [], ...rows] = /\.tsv$/i.test(file.name) ? tsvParseRows(text) : csvParseRows(text)
  const texts = head.filter((_, c) => keyword.test(rows[0]?.[c] ?? ''))
  const name = wanted ?? (texts.length === 1 ? texts[0] : undefined)
  const column = name === undefined ? -1 : head.indexOf(name)
  if (column < 0) {
    const what = `${askedBy}: geometry`
    const todo =
      texts.length > 0 ? `name the column of geometries: ${names(texts)}` : 'give a table with a column of WKT'
    return { ok: false, problems: [{ file: shownAs, what, found: wanted ?? 'no one column of WKT', todo }] }
  }
  const problems: Problem[] = []
  const systems = new Set<string>()
  const features = rows.map((row, i): Feature => {
    const cell = row[column] ?? ''
    const read = cell.trim() === '' ? undefined : geometryOfText(cell)
    if (cell.trim() !== '' && !read && problems.length < problemsShown) {
      const found = cell.length > 40 ? `${cell.slice(0, 37)}...` : cell
      problems.push({ file: shownAs, line: i + 2, what: `${askedBy}: ${head[column]}`, found, todo: 'write WKT there' })
    }
    if (read?.srid !== undefined) systems.add(read.srid)
    const properties = Object.fromEntries(head.flatMap((key, c) => (c === column ? [] : [[key, row[c] ?? '']])))
    return { type: 'Feature', properties, geometry: (read?.geometry ?? null) as unknown as Geometry }
  })
  if (systems.size > 1) {
    const found = `SRID ${names([...systems])}`
    problems.push({ file: shownAs, what: `${askedBy}: several coordinate systems`, found, todo: 'use one in a file' })
  }
  if (problems.length > 0) return { ok: false, problems }
  const [srid] = systems
  return {
    ok: true,
    value: {
      format: 'WKT column',
      features,
      ...(srid === undefined ? {} : { crs: { text: `EPSG:${srid}`, where: 'its SRID' } }),
      without: 'no SRID',
      sha256: sha256Of(file.bytes),
    },
  }
}
