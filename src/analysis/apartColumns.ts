/** Columns of the records as they may leave: no ids, no positions, clusters under numbers of their own. */
import type { Column, LabelColumn } from '../records/index.js'
import { labelsOf, numbersOf } from '../records/index.js'
import type { Study } from '../study/index.js'
import { type AnalysisInputs, clusterColumns, positionColumns, wantedColumns } from './inputs.js'

export const unitsFile = 'units.csv'

/** What the study asks of the records but ids, positions and zones, in the order of `rows`. */
export function columnsApart(
  study: Study,
  inputs: AnalysisInputs,
  rows: Uint32Array,
): { readonly columns: Column[]; readonly records: Study['records'] } {
  const { table, schedule } = inputs
  const { id, weight, cluster } = study.records
  const wanted = wantedColumns(study, schedule ? [...schedule.columns.keys()] : []).records
  const naming = new Set(lineNaming(study))
  const studies = [study, ...study.variants.map((variant) => variant.study)]
  const clusters = new Set(studies.flatMap(clusterColumns))
  const hidden = new Set(hiddenColumns(study))
  const names = [...new Set(wanted.map(({ name }) => name))]
  const columns = names
    .filter((name) => !hidden.has(name) || clusters.has(name))
    .map((name): Column => {
      const column = table.columns.get(name) as Column
      if (column.kind === 'number') return { ...column, values: Float64Array.from(rows, (row) => column.values[row]) }
      return naming.has(name) || !clusters.has(name) ? pickLabels(column, rows) : numbered(column, rows, name)
    })
  const again = id === undefined ? undefined : idsThatRepeat(labelsOf(table, id), rows)
  const unit = freeName('unit', new Set(names))
  return {
    columns: again ? [numbered(again, rows, unit), ...columns] : columns,
    records: {
      file: unitsFile,
      ...(again ? { id: unit } : {}),
      ...(weight === undefined ? {} : { weight }),
      ...(cluster === undefined ? {} : { cluster }),
    },
  }
}

/** Columns whose labels are the names of lines, which the results print. */
function lineNaming({ line }: Study): readonly string[] {
  if (line.kind === 'distance') return line.name === undefined ? [] : [line.name]
  if (line.kind !== 'score') return []
  return [...(line.compareBy ?? []), ...(line.cutoff.kind === 'schedule' ? line.cutoff.by : [])]
}

/** Ids, positions, and the zone by the record. */
export function hiddenColumns(study: Study): readonly string[] {
  const { line, records } = study
  const { id, position } = records
  const ids = id === undefined ? [] : [id]
  if (line.kind !== 'border') return ids
  const text = typeof position === 'string' ? [position] : []
  return [...ids, ...positionColumns(study), ...text, ...(line.side === undefined ? [] : [line.side])]
}

function pickLabels(column: LabelColumn, rows: Uint32Array): LabelColumn {
  return { ...column, codes: Int32Array.from(rows, (row) => column.codes[row]) }
}

/** Labels become numbers from 1 in the order in which `rows` meet them, which says nothing of the labels. */
function numbered({ codes }: LabelColumn, rows: Uint32Array, name: string): Column {
  const numbers = new Map<number, number>()
  const values = Float64Array.from(rows, (row) => {
    const code = codes[row]
    if (code < 0) return Number.NaN
    if (!numbers.has(code)) numbers.set(code, numbers.size + 1)
    return numbers.get(code) as number
  })
  return { kind: 'number', name, values }
}

/** Undefined where no id is in more than one row: then it ties nothing together. */
function idsThatRepeat(ids: LabelColumn, rows: Uint32Array): LabelColumn | undefined {
  const known = [...rows].map((row) => ids.codes[row]).filter((code) => code >= 0)
  return new Set(known).size < known.length ? ids : undefined
}

/** Which units stand at one point, where the study clusters by that. */
export function pointsOf(study: Study, { table }: AnalysisInputs, rows: Uint32Array, name: string): Column | undefined {
  const { line, records } = study
  if (line.kind !== 'border' || line.repeatedPoints !== 'cluster' || records.cluster !== undefined) return undefined
  const [lon, lat] = positionColumns(study).map((column) => numbersOf(table, column))
  const numbers = new Map<string, number>()
  const codes = new Int32Array(table.rows)
  for (const row of rows) {
    const place = `${lon[row]} ${lat[row]}`
    if (!numbers.has(place)) numbers.set(place, numbers.size)
    codes[row] = numbers.get(place) as number
  }
  return numbered({ kind: 'label', name, codes, labels: [] }, rows, name)
}

export function freeName(name: string, taken: ReadonlySet<string>): string {
  return taken.has(name) ? freeName(`${name}_`, taken) : name
}
