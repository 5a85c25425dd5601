/** Are the residuals near a line, or near the pooled line, alike where units are neighbours? */
import { fittedAt, type JumpFit, pickNumbers, type Sample } from '../jump/index.js'
import { type MoranOutcome, moran, type Neighbourhood } from './moran.js'

/** Residuals of the order-p fits, of every entry of positive weight within the bandwidth, untreated side first. */
export interface NearLine {
  /** Rows of the table. */
  readonly unit: Int32Array
  readonly residual: Float64Array
}

/** The sample is the one estimated on: pooled with fixed effects, the one freed of them. */
export function residualsNearLine(sample: Sample, { fits, unitsInBandwidth }: JumpFit): NearLine {
  const count = unitsInBandwidth.untreated + unitsInBandwidth.treated
  const unit = new Int32Array(count)
  const residual = new Float64Array(count)
  let filled = 0
  for (const name of ['untreated', 'treated'] as const) {
    const side = sample[name]
    for (let i = 0; i < unitsInBandwidth[name]; i++) {
      unit[filled] = side.unit[i]
      residual[filled++] = side.y[i] - fittedAt(fits[name], side.t[i])
    }
  }
  return { unit, residual }
}

/** Moran's I of those residuals. lon, lat: degrees by row of the table; throws RangeError where one near the line is missing. */
export function moranNearLine(
  sample: Sample,
  jump: JumpFit,
  lonDegrees: Float64Array,
  latDegrees: Float64Array,
  neighbourhood: Neighbourhood,
): MoranOutcome {
  const { unit, residual } = residualsNearLine(sample, jump)
  return moran(residual, pickNumbers(lonDegrees, unit), pickNumbers(latDegrees, unit), neighbourhood)
}
