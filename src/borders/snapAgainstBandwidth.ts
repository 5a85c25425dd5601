/** Is the tolerance between zones small against the distances that are compared? */

/** The tolerance may be at most this share of the smallest bandwidth. */
export const largestSnapShare = 1 / 5

/**
 * Undefined where snap is at most a fifth of the smallest bandwidth; else what to say. Inside snap the border may lie
 * anywhere between the two zones' own edges, so x is only sure to within it. (A fifth: common practice, no source.)
 * Throws RangeError where snap is negative or the bandwidth is not positive.
 */
export function snapAgainstBandwidth(
  snapMetres: number,
  smallestBandwidthMetres: number,
): { readonly says: string } | undefined {
  if (!(snapMetres >= 0)) throw new RangeError(`snapMetres must be 0 or more: got ${snapMetres}`)
  if (!(smallestBandwidthMetres > 0))
    throw new RangeError(`smallestBandwidthMetres must be above 0: got ${smallestBandwidthMetres}`)
  const most = smallestBandwidthMetres * largestSnapShare
  if (snapMetres <= most) return undefined
  const shown = (metres: number) => Number(metres.toPrecision(3))
  const digits = 10 ** (Math.floor(Math.log10(most)) - 1)
  const advised = Number((Math.floor(most / digits) * digits).toPrecision(2))
  const says =
    `snap is ${shown(snapMetres)} m, more than a fifth of the smallest bandwidth (${shown(smallestBandwidthMetres)} m): ` +
    `the border is not sure to within distances that matter; set snap to ${advised} m or less, or use a wider bandwidth`
  return { says }
}
