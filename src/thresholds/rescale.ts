/** `rescale: spread`: distances in standard deviations of the score among the units of the line. */
import { standardDeviation } from '../math/index.js'

/**
 * The standard deviation (n - 1) of the score among the entries of each line; NaN where it is zero or undefined.
 * Scores of a line are summed in ascending order, so that the order of rows changes no digit.
 * score: by entry, score units; line: by entry, index below lineCount.
 */
export function spreadByLine(score: Float64Array, line: Int32Array, lineCount: number): Float64Array {
  const start = new Int32Array(lineCount + 1)
  for (let e = 0; e < line.length; e++) start[line[e] + 1]++
  for (let k = 0; k < lineCount; k++) start[k + 1] += start[k]
  const next = start.slice(0, lineCount)
  const sorted = new Float64Array(score.length)
  for (let e = 0; e < line.length; e++) sorted[next[line[e]]++] = score[e]
  const spread = new Float64Array(lineCount)
  for (let k = 0; k < lineCount; k++) {
    const ofLine = sorted.subarray(start[k], start[k + 1]).sort()
    const hasSpread = ofLine.length > 1 && ofLine[0] < ofLine[ofLine.length - 1]
    const deviation = hasSpread ? standardDeviation(ofLine) : Number.NaN
    spread[k] = deviation > 0 && Number.isFinite(deviation) ? deviation : Number.NaN
  }
  return spread
}
