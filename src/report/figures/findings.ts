/** What figures show, said in words: sentences made of the results' own numbers. */
import type { BySide, Comparison, Interval, Jump } from '../../results.js'
import { intervalText } from '../lineTable.js'
import { cell, fixed, type Places, pWords } from '../numbers.js'
import type { View } from '../view.js'

export type Point = { readonly estimate: number } & Interval

/** The effect that a picture of the outcome shows: with take-up that of eligibility; else the estimate that is quoted. */
function shownEffect(jump: Jump): Point {
  if (jump.take_up) return jump.take_up.eligibility.corrected
  return (jump.quoted === 'bias-aware' && jump.bias_aware) || jump.corrected
}

/** `95% interval 1.1 to 1.3`; bias-aware where that is quoted. */
function intervalWords(view: View, jump: Jump, places: Places): string {
  const isBiasAware = !jump.take_up && jump.quoted === 'bias-aware' && jump.bias_aware
  return `${view.words.level} ${isBiasAware ? 'bias-aware ' : ''}interval ${intervalText(shownEffect(jump), places)}`
}

/** "soil_kept jumps up by 1.22 at the cutoff (95% interval 1.11 to 1.33)", or that no clear jump is seen. */
export function jumpFinding(view: View, outcome: string, jump: Jump, places: Places): string {
  const effect = shownEffect(jump)
  const interval = intervalWords(view, jump, places)
  if (!excludesZero(effect))
    return `${outcome} shows no clear jump at ${view.words.theLine}: ${fixed(effect.estimate, places)} (${interval})`
  const way = effect.estimate > 0 ? 'up' : 'down'
  return `${outcome} jumps ${way} by ${fixed(Math.abs(effect.estimate), places)} at ${view.words.theLine} (${interval})`
}

export function excludesZero({ low, high }: Interval): boolean {
  return low > 0 || high < 0
}

/** "1,874 untreated and 1,967 treated units". */
export function unitsWords(view: View, units: BySide): string {
  return `${cell(units.untreated, view.smallestCell)} untreated and ${cell(units.treated, view.smallestCell)} treated units`
}

/** "differ by more than chance (Welch p < 0.001)": Welch's test where it was made, which few units in each line do not mislead. */
export function differenceWords(view: View, { wald, welch }: Comparison): string {
  const { p } = welch ?? wald
  const isBeyond = p < 1 - view.choices.level
  return `${isBeyond ? 'differ by more than chance' : 'differ by no more than chance'} (${welch ? 'Welch' : 'Wald'} ${pWords(p)})`
}
