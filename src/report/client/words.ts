/** What the panel says of an estimate. */
import { fixed, type Places, pWords, significant } from '../numbers.js'
import type { PanelData, PanelInterval } from '../whatIfData.js'
import type { Shown } from './model.js'

export function signed(value: number, places: Places): string {
  return `${value > 0 ? '+' : ''}${fixed(value, places)}`
}

export function intervalWords({ low, high }: PanelInterval, places: Places): string {
  return `${fixed(low, places)} to ${fixed(high, places)}`
}

export const excludesZero = ({ low, high }: PanelInterval) => low > 0 || high < 0

/** Text, and numbers with all their digits behind the text. */
export type Part = string | { readonly value: number; readonly text: string }

/** "−0.0457, 95% interval −0.0712 to −0.0203, p < 0.001." and whether it settles the sign, as the study's own does. */
export function answerParts(data: PanelData, shown: Shown, own: Shown | undefined, places: Places): Part[] {
  const { corrected } = shown
  const part = (value: number, text: string): Part => ({ value, text })
  return [
    part(corrected.estimate, signed(corrected.estimate, places)),
    `, ${data.levelWords} interval `,
    part(corrected.low, fixed(corrected.low, places)),
    ' to ',
    part(corrected.high, fixed(corrected.high, places)),
    ', ',
    part(corrected.p, pWords(corrected.p)),
    `. ${verdictWords(shown, own, places)}`,
  ]
}

function verdictWords(shown: Shown, own: Shown | undefined, places: Places): string {
  const excludes = excludesZero(shown.corrected)
  const verdict = excludes ? 'The interval excludes zero' : 'The interval includes zero'
  if (shown.isStudy) return `${verdict}. This is the study’s choice.`
  if (!own) return `${verdict}.`
  const before = `${signed(own.corrected.estimate, places)} (${intervalWords(own.corrected, places)})`
  const ownExcludes = excludesZero(own.corrected)
  const isTurned = excludes && ownExcludes && shown.corrected.estimate > 0 !== own.corrected.estimate > 0
  const beside = isTurned
    ? 'on the other side from the study’s own'
    : excludes === ownExcludes
      ? 'as the study’s own does'
      : `where the study’s own ${ownExcludes ? 'excludes' : 'includes'} it`
  return `${verdict}, ${beside}: ${before}.`
}

export function widthWords({ untreated, treated }: Shown['bandwidth'], unit: string): string {
  const [left, right] = [significant(untreated), significant(treated)]
  return untreated === treated ? `${left}${unit}` : `${left}${unit} untreated, ${right}${unit} treated`
}

export function detailWords(
  data: PanelData,
  shown: Shown,
  kernel: string,
  order: number,
  donut: number,
  places: Places,
): string {
  const { plain, units } = shown
  const hole = donut > 0 ? `, units within ${significant(donut)}${data.unit} left out` : ''
  const bias = shown.isStudy ? '' : ' for estimate and bias alike'
  return `Corrected estimate. Bandwidth ${widthWords(shown.bandwidth, data.unit)}${bias}; ${kernel} kernel, order ${order}${hole}; ${units.untreated} untreated and ${units.treated} treated units. Plain estimate ${signed(plain.estimate, places)} (${intervalWords(plain, places)}).`
}

export const routeWords = {
  sides: 'Made in this page from sums of each side, between bandwidths with units enough on both; no record is in it.',
  table:
    'Made by the program with the run and looked up here: clusters, fixed effects, covariates, take-up or shared units tie the two sides together, and what it would take to undo that would tell of small groups.',
  none: 'There are too few units here, or too many lines on this page, for this to be made again without telling of single units: write the bandwidth into the study and run it.',
} as const
