/** Are all lines' effects equal? */
import { chiSquareUpper, choleskyInPlace, choleskySolveInPlace } from '../math/index.js'
import { type LineEffects, variancesOf } from './effects.js'
import { dot, quadraticFormByRank } from './rank.js'

export interface WaldTest {
  readonly statistic: number
  /** L - 1, or less where the covariance of the differences has a lower rank. */
  readonly df: number
  readonly p: number
}

/** Below this reciprocal condition of the correlation matrix, the differences' covariance is taken by its rank. */
const SMALLEST_CONDITION = 1e-10

/**
 * Wald test of equal effects: (Dτ)'(DΩD')⁻¹Dτ against chi-square, D any full set of differences between lines
 * (METHODS section 9). With an invertible Ω the statistic is the least τ' Ω⁻¹ τ after a common effect is taken off,
 * so one Cholesky factor serves; with a diagonal Ω it is Cochran's Q. Where Ω is near singular (fewer clusters than
 * lines), the pseudo-inverse of the covariance of the centred effects is used and df is its rank.
 * Two lines or more, finite estimates, positive variances.
 */
export function waldOfEquality(effects: LineEffects): WaldTest {
  const centred = lessTheirMean(effects.estimate)
  const { statistic, df } = effects.isDiagonal
    ? waldDiagonal(centred, variancesOf(effects))
    : (waldByFactor(centred, effects) ?? waldByRank(centred, effects))
  return { statistic, df, p: df > 0 ? chiSquareUpper(statistic, df) : 1 }
}

type Statistic = Pick<WaldTest, 'statistic' | 'df'>

function waldDiagonal(centred: Float64Array, variance: Float64Array): Statistic {
  let weights = 0
  let weighted = 0
  for (let a = 0; a < centred.length; a++) {
    weights += 1 / variance[a]
    weighted += centred[a] / variance[a]
  }
  const common = weighted / weights
  let statistic = 0
  for (let a = 0; a < centred.length; a++) statistic += (centred[a] - common) ** 2 / variance[a]
  return { statistic, df: centred.length - 1 }
}

/** By the Cholesky factor of the correlation matrix; undefined where it is near singular. */
function waldByFactor(centred: Float64Array, effects: LineEffects): Statistic | undefined {
  const count = centred.length
  const standardError = variancesOf(effects).map(Math.sqrt)
  const factor = correlationOf(effects.covariance, standardError)
  if (!(choleskyInPlace(factor, count) > SMALLEST_CONDITION)) return undefined
  const effect = new Float64Array(count)
  const one = new Float64Array(count)
  for (let a = 0; a < count; a++) {
    effect[a] = centred[a] / standardError[a]
    one[a] = 1 / standardError[a]
  }
  const solved = one.slice()
  choleskySolveInPlace(factor, count, solved)
  const common = dot(effect, solved) / dot(one, solved)
  for (let a = 0; a < count; a++) effect[a] -= common * one[a]
  const solvedEffect = effect.slice()
  choleskySolveInPlace(factor, count, solvedEffect)
  return { statistic: Math.max(0, dot(effect, solvedEffect)), df: count - 1 }
}

/** By the pseudo-inverse of MΩM, M = I - 11'/L: the same for every order of the lines, and of the same rank as DΩD'. */
function waldByRank(centred: Float64Array, effects: LineEffects): Statistic {
  const count = centred.length
  const rowMean = new Float64Array(count)
  let mean = 0
  for (let a = 0; a < count; a++) {
    for (let b = 0; b < count; b++) rowMean[a] += effects.covariance[a * count + b] / count
    mean += rowMean[a] / count
  }
  const doublyCentred = new Float64Array(count * count)
  for (let a = 0; a < count; a++) {
    for (let b = 0; b < count; b++) {
      doublyCentred[a * count + b] = effects.covariance[a * count + b] - rowMean[a] - rowMean[b] + mean
    }
  }
  const { statistic, rank } = quadraticFormByRank(doublyCentred, centred)
  return { statistic, df: rank }
}

/** Ω scaled to unit diagonal. */
export function correlationOf(covariance: Float64Array, standardError: Float64Array): Float64Array {
  const count = standardError.length
  const correlation = new Float64Array(count * count)
  for (let a = 0; a < count; a++) {
    for (let b = 0; b < count; b++) {
      correlation[a * count + b] = a === b ? 1 : covariance[a * count + b] / (standardError[a] * standardError[b])
    }
  }
  return correlation
}

function lessTheirMean(values: Float64Array): Float64Array {
  let mean = 0
  for (let a = 0; a < values.length; a++) mean += values[a] / values.length
  return values.map((value) => value - mean)
}
