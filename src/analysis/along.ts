/** Estimates at points along the border, as they stand in results.json (METHODS section 10). */
import { type BorderPoint, indexUnits, pointsAlong, type UnitIndex, unitsNear } from '../borders/index.js'
import { type JumpFit, type PlaneBandwidths, planeBandwidth, planeBandwidthRule } from '../jump/index.js'
import { streamOf } from '../math/index.js'
import { numbersOf } from '../records/index.js'
import type { AlongAverage, AlongResult, OutcomeResult } from '../results.js'
import type { BorderLine, Study, VarianceName } from '../study/index.js'
import { estimateAlong, type TargetEffect } from '../thresholds/index.js'
import { metresPerUnit } from './border.js'
import { type AnalysisInputs, positionColumns } from './inputs.js'
import type { Placed } from './placing.js'

/** What the points of all outcomes share. */
export interface AlongGround {
  readonly line: BorderLine
  readonly points: readonly BorderPoint[]
  /** Of the placement's entries. */
  readonly index: UnitIndex
}

/** Undefined where the study asks for no points, or there is no border left to put them on. */
export function alongGround(
  study: Study,
  inputs: AnalysisInputs,
  { placement, border }: Placed,
): AlongGround | undefined {
  const { line } = study
  if (line.kind !== 'border' || line.along === undefined || !border) return undefined
  const points = pointsAlong(border, line.along * metresPerUnit[line.unit])
  if (points.length === 0) return undefined
  const [lon, lat] = positionColumns(study).map((name) => {
    const values = numbersOf(inputs.table, name)
    return Float64Array.from(placement.unit, (unit) => values[unit])
  })
  return { line, points, index: indexUnits(lon, lat) }
}

/** `pooled` carries the bandwidth against distance, from which that of the points follows. */
export function alongResult(
  study: Study,
  inputs: AnalysisInputs,
  placed: Placed,
  ground: AlongGround,
  outcome: string,
  pooled: JumpFit,
): Pick<OutcomeResult, 'along' | 'along_average' | 'along_critical_value' | 'along_bandwidth'> {
  const { points, index, line } = ground
  const { estimation } = study
  const { border } = placed
  const bandwidths = pointBandwidths(study, ground, pooled)
  const along = estimateAlong(
    points.map(({ lengthMetres, piece }, i) => ({
      id: `point ${i + 1}`,
      lengthMetres,
      ...(border?.doses ? { zones: [border.untreatedOfPiece[piece], border.treatedOfPiece[piece]] as const } : {}),
    })),
    {
      near: (point, radiusMetres) => unitsNear(index, points[point].lon, points[point].lat, radiusMetres),
      ...unitsOf(study, inputs, placed, outcome),
    },
    {
      order: estimation.order,
      kernel: estimation.kernel,
      ...variancesAtPoints(estimation.variance, placed),
      reference: estimation.reference,
      level: estimation.level,
      bandwidths,
      random: streamOf(study.seed, 2),
    },
  )
  const idOf = lineIds(placed)
  const perUnit = metresPerUnit[line.unit]
  return {
    along: along.points.map((at, i): AlongResult => {
      const { lon, lat, positionMetres, piece } = points[i]
      const place = { lon, lat, position_m: positionMetres, piece: idOf[piece] as string }
      if (!at.ok) return { ...place, ...blank, units: at.units, reason: at.reason }
      const { estimate, standardError, low, high } = at.jump.corrected
      return {
        ...place,
        estimate,
        standard_error: standardError,
        low,
        high,
        uniform_low: at.uniformLow,
        uniform_high: at.uniformHigh,
        units: at.jump.units,
      }
    }),
    along_average: { length: averageResult(along.average.length), density: averageResult(along.average.density) },
    ...(along.criticalValue === undefined ? {} : { along_critical_value: along.criticalValue }),
    along_bandwidth: {
      rule: estimation.bandwidth.kind === 'fixed' ? 'as the study gives it' : planeBandwidthRule,
      untreated: bandwidths.h.untreated / perUnit,
      treated: bandwidths.h.treated / perUnit,
    },
  }
}

const blank = {
  estimate: null,
  standard_error: null,
  low: null,
  high: null,
  uniform_low: null,
  uniform_high: null,
} as const

/** In metres; b = h. */
function pointBandwidths(study: Study, { line, points }: AlongGround, pooled: JumpFit): PlaneBandwidths {
  const { order, kernel, bandwidth } = study.estimation
  const perUnit = metresPerUnit[line.unit]
  const length = points.reduce((sum, point) => sum + point.lengthMetres, 0)
  const widthOf = (side: 'untreated' | 'treated') => {
    const metres = pooled.bandwidths.h[side] * perUnit
    return bandwidth.kind === 'fixed' ? metres : planeBandwidth(metres, length, order, kernel).bandwidth
  }
  const h = { untreated: widthOf('untreated'), treated: widthOf('treated') }
  return { h, b: h }
}

/** Near one point clusters are few: the bias-reduced variance. Neighbours are not offered in two coordinates: hc2. */
function variancesAtPoints(variance: VarianceName | undefined, { cluster, spatial }: Placed) {
  if (spatial) return { variance: 'spatial' as const, spatial }
  const isByUnit = variance === 'hc0' || variance === 'hc1' || variance === 'hc2' || variance === 'hc3'
  if (isByUnit) return { variance }
  return { variance: cluster && variance !== 'neighbours' ? ('few-clusters' as const) : ('hc2' as const) }
}

/** By entry of the placement; y is NaN where the outcome is missing or the unit lies in the donut. */
function unitsOf(study: Study, inputs: AnalysisInputs, { placement, cluster, ground }: Placed, outcome: string) {
  const { unit, treated, x } = placement
  const y = numbersOf(inputs.table, outcome)
  const { weight } = study.records
  const w = weight === undefined ? undefined : numbersOf(inputs.table, weight)
  const { donut } = study.estimation
  return {
    unit,
    treated,
    y: Float64Array.from(unit, (u, e) => (donut > 0 && Math.abs(x[e]) < donut ? Number.NaN : y[u])),
    w: w && Float64Array.from(unit, (u) => w[u]),
    cluster: cluster && Int32Array.from(unit, (u) => cluster[u]),
    zone: ground && Int32Array.from(unit, (u) => ground.zone[u]),
  }
}

/** Id of the line that each piece is; undefined for pieces set aside. */
function lineIds({ placement, border }: Placed): (string | undefined)[] {
  let used = 0
  return (border?.pieces ?? []).map(({ setAside }) => (setAside === undefined ? placement.lines[used++].id : undefined))
}

function averageResult(effect: TargetEffect): AlongAverage {
  if (!effect.ok) return { not_estimated: effect.reason }
  const { estimate, standardError, low, high, p } = effect
  return { estimate, standard_error: standardError, low, high, p }
}
