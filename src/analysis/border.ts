/** A border study's rules put to work: zones and layers to a border, units measured once, rules deciding what counts. */
import {
  type Border,
  type Conflict,
  type EligibilityRules,
  eligible,
  type Ground,
  type LayerShare,
  type LayersAlong,
  type LineLayer,
  layersAlong,
  measureUnits,
  prepareBorder,
  type RepeatedPoints,
  readLineLayer,
  readZones,
  repeatedPoints,
  shareNear,
  type WaterfallStep,
  zonesByRecord,
} from '../borders/index.js'
import type { Placement, SetAside } from '../placement.js'
import type { Checked, Problem } from '../problem.js'
import { labelsOf, numbersOf } from '../records/index.js'
import type { BorderLine, LayerNear, Study } from '../study/index.js'
import { type AnalysisInputs, type KnownGround, type LayerInput, type Progress, positionColumns } from './inputs.js'

export const metresPerUnit = { m: 1, km: 1000, ft: 0.3048, mi: 1609.344 } as const

/** What is known of the ground beyond the placement. */
export interface BorderFacts {
  /** Its pieces carry what set them aside. */
  readonly border: Border
  /** What decided which pieces and units count, but for the zone by the record. */
  readonly rules: EligibilityRules
  /** What the same border and units need not be measured for again. */
  readonly known: KnownGround
  readonly ground: Ground
  /** Why each row was not placed: index into `labels`, -1 where it was. */
  readonly reason: { readonly codes: Int32Array; readonly labels: readonly string[] }
  readonly waterfall: readonly WaterfallStep[]
  /** What else changes at the border; absent without barriers and overlaps. */
  readonly layers?: LayersAlong
  /** Units by record and map where the two differ; absent without `line.side`. */
  readonly conflicts?: readonly Conflict[]
  /** Worked out when first asked for. */
  readonly repeated: () => RepeatedPoints
}

export interface LocatedOnBorder extends BorderFacts {
  readonly placement: Placement
  readonly setAside: SetAside
}

/** Zones prepared for their border, and the layers beside it. */
interface StudyBorder {
  readonly border: Border
  readonly barriers: readonly Layer[]
  readonly overlaps: readonly Layer[]
}

/** The border of a study, as every unit is measured against it; the problems of zones and layers all at once. */
export function borderOf(line: BorderLine, inputs: AnalysisInputs): Checked<Border> {
  const prepared = studyBorder(line, inputs)
  return prepared.ok ? { ok: true, value: prepared.value.border } : prepared
}

function studyBorder(line: BorderLine, inputs: AnalysisInputs): Checked<StudyBorder> {
  const { zones, ground } = inputs
  if (!zones) throw new Error('the study has zones, but none were read')
  const problems: Problem[] = []
  const barriers = layersOf(line.barriers, inputs.barriers ?? [], problems)
  const overlaps = layersOf(line.overlaps, inputs.overlaps ?? [], problems)
  if (ground && problems.length === 0) return { ok: true, value: { border: ground.border, barriers, overlaps } }
  const readyZones = readZones(zones.content, zones.file, line.zoneName)
  if (!readyZones.ok) problems.unshift(...readyZones.problems)
  if (!readyZones.ok || problems.length > 0) return { ok: false, problems }
  const prepared = prepareBorder(readyZones.value, {
    treated: line.treated,
    dose: line.dose,
    outside: line.outside,
    snapMetres: line.snap,
    pieceMetres: line.piece * metresPerUnit[line.unit],
  })
  return prepared.ok ? { ok: true, value: { border: prepared.value, barriers, overlaps } } : prepared
}

/** Places every row against the border; `inputs.ground` spares the geometry where it is known already. */
export function locateOnBorder(
  study: Study,
  line: BorderLine,
  inputs: AnalysisInputs,
  progress?: Progress,
): Checked<LocatedOnBorder> {
  const { table } = inputs
  const prepared = studyBorder(line, inputs)
  if (!prepared.ok) return prepared
  const { border, barriers, overlaps } = prepared.value
  const perUnit = metresPerUnit[line.unit]
  const [lon, lat] = positionColumns(study).map((name) => numbersOf(table, name))
  const measured =
    inputs.ground?.measured ?? measureUnits(border, lon, lat, (done) => progress?.('placing', done, table.rows))
  const shareOf = new Map(inputs.ground?.shareOf)
  const shares = (layers: readonly Layer[]): LayerShare[] =>
    layers.map(({ layer, key, within }) => {
      const share = shareOf.get(key) ?? shareNear(border, layer, within)
      shareOf.set(key, share)
      return { name: layer.file, share }
    })
  const [nearBarriers, nearOverlaps] = [shares(barriers), shares(overlaps)]
  const side = line.side === undefined ? undefined : zonesByRecord(border.names, labelsOf(table, line.side))
  const rules: EligibilityRules = {
    metresPerUnit: perUnit,
    reachMetres: line.reach === undefined ? undefined : line.reach * perUnit,
    barriers: nearBarriers,
    overlaps: nearOverlaps,
    largestTurnDegrees: line.largestTurn,
    cornerMetres: line.corner * perUnit,
    positionErrorMetres: line.positionError,
  }
  const result = eligible(border, measured, {
    ...rules,
    side: side && { recordZone: side.recordZone, onConflict: line.onConflict },
  })
  const { placement, setAside, ground, reason, pieces, waterfall, conflicts } = result
  const all = [...nearBarriers, ...nearOverlaps]
  return {
    ok: true,
    value: {
      placement,
      setAside,
      ground,
      rules,
      known: { border, measured, shareOf },
      reason,
      border: { ...border, pieces },
      waterfall,
      conflicts,
      layers: all.length > 0 ? layersAlong(pieces, all) : undefined,
      repeated: once(() => repeatedPoints(lon, lat)),
    },
  }
}

function once<T>(work: () => T): () => T {
  let done: { readonly value: T } | undefined
  return () => {
    done ??= { value: work() }
    return done.value
  }
}

interface Layer {
  readonly layer: LineLayer
  /** The layer's content and how near. */
  readonly key: string
  readonly within: number
}

function layersOf(near: readonly LayerNear[], inputs: readonly LayerInput[], problems: Problem[]): Layer[] {
  return near.flatMap(({ within }, i) => {
    const layer = readLineLayer(inputs[i].content, inputs[i].file)
    if (layer.ok) return [{ layer: layer.value, key: `${inputs[i].sha256} ${inputs[i].file} ${within}`, within }]
    problems.push(...layer.problems)
    return []
  })
}
