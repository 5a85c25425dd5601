/** What is written, with every default filled in. All defaults are here. */
import type { z } from 'zod'
import type { assumptions, borderLine, distanceLine, scoreLine, WrittenStudy } from './schema.js'
import type {
  Bandwidth,
  BorderLine,
  Cutoff,
  DistanceLine,
  EstimationPart,
  LengthUnit,
  PlanAssumptions,
  PlanPart,
  PoolingPart,
  ScoreLine,
  Study,
} from './types.js'

/** Length of the unit in metres; the foot is the international one. */
const METRES: Readonly<Record<LengthUnit, number>> = { m: 1, km: 1000, ft: 0.3048, mi: 1609.344 }

/** `file` gives the title where the study has none: the name of its folder. */
export function resolveStudy(written: WrittenStudy, file: string): Study {
  const { records, pooling = {}, disclosure = {} } = written
  const line = resolveLine(written.line)
  return {
    title: written.title ?? folderOf(file) ?? 'Study',
    records: given(records),
    outcomes: written.outcomes,
    line,
    ...given({ takeUp: written.take_up }),
    covariates: written.covariates ?? [],
    predetermined: written.predetermined ?? [],
    estimation: resolveEstimation(written.estimation ?? {}),
    pooling: {
      fixedEffects: pooling.fixed_effects ?? line.kind === 'border',
      target: resolveTarget(pooling.target ?? 'units'),
      ...given({ slope: pooling.slope }),
    },
    checks: written.checks ?? 'standard',
    ...given({ audit: written.audit, away: written.away_from_line }),
    disclosure: { coordinates: disclosure.coordinates ?? false, smallestCell: disclosure.smallest_cell ?? 10 },
    variants: [],
    plan: resolvePlan(written.plan ?? {}),
    seed: written.seed ?? 1,
  }
}

export function resolveEstimation(estimation: NonNullable<WrittenStudy['estimation']>): EstimationPart {
  return {
    order: estimation.order ?? 1,
    kernel: estimation.kernel ?? 'triangular',
    bandwidth: resolveBandwidth(estimation.bandwidth ?? 'mse'),
    sides: estimation.sides ?? 'common',
    interval: estimation.interval ?? 'auto',
    smoothness: estimation.smoothness ?? 'rule',
    ...given({ variance: estimation.variance }),
    reference: estimation.reference ?? 't',
    ...given({ spatial: estimation.spatial }),
    donut: estimation.donut ?? 0,
    level: estimation.level ?? 0.95,
  }
}

/** A plan asks for 80% power. */
export function resolvePlan({ effect, power, assume }: NonNullable<WrittenStudy['plan']>): PlanPart {
  return {
    ...given({ effect }),
    power: power ?? 0.8,
    ...given({ assume: assume && resolveAssumptions(assume) }),
  }
}

export function resolveAssumptions(written: z.infer<typeof assumptions>): PlanAssumptions {
  return {
    units: written.units,
    sd: written.sd ?? 1,
    rSquared: written.r_squared ?? 0,
    shareTreated: written.share_treated ?? 0.5,
    score: written.score ?? 'normal',
    ...given({ bandwidth: written.bandwidth }),
    lines: written.lines ?? 1,
    intraclassCorrelation: written.intraclass_correlation ?? 0,
    clusterSize: written.cluster_size ?? 1,
  }
}

/** Numbers are multiplied; a rule's answer is, by `scale`. */
export function scaledBandwidth(bandwidth: Bandwidth, scale: number): Bandwidth {
  if (scale === 1) return bandwidth
  const bias = given({ bias: bandwidth.bias === undefined ? undefined : bandwidth.bias * scale })
  if (bandwidth.kind === 'rule') return { ...bandwidth, ...bias, scale }
  return { kind: 'fixed', untreated: bandwidth.untreated * scale, treated: bandwidth.treated * scale, ...bias }
}

function resolveLine(line: WrittenStudy['line']): Study['line'] {
  if ('score' in line) return resolveScore(line)
  return 'zones' in line ? resolveBorder(line) : resolveDistance(line)
}

function resolveScore(line: z.infer<typeof scoreLine>): ScoreLine {
  return {
    kind: 'score',
    score: line.score,
    cutoff: resolveCutoff(line.cutoff),
    treated: line.treated,
    ...given({ compareBy: typeof line.compare_by === 'string' ? [line.compare_by] : line.compare_by }),
    rescale: line.rescale ?? 'none',
  }
}

function resolveTarget(target: NonNullable<NonNullable<WrittenStudy['pooling']>['target']>): PoolingPart['target'] {
  if (typeof target !== 'object' || 'column' in target) return target
  return { ...target, line: typeof target.line === 'string' ? [target.line] : target.line }
}

function resolveCutoff(cutoff: z.infer<typeof scoreLine>['cutoff']): Cutoff {
  if (typeof cutoff === 'number') return { kind: 'value', value: cutoff }
  if ('column' in cutoff) return { kind: 'column', column: cutoff.column }
  if ('ladder' in cutoff) return { kind: 'ladder', steps: [...cutoff.ladder].sort((a, b) => a - b) }
  const by = typeof cutoff.by === 'string' ? [cutoff.by] : cutoff.by
  return { kind: 'schedule', file: cutoff.schedule, by, value: cutoff.value, ...given({ period: cutoff.period }) }
}

function resolveBorder(line: z.infer<typeof borderLine>): BorderLine {
  const unit = line.unit ?? 'm'
  return {
    kind: 'border',
    zones: typeof line.zones === 'string' ? { file: line.zones } : given(line.zones),
    zoneName: line.zone_name ?? 'name',
    ...given({ treated: line.treated, dose: line.dose }),
    outside: line.outside ?? 'set-aside',
    unit,
    snap: line.snap ?? 2,
    piece: line.piece ?? 1000 / METRES[unit],
    ...given({ measured: line.measured, reach: line.reach }),
    barriers: line.barriers ?? [],
    overlaps: line.overlaps ?? [],
    ...given({ along: line.along, side: line.side }),
    onConflict: line.on_conflict ?? 'set-aside',
    positionError: line.position_error ?? 0,
    corner: line.corner ?? 0,
    ...given({ largestTurn: line.largest_turn }),
    repeatedPoints: line.repeated_points ?? 'keep',
  }
}

function resolveDistance(line: z.infer<typeof distanceLine>): DistanceLine {
  return { kind: 'distance', distance: line.distance, ...given({ name: line.name }), pieces: line.pieces ?? false }
}

function resolveBandwidth(written: NonNullable<NonNullable<WrittenStudy['estimation']>['bandwidth']>): Bandwidth {
  if (typeof written === 'object' && 'untreated' in written)
    return { kind: 'fixed', untreated: written.untreated, treated: written.treated, ...given({ bias: written.bias }) }
  const main = typeof written === 'object' ? written.main : written
  const bias = typeof written === 'object' ? { bias: written.bias } : {}
  return typeof main === 'number'
    ? { kind: 'fixed', untreated: main, treated: main, ...bias }
    : { kind: 'rule', rule: main, ...bias }
}

/** Without the keys that were not given, so that equal studies have equal keys. */
function given<T extends object>(part: T): T {
  return Object.fromEntries(Object.entries(part).filter(([, value]) => value !== undefined)) as T
}

export function folderOf(file: string): string | undefined {
  const folder = file.split(/[\\/]/).at(-2)
  return folder === undefined || /^\.*$/.test(folder) || folder.endsWith(':') ? undefined : folder
}
