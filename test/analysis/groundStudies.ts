/** Border studies on drawn zones, for tests: text of the study, columns in memory. */
import type { AnalysisInputs } from '../../src/analysis/inputs.js'
import { problemText } from '../../src/problem.js'
import { readStudy, type Study } from '../../src/study/index.js'
import { collection, type Point, type ZoneFeature } from '../borders/makeZones.js'

export interface GroundStudy {
  readonly study: Study
  readonly inputs: AnalysisInputs
}

/** `lines`: more lines of the study file, under `line`; `rest`: after it. The outcome is `y`. */
export function groundStudy(
  features: readonly ZoneFeature[],
  treated: readonly string[],
  points: readonly Point[],
  y: Float64Array,
  { lines = [], rest = [] }: { lines?: readonly string[]; rest?: readonly string[] } = {},
): GroundStudy {
  const text = [
    'title: Drawn zones',
    'records: {file: units.csv, position: [lon, lat]}',
    'outcomes: [y]',
    'line:',
    '  zones: zones.geojson',
    '  zone_name: name',
    `  treated: ${JSON.stringify(treated)}`,
    ...lines.map((line) => `  ${line}`),
    ...rest,
  ].join('\n')
  const read = readStudy(text, 'study.yaml')
  if (!read.ok) throw new Error(read.problems.map(problemText).join('\n'))
  const column = (name: string, values: Float64Array) => [name, { kind: 'number', name, values }] as const
  const columns = new Map([
    column(
      'lon',
      Float64Array.from(points, ([lon]) => lon),
    ),
    column(
      'lat',
      Float64Array.from(points, ([, lat]) => lat),
    ),
    column('y', y),
  ])
  const rows = points.length
  const lineOfRow = Int32Array.from(points, (_, i) => i + 2)
  const table = { file: 'units.csv', rowsRead: rows, rows, lineOfRow, columns, sha256: '0' }
  return {
    study: read.value,
    inputs: { table, zones: { file: 'zones.geojson', content: collection(...features), sha256: '0' } },
  }
}
