/** The records of a study as a table whose positions are WGS 84 degrees, whatever file and system they come from. */
import { mkdtemp, rm, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { pointLayer } from '../layers/index.js'
import type { Checked } from '../problem.js'
import type { ReadOptions } from '../records/files.js'
import { type Column, labelsOf, numbersOf, type Table } from '../records/index.js'
import type { Study } from '../study/index.js'

export async function readRecords(path: string, study: Study, options: ReadOptions): Promise<Checked<Table>> {
  const table = pointLayer.test(path)
    ? await readPointLayer(path, study, options)
    : await (await import('../records/files.js')).readTable(path, options)
  return table.ok && study.line.kind === 'border' ? inDegrees(table.value, study) : table
}

/** Through a file of points in a folder of its own, gone before anything else happens. */
async function readPointLayer(path: string, { records }: Study, options: ReadOptions): Promise<Checked<Table>> {
  const { pointsAsGeojson } = await import('../layers/index.js')
  const { readTable } = await import('../records/files.js')
  const { file: shownAs, layer, crs } = records
  const points = await pointsAsGeojson(path, { shownAs, askedBy: 'records.file', layer, crs })
  if (!points.ok) return points
  const folder = await mkdtemp(join(tmpdir(), 'scarp-points-'))
  try {
    const file = join(folder, 'points.geojson')
    await writeFile(file, points.value.text)
    const read = await readTable(file, options)
    return read.ok ? { ok: true, value: { ...read.value, sha256: points.value.sha256 } } : read
  } finally {
    await rm(folder, { recursive: true, force: true })
  }
}

/** Positions from a column of WKT, and from another coordinate system. */
async function inDegrees(table: Table, study: Study): Promise<Checked<Table>> {
  const { position, crs, file } = study.records
  const isPointLayer = pointLayer.test(file)
  if (typeof position !== 'string' && (crs === undefined || isPointLayer)) return { ok: true, value: table }
  const { pointsOfText, positionsToDegrees } = await import('../layers/index.js')
  const { positionColumns } = await import('../analyze.js')
  const names = positionColumns(study)
  let [x, y] = typeof position === 'string' ? [] : names.map((name) => numbersOf(table, name))
  if (typeof position === 'string') {
    const { codes, labels } = labelsOf(table, position)
    const points = await pointsOfText(labels, file, position)
    if (!points.ok) return points
    const pick = (values: Float64Array) => Float64Array.from(codes, (code) => (code < 0 ? Number.NaN : values[code]))
    x = pick(points.value.x)
    y = pick(points.value.y)
  }
  if (crs !== undefined) {
    const moved = positionsToDegrees(x, y, crs, file)
    if (!moved.ok) return moved
    x = moved.value.lon
    y = moved.value.lat
  }
  const column = (name: string, values: Float64Array): [string, Column] => [name, { kind: 'number', name, values }]
  const columns = new Map([...table.columns, column(names[0], x), column(names[1], y)])
  return { ok: true, value: { ...table, columns } }
}
