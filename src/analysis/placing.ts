/** From tables and layers to a placement: the one step that knows whether a line is a cutoff or a border. */
import {
  type Border,
  type Eligible,
  eligible,
  type LineLayer,
  measureUnits,
  prepareBorder,
  readLineLayer,
  readZones,
  shareNear,
} from '../borders/index.js'
import type { Placement, SetAside } from '../placement.js'
import type { Checked, Problem } from '../problem.js'
import { type LedgerStep, labelsOf, ledgerStep, numbersOf, type Table } from '../records/index.js'
import type { BorderLine, ScoreLine, Study } from '../study/index.js'
import { type CutoffSource, type MissingKey, placeByDistance, placeByScore, readSchedule } from '../thresholds/index.js'
import { type AnalysisInputs, type Progress, positionColumns } from './inputs.js'

export interface Placed {
  readonly placement: Placement
  /** Rows kept that have no entry, by reason. */
  readonly setAside: SetAside
  /** Rows with at least one entry. */
  readonly units: number
  readonly ledger: readonly LedgerStep[]
  /** Keys that records have and the schedule has not. */
  readonly missingKeys: readonly MissingKey[]
  readonly border?: Border
  readonly ground?: Eligible['ground']
  /** Why each row of a border study was not placed against it, before weights and clusters are asked for. */
  readonly reason?: Eligible['reason']
}

interface Located {
  readonly placement: Placement
  readonly setAside: SetAside
  readonly missingKeys?: readonly MissingKey[]
  readonly border?: Border
  readonly ground?: Eligible['ground']
  readonly reason?: Eligible['reason']
}

export const metresPerUnit = { m: 1, km: 1000, ft: 0.3048, mi: 1609.344 } as const

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
  const mayDrop = study.records.weight !== undefined || study.records.cluster !== undefined
  const { placement, setAside } = mayDrop
    ? dropUnusable(study, table, located.value.placement)
    : { placement: located.value.placement, setAside: new Map<string, number>() }
  if (mayDrop) ledger.push(ledgerStep('with weight and cluster', before, setAside))
  const all = new Map(located.value.setAside)
  for (const [reason, count] of setAside) all.set(reason, (all.get(reason) ?? 0) + count)
  const units = ledger[ledger.length - 1].out
  return {
    ok: true,
    value: { ...located.value, placement, setAside: all, units, ledger, missingKeys: located.value.missingKeys ?? [] },
  }
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

function locateOnBorder(
  study: Study,
  line: BorderLine,
  { table, zones, barriers = [] }: AnalysisInputs,
  progress?: Progress,
): Checked<Located> {
  if (!zones) throw new Error('the study has zones, but none were read')
  const problems: Problem[] = []
  const readyZones = readZones(zones.content, zones.file, line.zoneName)
  if (!readyZones.ok) problems.push(...readyZones.problems)
  const layers: { layer: LineLayer; within: number }[] = []
  line.barriers.forEach(({ within }, i) => {
    const layer = readLineLayer(barriers[i].content, barriers[i].file)
    if (layer.ok) layers.push({ layer: layer.value, within })
    else problems.push(...layer.problems)
  })
  if (!readyZones.ok || problems.length > 0) return { ok: false, problems }
  const perUnit = metresPerUnit[line.unit]
  const prepared = prepareBorder(readyZones.value, {
    treated: line.treated,
    snapMetres: line.snap,
    pieceMetres: line.piece * perUnit,
  })
  if (!prepared.ok) return prepared
  const border = prepared.value
  const [lon, lat] = positionColumns(study).map((name) => numbersOf(table, name))
  const measured = measureUnits(border, lon, lat, (done) => progress?.('placing', done, table.rows))
  const { placement, setAside, ground, reason, pieces } = eligible(border, measured, {
    metresPerUnit: perUnit,
    reachMetres: line.reach === undefined ? undefined : line.reach * perUnit,
    barriers: layers.map(({ layer, within }) => ({ name: layer.file, share: shareNear(border, layer, within) })),
  })
  return { ok: true, value: { placement, setAside, ground, reason, border: { ...border, pieces } } }
}

function totalMetres(placement: Placement): number {
  return placement.lines.reduce((sum, line) => sum + (line.lengthMetres ?? 0), 0)
}

function pairsOf(placement: Placement): number {
  return new Set(placement.lines.map((line) => JSON.stringify(line.zones))).size
}

/** Takes out the entries of rows without a usable weight or a cluster. */
function dropUnusable(
  study: Study,
  table: Table,
  placement: Placement,
): { placement: Placement; setAside: Map<string, number> } {
  const weight = study.records.weight === undefined ? undefined : numbersOf(table, study.records.weight)
  const cluster = study.records.cluster === undefined ? undefined : labelsOf(table, study.records.cluster).codes
  const setAside = new Map<string, number>()
  const kept: number[] = []
  let previous = -1
  for (let e = 0; e < placement.unit.length; e++) {
    const unit = placement.unit[e]
    const reason = unusable(weight?.[unit], cluster?.[unit])
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
