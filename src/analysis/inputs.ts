/** What an analysis reads besides the study, and which columns it asks of the tables. */
import type { Border, Measured } from '../borders/index.js'
import type { Table, WantedColumn } from '../records/index.js'
import type { Study } from '../study/index.js'

/** A parsed GeoJSON file. */
export interface LayerInput {
  /** As the user named it. */
  readonly file: string
  readonly content: unknown
  /** SHA-256 of the file's bytes, hexadecimal. */
  readonly sha256: string
}

export interface AnalysisInputs {
  readonly table: Table
  /** The schedule of cutoffs, where the study has one. */
  readonly schedule?: Table
  /** The zones of a border study. */
  readonly zones?: LayerInput
  /** In the order of the study's barriers. */
  readonly barriers?: readonly LayerInput[]
  /** In the order of the study's overlaps. */
  readonly overlaps?: readonly LayerInput[]
  /** The border of `zones` and the rows of `table` measured against it, where that is known already. */
  readonly ground?: { readonly border: Border; readonly measured: Measured }
}

/** Told how far a stage has come, for a progress bar. */
export type Progress = (stage: string, done: number, total: number) => void

/** Names of the position columns of records that come as GeoJSON points. */
export const pointColumns: readonly [string, string] = ['lon', 'lat']

/** The columns of positions, as the study names them or as points bring them. */
export function positionColumns(study: Study): readonly [string, string] {
  return study.records.position ?? pointColumns
}

/**
 * The columns an analysis needs. `scheduleColumns` are the names in the schedule's header: pooling shares are read
 * from the schedule where it has the column, else from the records.
 */
export function wantedColumns(
  study: Study,
  scheduleColumns: readonly string[] = [],
): { records: WantedColumn[]; schedule?: WantedColumn[] } {
  const records: WantedColumn[] = []
  const ask = (kind: 'number' | 'label', name: string | undefined, askedBy: string) => {
    if (name !== undefined) records.push({ name, kind, askedBy })
  }
  ask('label', study.records.id, 'records.id')
  ask('number', study.records.weight, 'records.weight')
  ask('label', study.records.cluster, 'records.cluster')
  study.outcomes.forEach((outcome, i) => {
    ask('number', outcome, `outcomes[${i}]`)
  })
  const { line } = study
  let schedule: WantedColumn[] | undefined
  if (line.kind === 'border') {
    const [lon, lat] = positionColumns(study)
    ask('number', lon, 'records.position')
    ask('number', lat, 'records.position')
    ask('label', line.side, 'line.side')
  } else if (line.kind === 'distance') {
    ask('number', line.distance, 'line.distance')
    ask('label', line.name, 'line.name')
  } else {
    ask('number', line.score, 'line.score')
    if (line.cutoff.kind === 'column') ask('number', line.cutoff.column, 'line.cutoff.column')
    for (const name of line.compareBy ?? []) ask('label', name, 'line.compare_by')
    if (line.cutoff.kind === 'schedule') {
      const { by, value } = line.cutoff
      for (const name of by) ask('label', name, 'line.cutoff.by')
      schedule = by.map((name) => ({ name, kind: 'label', askedBy: 'line.cutoff.by' }))
      schedule.push({ name: value, kind: 'number', askedBy: 'line.cutoff.value' })
    }
  }
  const { target } = study.pooling
  if (typeof target === 'object') {
    const askedBy = 'pooling.target.column'
    if (schedule && scheduleColumns.includes(target.column)) {
      schedule.push({ name: target.column, kind: 'number', askedBy })
    } else ask('number', target.column, askedBy)
  }
  return { records, schedule }
}
