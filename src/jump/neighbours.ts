/**
 * Residual from the nearest neighbours on the same side.
 * Source: Abadie & Imbens 2006, Econometrica; METHODS section 4.
 * r_i = √(m/(m+1)) (y_i − mean of y over the m nearest), m = 3 and all ties at the third distance; σ̂²_i = r_i².
 * A side with fewer than three other units uses those it has; a lone unit has r = 0.
 * O(n) on sorted distances: units at one distance share their neighbours but for themselves.
 */
import type { BySide, Sample, Side } from './sample.js'

const nearest = 3

export function neighbourResidualsOf(sample: Sample): BySide<Float64Array> {
  return { untreated: neighbourResiduals(sample.untreated), treated: neighbourResiduals(sample.treated) }
}

function neighbourResiduals(side: Side): Float64Array {
  const { t, y } = side
  const n = t.length
  const residuals = new Float64Array(n)
  const { start, sum } = runsOfEqual(t, y)
  const runs = sum.length
  for (let run = 0; run < runs; run++) {
    const own = start[run + 1] - start[run]
    let count = own - 1
    let others = 0
    let left = run - 1
    let right = run + 1
    const here = t[start[run]]
    while (count < nearest && (left >= 0 || right < runs)) {
      const toLeft = left >= 0 ? here - t[start[left]] : Number.POSITIVE_INFINITY
      const toRight = right < runs ? t[start[right]] - here : Number.POSITIVE_INFINITY
      if (toLeft <= toRight) {
        others += sum[left]
        count += start[left + 1] - start[left]
        left--
      }
      if (toRight <= toLeft) {
        others += sum[right]
        count += start[right + 1] - start[right]
        right++
      }
    }
    if (count === 0) continue
    const factor = Math.sqrt(count / (count + 1))
    for (let i = start[run]; i < start[run + 1]; i++) {
      const mean = (own === 1 ? others : sum[run] - y[i] + others) / count
      residuals[i] = factor * (y[i] - mean)
    }
  }
  return residuals
}

/** Runs of equal distance: their first index (and n at the end) and the sum of y in each. */
function runsOfEqual(t: Float64Array, y: Float64Array): { start: Int32Array; sum: Float64Array } {
  const n = t.length
  const starts = new Int32Array(n + 1)
  const sums = new Float64Array(n)
  let runs = 0
  for (let i = 0; i < n; i++) {
    if (i === 0 || t[i] !== t[i - 1]) starts[runs++] = i
    sums[runs - 1] += y[i]
  }
  starts[runs] = n
  return { start: starts.subarray(0, runs + 1), sum: sums.subarray(0, runs) }
}
