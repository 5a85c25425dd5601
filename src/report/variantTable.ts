/** The study and its variants side by side: the pooled estimate of each, and how far it lies from the study's own. */
import type { Jump, PooledJump, VariantResult } from '../results.js'
import { bandwidthHead, intervalCell, intervalParts, sideParts, widthCell, widthPlaces } from './lineTable.js'
import { missing, sharedPlaces } from './numbers.js'
import { fixedCell, pCell, unitsCell } from './tableCells.js'
import type { TableRow, TextTable } from './tables.js'
import { isEstimated, type OutcomeView, reasonText, type View } from './view.js'

/** Nothing where the study has no variants. */
export function variantTable(view: View, { result }: OutcomeView): TextTable | undefined {
  const { variants } = result
  if (!variants || variants.length === 0) return undefined
  const estimated = [result.pooled, ...variants.map(({ pooled }) => pooled)].flatMap((pooled) =>
    isEstimated<Jump>(pooled) ? [pooled] : [],
  )
  const places = sharedPlaces(
    estimated.map(({ corrected }) => corrected.standard_error),
    estimated.map(({ corrected }) => corrected.estimate),
  )
  const row = (head: string, pooled: PooledJump, difference: VariantResult['difference']): TableRow => {
    if (!isEstimated<Jump>(pooled)) return { head, across: `not estimated: ${reasonText(view, pooled.not_estimated)}` }
    const { corrected, units_in_bandwidth: units } = pooled
    return [
      head,
      unitsCell(units.untreated, view.smallestCell),
      unitsCell(units.treated, view.smallestCell),
      widthCell(pooled.bandwidth, widthPlaces(estimated)),
      fixedCell(corrected.estimate, places),
      intervalCell(corrected, places),
      pCell(corrected.p),
      difference ? fixedCell(difference.estimate, places) : missing,
      difference?.p === undefined ? missing : pCell(difference.p),
    ]
  }
  return {
    caption: `${result.outcome}: the study run otherwise`,
    columns: [
      { head: 'Run', isText: true },
      { head: 'N untreated' },
      { head: 'N treated' },
      { head: bandwidthHead(view), parts: sideParts },
      { head: 'Pooled, corrected' },
      { head: `${view.words.level} interval`, parts: intervalParts },
      { head: 'p' },
      { head: 'Less the study’s' },
      { head: 'p, no difference' },
    ],
    rows: [
      row('the study', result.pooled, undefined),
      ...variants.map(({ variant, pooled, difference }) => row(variant, pooled, difference)),
    ],
    notes: [differing(variants)],
  }
}

function differing(variants: readonly VariantResult[]): string {
  const tested = variants.filter(({ difference }) => difference?.p !== undefined)
  const names = tested.filter(({ difference }) => (difference?.p as number) < 0.05).map(({ variant }) => variant)
  const test = 'The last column tests whether the difference is 0, with the units that both runs share accounted for'
  if (tested.length === 0) return `${test}; no run here allows it.`
  if (names.length === 0) return `${test}: no run differs at 5%, no allowance made for their number.`
  return `${test}: ${names.join(', ')} ${names.length === 1 ? 'differs' : 'differ'} at 5%, no allowance made for their number.`
}
