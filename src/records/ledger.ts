/** The ledger: every step from rows read to units used, with what left and why. */

export interface LedgerStep {
  readonly step: string
  readonly in: number
  readonly out: number
  /** Units that left at this step, by reason; in - out is their sum. */
  readonly reasons: Readonly<Record<string, number>>
  /** Kilometres and pairs of border left after the step, for border steps. */
  readonly km?: number
  readonly pairs?: number
}

/** A step whose sums are checked at once: a ledger that does not reconcile is a fault of the program. */
export function ledgerStep(
  step: string,
  unitsIn: number,
  reasons: ReadonlyMap<string, number> | Readonly<Record<string, number>>,
  border?: { km: number; pairs: number },
): LedgerStep {
  const entries = reasons instanceof Map ? [...reasons] : Object.entries(reasons)
  const kept = Object.fromEntries(entries.filter(([, count]) => count > 0).sort(([a], [b]) => (a < b ? -1 : 1)))
  const left = Object.values(kept).reduce((sum: number, count) => sum + (count as number), 0)
  if (left > unitsIn) throw new RangeError(`ledger step ${step}: ${left} units leave, only ${unitsIn} came in`)
  return { step, in: unitsIn, out: unitsIn - left, reasons: kept as Record<string, number>, ...border }
}
