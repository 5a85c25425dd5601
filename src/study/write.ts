import { stringify } from 'yaml'
import type { Bandwidth, Cutoff, PlanPart, Study } from './types.js'

/**
 * The study as YAML, keys in the order of the interface, every default filled in. Reading it back gives an equal study.
 * Where a default is not one value (the variance, the reach, what tells lines apart) the key is left out.
 */
export function resolvedStudy(study: Study): string {
  const { records, estimation, pooling, disclosure } = study
  const written = {
    title: study.title,
    records: {
      file: records.file,
      id: records.id,
      position: records.position,
      crs: records.crs,
      layer: records.layer,
      keep: records.keep,
      weight: records.weight,
      cluster: records.cluster,
    },
    outcomes: study.outcomes,
    line: writtenLine(study.line),
    take_up: study.takeUp,
    covariates: study.covariates.length > 0 ? study.covariates : undefined,
    predetermined: study.predetermined.length > 0 ? study.predetermined : undefined,
    estimation: {
      order: estimation.order,
      kernel: estimation.kernel,
      bandwidth: writtenBandwidth(estimation.bandwidth),
      sides: estimation.sides,
      interval: estimation.interval,
      smoothness: estimation.smoothness,
      variance: estimation.variance,
      reference: estimation.reference,
      spatial: estimation.spatial,
      donut: estimation.donut,
      level: estimation.level,
    },
    pooling: { fixed_effects: pooling.fixedEffects, target: pooling.target, slope: pooling.slope },
    checks: study.checks,
    audit: study.audit,
    away_from_line: study.away,
    disclosure: { coordinates: disclosure.coordinates, smallest_cell: disclosure.smallestCell },
    variants:
      study.variants.length > 0
        ? Object.fromEntries(study.variants.map(({ name, overrides }) => [name, overrides]))
        : undefined,
    plan: writtenPlan(study.plan),
    seed: study.seed,
  }
  return stringify(written, { lineWidth: 0, aliasDuplicateObjects: false })
}

function writtenLine(line: Study['line']): object {
  if (line.kind === 'score')
    return {
      score: line.score,
      cutoff: writtenCutoff(line.cutoff),
      treated: line.treated,
      compare_by: line.compareBy,
      rescale: line.rescale,
    }
  if (line.kind === 'distance') return { distance: line.distance, name: line.name, pieces: line.pieces }
  return {
    zones: Object.keys(line.zones).length === 1 ? line.zones.file : line.zones,
    zone_name: line.zoneName,
    treated: line.treated,
    dose: line.dose,
    outside: line.outside,
    unit: line.unit,
    snap: line.snap,
    piece: line.piece,
    measured: line.measured,
    reach: line.reach,
    barriers: line.barriers,
    overlaps: line.overlaps,
    along: line.along,
    side: line.side,
    on_conflict: line.side === undefined ? undefined : line.onConflict,
    position_error: line.positionError,
    corner: line.corner,
    largest_turn: line.largestTurn,
    repeated_points: line.repeatedPoints,
  }
}

function writtenCutoff(cutoff: Cutoff): number | object {
  switch (cutoff.kind) {
    case 'value':
      return cutoff.value
    case 'column':
      return { column: cutoff.column }
    case 'schedule':
      return { schedule: cutoff.file, by: cutoff.by, value: cutoff.value, period: cutoff.period }
    case 'ladder':
      return { ladder: cutoff.steps }
  }
}

function writtenBandwidth(bandwidth: Bandwidth): string | number | object {
  if (bandwidth.kind === 'fixed' && bandwidth.untreated !== bandwidth.treated) {
    const { kind: _, ...widths } = bandwidth
    return widths
  }
  const main = bandwidth.kind === 'rule' ? bandwidth.rule : bandwidth.untreated
  return bandwidth.bias === undefined ? main : { main, bias: bandwidth.bias }
}

/** Nothing where the study says nothing of a plan. */
function writtenPlan({ effect, power, assume }: PlanPart): object | undefined {
  if (effect === undefined && assume === undefined) return undefined
  return {
    effect,
    power,
    assume: assume && {
      units: assume.units,
      sd: assume.sd,
      r_squared: assume.rSquared,
      share_treated: assume.shareTreated,
      score: assume.score,
      bandwidth: assume.bandwidth,
      lines: assume.lines,
      intraclass_correlation: assume.intraclassCorrelation,
      cluster_size: assume.clusterSize,
    },
  }
}
