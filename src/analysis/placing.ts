/** From tables and layers to a placement: the one step that knows whether a line is a cutoff or a border. */
import { beyondCap } from '../borders/index.js'
import { type CrossedClusters, crossClusters, type SpatialPlaces, spatialPlaces } from '../jump/index.js'
import { streamOf } from '../math/index.js'
import type { Placement, SetAside } from '../placement.js'
import type { Checked } from '../problem.js'
import { type LedgerStep, labelsOf, ledgerStep, numbersOf, type Table } from '../records/index.js'
import type { ScoreLine, Study } from '../study/index.js'
import { type CutoffSource, type MissingKey, placeByDistance, placeByScore, readSchedule } from '../thresholds/index.js'
import { type BorderFacts, locateOnBorder, metresPerUnit } from './border.js'
import { type AnalysisInputs, clusterColumns, type Progress, positionColumns } from './inputs.js'

/** Border studies have the facts of their border too. */
export interface Placed extends Partial<BorderFacts> {
  readonly placement: Placement
  /** Rows kept that have no entry, by reason. */
  readonly setAside: SetAside
  /** Rows with at least one entry. */
  readonly units: number
  readonly ledger: readonly LedgerStep[]
  /** Keys that records have and the schedule has not. */
  readonly missingKeys: readonly MissingKey[]
  /** Cluster of each row, from 0, or -1: the study's column, or the position where repeated points are clustered. */
  readonly cluster?: Int32Array
  /** What pairs of clusters stand for, where the study clusters by two columns: `cluster` has pairs then. */
  readonly crossed?: CrossedClusters
  /** Where rows stand and how far noise reaches, for a spatial variance. */
  readonly spatial?: SpatialPlaces
}

interface Located extends Partial<BorderFacts> {
  readonly placement: Placement
  readonly setAside: SetAside
  readonly missingKeys?: readonly MissingKey[]
}

/** Places every row of the table; problems of schedule, zones and barriers are returned all at once. */
export function placeStudy(study: Study, inputs: AnalysisInputs, progress?: Progress): Checked<Placed> {
  const located = locate(study, inputs, progress)
  if (!located.ok) return located
  const { table } = inputs
  const ledger = [ledgerStep('rows kept', table.rowsRead, { 'not kept by the condition': table.rowsRead - table.rows })]
  const { border } = located.value
  const lines = border
    ? { km: totalMetres(located.value.placement) / 1000, pairs: pairsOf(located.value.placement) }
    : undefined
  ledger.push(ledgerStep('placed against a line', table.rows, located.value.setAside, lines))
  const before = ledger[1].out
  const usable = usabilityOf(study, table, located.value)
  const { placement, setAside } = usable
    ? dropUnusable(located.value.placement, usable.reasonAgainst)
    : { placement: located.value.placement, setAside: new Map<string, number>() }
  if (usable) ledger.push(ledgerStep('usable weight, cluster and position', before, setAside))
  const all = new Map(located.value.setAside)
  for (const [reason, count] of setAside) all.set(reason, (all.get(reason) ?? 0) + count)
  const units = ledger[ledger.length - 1].out
  return {
    ok: true,
    value: {
      ...located.value,
      placement,
      setAside: all,
      units,
      ledger,
      missingKeys: located.value.missingKeys ?? [],
      cluster: usable?.cluster,
      crossed: usable?.crossed,
      spatial: spatialOf(study, table),
    },
  }
}

function spatialOf(study: Study, table: Table): SpatialPlaces | undefined {
  const { line, estimation } = study
  if (line.kind !== 'border' || estimation.spatial === undefined) return undefined
  const [lon, lat] = positionColumns(study).map((name) => numbersOf(table, name))
  return spatialPlaces(lon, lat, estimation.spatial * metresPerUnit[line.unit])
}

function locate(study: Study, inputs: AnalysisInputs, progress?: Progress): Checked<Located> {
  const { line } = study
  const { table } = inputs
  if (line.kind === 'border') return locateOnBorder(study, line, inputs, progress)
  if (line.kind === 'score') return locateByScore(line, inputs)
  const name = line.name === undefined ? undefined : labelsOf(table, line.name)
  return { ok: true, value: placeByDistance({ distance: numbersOf(table, line.distance), name }) }
}

function locateByScore(line: ScoreLine, { table, schedule }: AnalysisInputs): Checked<Located> {
  let cutoff: CutoffSource
  if (line.cutoff.kind === 'schedule') {
    if (!schedule) throw new Error('the study has a schedule, but none was read')
    const { by, value } = line.cutoff
    const read = readSchedule({
      by: by.map((name) => labelsOf(schedule, name)),
      value: numbersOf(schedule, value),
      lineOfRow: schedule.lineOfRow,
      file: schedule.file,
      valueName: value,
    })
    if (!read.ok) return read
    cutoff = { kind: 'schedule', schedule: read.value, keys: by.map((name) => labelsOf(table, name)) }
  } else if (line.cutoff.kind === 'column') {
    cutoff = { kind: 'column', values: numbersOf(table, line.cutoff.column), name: line.cutoff.column }
  } else if (line.cutoff.kind === 'ladder') {
    cutoff = { kind: 'ladder', steps: Float64Array.from(line.cutoff.steps) }
  } else cutoff = line.cutoff
  const compareBy = line.compareBy?.map((name) => labelsOf(table, name))
  const score = numbersOf(table, line.score)
  return { ok: true, value: placeByScore({ score, treated: line.treated, cutoff, compareBy, rescale: line.rescale }) }
}

function totalMetres(placement: Placement): number {
  return placement.lines.reduce((sum, line) => sum + (line.lengthMetres ?? 0), 0)
}

function pairsOf(placement: Placement): number {
  return new Set(placement.lines.map((line) => JSON.stringify(line.zones))).size
}

interface Usability {
  readonly cluster: Int32Array | undefined
  readonly crossed: CrossedClusters | undefined
  readonly reasonAgainst: (row: number) => string | undefined
}

/** What may still stand against a row that has a line; undefined where the study asks for nothing of the kind. */
function usabilityOf(study: Study, table: Table, located: Located): Usability | undefined {
  const weight = study.records.weight === undefined ? undefined : numbersOf(table, study.records.weight)
  const { repeated } = located
  const points = study.line.kind === 'border' && repeated ? study.line.repeatedPoints : 'keep'
  const [first, second] = clusterColumns(study).map((name) => labelsOf(table, name).codes)
  const pairs = second && pairsOfClusters(first, second)
  const byColumn = pairs?.cluster ?? first
  const cluster = byColumn ?? (points === 'cluster' ? repeated?.().point : undefined)
  const key = study.records.id === undefined ? undefined : labelsOf(table, study.records.id).codes
  const beyond =
    typeof points === 'object' && repeated ? beyondCap(repeated(), points.cap, streamOf(study.seed, 3), key) : undefined
  if (!weight && !cluster && !beyond) return undefined
  return {
    cluster,
    crossed: pairs?.crossed,
    reasonAgainst: (row) => {
      if (beyond?.[row]) return 'repeated point beyond the cap'
      return unusable(weight?.[row], cluster?.[row])
    },
  }
}

/** Codes of pairs; -1 where either is missing. */
function pairsOfClusters(first: Int32Array, second: Int32Array): ReturnType<typeof crossClusters> {
  const rows = first.map((_, row) => row).filter((row) => first[row] >= 0 && second[row] >= 0)
  const { cluster: found, crossed } = crossClusters(
    rows.map((row) => first[row]),
    rows.map((row) => second[row]),
  )
  const cluster = new Int32Array(first.length).fill(-1)
  rows.forEach((row, i) => {
    cluster[row] = found[i]
  })
  return { cluster, crossed }
}

/** Takes out the entries of rows with a reason against them, counted by row. */
function dropUnusable(
  placement: Placement,
  reasonAgainst: Usability['reasonAgainst'],
): { placement: Placement; setAside: Map<string, number> } {
  const setAside = new Map<string, number>()
  const kept: number[] = []
  let previous = -1
  for (let e = 0; e < placement.unit.length; e++) {
    const unit = placement.unit[e]
    const reason = reasonAgainst(unit)
    if (reason === undefined) kept.push(e)
    else if (unit !== previous) setAside.set(reason, (setAside.get(reason) ?? 0) + 1)
    previous = unit
  }
  if (kept.length === placement.unit.length) return { placement, setAside }
  return {
    placement: {
      lines: placement.lines,
      unit: Int32Array.from(kept, (e) => placement.unit[e]),
      line: Int32Array.from(kept, (e) => placement.line[e]),
      x: Float64Array.from(kept, (e) => placement.x[e]),
      treated: Uint8Array.from(kept, (e) => placement.treated[e]),
    },
    setAside,
  }
}

function unusable(weight: number | undefined, cluster: number | undefined): string | undefined {
  if (weight !== undefined) {
    if (Number.isNaN(weight)) return 'weight missing'
    if (!(weight > 0 && weight < Number.POSITIVE_INFINITY)) return weight === 0 ? 'weight zero' : 'weight not usable'
  }
  return cluster !== undefined && cluster < 0 ? 'cluster missing' : undefined
}
