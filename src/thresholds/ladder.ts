/** A ladder: several cutoffs on one score, faced by every unit. Each unit serves only the lines on either side of it. */
import { directionOf, isTreatedAtCutoff, type TreatedSide } from './side.js'

export interface LadderEntries {
  /** Row of each entry, ascending; a unit between two steps has two entries, one beyond the last step has one. */
  readonly unit: Int32Array
  /** Step of each entry, from 0; a unit's lower step comes first. */
  readonly step: Int32Array
}

/**
 * The steps that each unit serves: the nearest step on each side of its score, so that no line reaches past the next.
 * A unit exactly on a step lies on that step's proper side, and also serves the next step on that side.
 * score: score units; units that are not finite have no entry.
 * steps: at least one, finite, strictly ascending; else RangeError.
 */
export function ladderEntries(score: Float64Array, steps: Float64Array, treated: TreatedSide): LadderEntries {
  checkSteps(steps)
  const count = score.length
  const unit = new Int32Array(2 * count)
  const step = new Int32Array(2 * count)
  /** Whether a unit on a step belongs to the interval above that step. */
  const goesUp = directionOf(treated) > 0 === isTreatedAtCutoff(treated)
  let size = 0
  for (let i = 0; i < count; i++) {
    if (!Number.isFinite(score[i])) continue
    const above = stepsBelow(steps, score[i], goesUp)
    if (above > 0) {
      unit[size] = i
      step[size++] = above - 1
    }
    if (above < steps.length) {
      unit[size] = i
      step[size++] = above
    }
  }
  return { unit: unit.slice(0, size), step: step.slice(0, size) }
}

/** How many steps lie below the score; a step equal to it counts where the unit goes up. */
function stepsBelow(steps: Float64Array, score: number, goesUp: boolean): number {
  let low = 0
  let high = steps.length
  while (low < high) {
    const middle = (low + high) >> 1
    if (steps[middle] < score || (goesUp && steps[middle] === score)) low = middle + 1
    else high = middle
  }
  return low
}

function checkSteps(steps: Float64Array): void {
  if (steps.length === 0) throw new RangeError('a ladder has no steps')
  for (let k = 0; k < steps.length; k++) {
    if (!Number.isFinite(steps[k])) throw new RangeError(`step ${k} of the ladder is ${steps[k]}`)
    if (k > 0 && !(steps[k] > steps[k - 1])) {
      throw new RangeError(`the ladder's steps must ascend: ${steps[k - 1]} comes before ${steps[k]}`)
    }
  }
}
