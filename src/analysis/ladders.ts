/**
 * The pooled estimate made again with one choice changed: bandwidths, a hole at the line, orders and kernels, and lines
 * that are none, drawn inside one side. Sorted entries are shared by all.
 */
import { covarianceMatrix, type JumpFit, type Kernel, outsideDonut, splitSide } from '../jump/index.js'
import { studentTwoSidedP } from '../math/index.js'
import type { Ladders, Rung } from '../results.js'
import { estimatePooled, hasReason, type OutcomeEstimates, type PoolBasis } from './estimating.js'

/** Of the study's own bandwidth. */
const scales = [0.5, 0.75, 1.25, 1.5, 2]
/** Of the study's own bandwidth: units nearer to the line than this are left out. */
const holes = [0.05, 0.1, 0.15, 0.2]
/** Places of the lines that are none: shares of the units of a side that are nearer to the line. */
const placeboShares = [0.25, 0.5, 0.75]
const kernels: readonly Kernel[] = ['triangular', 'epanechnikov', 'uniform']

export interface LadderOptions {
  readonly donut: number
  /** Every order with every kernel, not one changed at a time. */
  readonly isFull: boolean
  /** On a score, lines that are none; on the ground they are drawn there. */
  readonly hasPlacebos: boolean
}

/** Empty where there is no pooled estimate to compare with. */
export function laddersOf(
  basis: PoolBasis,
  pooled: OutcomeEstimates['pooled'],
  { donut, isFull, hasPlacebos }: LadderOptions,
): Ladders | undefined {
  if (hasReason(pooled)) return undefined
  const { h, b } = pooled.jump.bandwidths
  const again = (change: Partial<PoolBasis['options']>, hole = donut, sample = basis.sample) =>
    estimatePooled({ ...basis, sample, options: { ...basis.options, ...change } }, hole)
  const fixed = (scale: number) => ({
    bandwidth: {
      kind: 'fixed' as const,
      untreated: h.untreated * scale,
      treated: h.treated * scale,
      bias: { untreated: b.untreated * scale, treated: b.treated * scale },
    },
  })
  const { influence } = pooled.jump
  const { spatial } = basis.options
  const beside = (made: OutcomeEstimates['pooled']): Rung => {
    const rung = rungOf(made)
    if (hasReason(made) || 'not_estimated' in rung) return rung
    return {
      ...rung,
      p_difference: differenceP(
        pooled.jump,
        made.jump,
        covarianceMatrix([influence, made.jump.influence], spatial).matrix,
      ),
    }
  }
  const own = basis.options
  const shapes = [0, 1, 2, 3].flatMap((order) => kernels.map((kernel) => ({ order, kernel })))
  const kept = shapes.filter(
    ({ order, kernel }) =>
      (order !== own.order || kernel !== own.kernel) &&
      (isFull || (order <= 2 && (order === own.order || kernel === own.kernel))),
  )
  const narrower = Math.min(h.untreated, h.treated)
  return {
    bandwidth: scales.map((scale) => ({ scale, ...beside(again(fixed(scale))) })),
    donut: holes
      .map((share) => share * narrower)
      .filter((hole) => hole > donut)
      .map((hole) => ({ donut: hole, ...beside(again(fixed(1), hole)) })),
    order_kernel: kept.map((shape) => ({ ...shape, ...beside(again(shape)) })),
    placebo_lines: hasPlacebos ? placeboLines(basis, donut) : [],
  }
}

/** Two-sided, normal: of the two estimates being the same, with the covariance that shared units give them. */
function differenceP({ corrected: a }: JumpFit, { corrected: b }: JumpFit, matrix: Float64Array): number {
  const standardError = Math.sqrt(Math.max(0, matrix[0] + matrix[3] - 2 * matrix[1]))
  const difference = b.estimate - a.estimate
  if (!(standardError > 1e-9 * a.standardError)) return difference === 0 ? 1 : 0
  return studentTwoSidedP(difference / standardError, Number.POSITIVE_INFINITY)
}

function rungOf(made: OutcomeEstimates['pooled']): Rung {
  if (hasReason(made)) return { not_estimated: made.reason }
  const { bandwidths, unitsInBandwidth, corrected } = made.jump
  return {
    bandwidth: bandwidths.h,
    units: unitsInBandwidth,
    estimate: corrected.estimate,
    standard_error: corrected.standardError,
    low: corrected.low,
    high: corrected.high,
    p: corrected.p,
  }
}

/** Where nothing changes: inside each side, with the units of that side alone and a bandwidth of their own. */
function placeboLines(basis: PoolBasis, donut: number): Ladders['placebo_lines'] {
  const sample = outsideDonut(basis.sample, donut)
  return (['untreated', 'treated'] as const).flatMap((side) => {
    const { t } = sample[side]
    const sign = side === 'treated' ? 1 : -1
    const places = new Set(placeboShares.map((share) => t[Math.floor(share * t.length)]).filter((at) => at > t[0]))
    return [...places].map((at) => ({
      side,
      at: sign * at,
      ...rungOf(estimatePooled({ ...basis, sample: splitSide(sample, side, at) }, 0)),
    }))
  })
}
