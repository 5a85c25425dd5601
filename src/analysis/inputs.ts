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
  /** How its coordinates were read, where that is known. */
  readonly facts?: { readonly format: string; readonly crs: string; readonly from: string; readonly edgeMetres: number }
}

export interface AnalysisInputs {
  readonly table: Table
  /** The schedule of cutoffs, where the study has one. */
  readonly schedule?: Table
  /** The target's shares, where the study has a file of them. */
  readonly shares?: Table
  /** The zones of a border study. */
  readonly zones?: LayerInput
  /** In the order of the study's barriers. */
  readonly barriers?: readonly LayerInput[]
  /** In the order of the study's overlaps. */
  readonly overlaps?: readonly LayerInput[]
  /** Where that is known already. */
  readonly ground?: KnownGround
  /** What each variant of the study reads, by its name. */
  readonly variants?: ReadonlyMap<string, AnalysisInputs>
}

/** The border of the zones, no rule applied to it, and the rows of the table measured against it. */
export interface KnownGround {
  readonly border: Border
  readonly measured: Measured
  /** Share of each piece near a layer, by the layer and how near. */
  readonly shareOf?: ReadonlyMap<string, Float64Array>
}

/** Told how far a stage has come, for a progress bar. */
export type Progress = (stage: string, done: number, total: number) => void

/** Names of the position columns of records that come as GeoJSON points. */
export const pointColumns: readonly [string, string] = ['lon', 'lat']

/** The columns that clusters come from: none, one, or two that cross. */
export function clusterColumns({ records }: Study): readonly string[] {
  const { cluster } = records
  return cluster === undefined ? [] : typeof cluster === 'string' ? [cluster] : cluster
}

/** The columns of positions: as the study names them, as points bring them, or made of a column of WKT. */
export function positionColumns({ records }: Study): readonly [string, string] {
  const { position } = records
  if (typeof position !== 'string') return position ?? pointColumns
  return [`${position} (longitude)`, `${position} (latitude)`]
}

/** Equal for studies that read the same table, schedule, shares and zones; which columns of them is left open. */
export function readingKey({ records, line, pooling: { target } }: Study): string {
  const { id: _, weight: __, cluster: ___, ...table } = records
  const files = line.kind === 'border' ? line.zones : line.kind === 'score' ? line.cutoff : ''
  const schedule = typeof files === 'object' && 'kind' in files && files.kind !== 'schedule' ? '' : files
  const shares = typeof target === 'object' && 'shares' in target ? target : ''
  return JSON.stringify([table, line.kind === 'border', schedule, shares])
}

/**
 * The columns an analysis needs, of the study and of its variants that read the same files. `scheduleColumns` are the names in the schedule's header: pooling shares are read
 * from the schedule where it has the column, else from the records.
 */
export function wantedColumns(study: Study, scheduleColumns: readonly string[] = []): WantedColumns {
  const own = ownColumns(study, scheduleColumns)
  const others = study.variants
    .filter((variant) => readingKey(variant.study) === readingKey(study))
    .map(({ name, study: other }) => named(name, ownColumns(other, scheduleColumns)))
  return {
    records: distinct([own, ...others].flatMap(({ records }) => records)),
    ...(own.schedule ? { schedule: distinct([own, ...others].flatMap(({ schedule }) => schedule ?? [])) } : {}),
  }
}

export interface WantedColumns {
  readonly records: readonly WantedColumn[]
  readonly schedule?: readonly WantedColumn[]
}

function named(variant: string, { records, schedule }: WantedColumns): WantedColumns {
  const of = (columns: readonly WantedColumn[]) =>
    columns.map((column) => ({ ...column, askedBy: `variant ${variant}: ${column.askedBy}` }))
  return { records: of(records), ...(schedule ? { schedule: of(schedule) } : {}) }
}

/** The first to ask for a column of a kind. */
function distinct(columns: readonly WantedColumn[]): WantedColumn[] {
  const first = new Map<string, WantedColumn>()
  for (const column of columns) {
    const key = `${column.kind} ${column.name}`
    if (!first.has(key)) first.set(key, column)
  }
  return [...first.values()]
}

function ownColumns(study: Study, scheduleColumns: readonly string[]): WantedColumns {
  const records: WantedColumn[] = []
  const ask = (kind: 'number' | 'label', name: string | undefined, askedBy: string) => {
    if (name !== undefined) records.push({ name, kind, askedBy })
  }
  ask('label', study.records.id, 'records.id')
  ask('number', study.records.weight, 'records.weight')
  for (const name of clusterColumns(study)) ask('label', name, 'records.cluster')
  study.outcomes.forEach((outcome, i) => {
    ask('number', outcome, `outcomes[${i}]`)
  })
  ask('number', study.takeUp, 'take_up')
  ask('number', study.audit, 'audit')
  study.covariates.forEach((name, i) => {
    ask('number', name, `covariates[${i}]`)
  })
  study.predetermined.forEach((name, i) => {
    ask('number', name, `predetermined[${i}]`)
  })
  const { line } = study
  let schedule: WantedColumn[] | undefined
  if (line.kind === 'border') {
    if (typeof study.records.position === 'string') ask('label', study.records.position, 'records.position')
    else for (const name of positionColumns(study)) ask('number', name, 'records.position')
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
  const { target, slope } = study.pooling
  const askOfLines = (name: string, askedBy: string) => {
    if (schedule && scheduleColumns.includes(name)) schedule.push({ name, kind: 'number', askedBy })
    else ask('number', name, askedBy)
  }
  if (typeof target === 'object' && 'column' in target) askOfLines(target.column, 'pooling.target.column')
  if (slope !== undefined) askOfLines(slope, 'pooling.slope')
  return { records, schedule }
}
