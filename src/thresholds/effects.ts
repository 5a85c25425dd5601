/** The estimated jumps of several lines with their covariance: what comparisons and targets start from. */

export interface LineEffects {
  /** One per line, distinct. */
  readonly ids: readonly string[]
  /** By line, in outcome units. */
  readonly estimate: Float64Array
  /** L x L, row-major, symmetric: the covariance of the estimates from their influences (METHODS section 4). */
  readonly covariance: Float64Array
  /** Lines share no unit, cluster or neighbour: everything off the diagonal is zero and is not looked at. */
  readonly isDiagonal: boolean
  /** Of each line's variance, Infinity where the reference is normal; absent where not known. */
  readonly degreesOfFreedom?: Float64Array
}

/** Variance of each line's estimate: the diagonal. */
export function variancesOf(effects: LineEffects): Float64Array {
  const count = effects.ids.length
  const variance = new Float64Array(count)
  for (let a = 0; a < count; a++) variance[a] = effects.covariance[a * count + a]
  return variance
}

/** Why these effects cannot be combined at all; undefined where they can. Throws RangeError where the arrays do not fit. */
export function reasonAgainst(effects: LineEffects): string | undefined {
  const count = effects.ids.length
  if (effects.estimate.length !== count) {
    throw new RangeError(`${count} lines, ${effects.estimate.length} estimates`)
  }
  if (effects.covariance.length !== count * count) {
    throw new RangeError(`${count} lines, ${effects.covariance.length} covariances`)
  }
  if (count === 0) return 'no line has an estimate'
  for (let a = 0; a < count; a++) {
    if (!Number.isFinite(effects.estimate[a])) return `line ${effects.ids[a]} has no estimate`
    const variance = effects.covariance[a * count + a]
    if (!(variance > 0 && variance < Number.POSITIVE_INFINITY)) return `line ${effects.ids[a]} has no standard error`
  }
  return undefined
}

/** Throws RangeError unless 0 < level < 1. */
export function checkLevel(level: number): void {
  if (!(level > 0 && level < 1)) throw new RangeError(`the level must lie between 0 and 1, not ${level}`)
}
