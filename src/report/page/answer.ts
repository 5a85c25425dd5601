/** The answer in words: sentences made of the results' own numbers. */
import type { Comparison, Jump, Target } from '../../results.js'
import { intervalText } from '../lineTable.js'
import { cell, count, fixed, type Places, pWords, significant } from '../numbers.js'
import { pooledPlaces, targetWords } from '../pooledTable.js'
import {
  bundledLayers,
  estimatedLines,
  howMany,
  isEstimated,
  type OutcomeView,
  reasonText,
  type View,
  widthText,
} from '../view.js'

export interface Answer {
  /** The pooled corrected estimate as a headline, with its sign; absent where there is none. */
  readonly headline?: {
    readonly estimate: string
    readonly interval: string
    readonly p: string
    /** Where other rules change along the same border. */
    readonly bundle?: string
  }
  readonly sentences: readonly string[]
  /** Terms and values: units, bandwidth, lines, weights. */
  readonly facts: readonly (readonly [term: string, value: string])[]
}

export function answerOf(view: View, outcome: OutcomeView): Answer {
  const { pooled, target, comparison, comparison_reason: reason } = outcome.result
  const places = pooledPlaces(outcome)
  const jump = isEstimated<Jump & { weights: unknown }>(pooled) ? pooled : undefined
  return {
    ...(jump ? { headline: headlineOf(view, jump, places) } : {}),
    sentences: [
      jump
        ? pooledSentence(view, outcome, jump, places)
        : `There is no pooled estimate: ${reasonText(view, 'not_estimated' in pooled ? pooled.not_estimated : '')}.`,
      targetSentence(view, target, places),
      ...biasAwareSentence(view, jump, places),
      comparison
        ? differenceSentence(view, comparison, places)
        : `The ${view.words.lines} were not compared: ${reasonText(view, reason ?? 'fewer than two have an estimate')}.`,
    ],
    facts: factsOf(view, outcome, jump),
  }
}

/** Where it is the interval to go by. */
function quotedBiasAware(jump: Jump): Jump['bias_aware'] {
  return jump.quoted === 'bias-aware' ? jump.bias_aware : undefined
}

/** The interval to go by; the bias-aware one comes without a p-value. */
function headlineOf(view: View, jump: Jump, places: Places): NonNullable<Answer['headline']> {
  const biasAware = quotedBiasAware(jump)
  const { estimate } = biasAware ?? jump.corrected
  const sign = estimate > 0 ? '+' : ''
  const kind = biasAware ? 'bias-aware interval' : 'interval'
  return {
    estimate: `${sign}${fixed(estimate, places)}`,
    interval: `${view.words.level} ${kind} ${intervalText(biasAware ?? jump.corrected, places)}`,
    p: biasAware ? `curvature up to ${significant(biasAware.smoothness)}` : pWords(jump.corrected.p),
    ...(bundledLayers(view).length > 0 ? { bundle: 'a bundle of rules' } : {}),
  }
}

function pooledSentence(view: View, outcome: OutcomeView, jump: Jump, places: Places): string {
  const biasAware = quotedBiasAware(jump)
  const { estimate, low, high } = biasAware ?? jump.corrected
  const size = fixed(Math.abs(estimate), places)
  const way = estimate === 0 ? 'the same' : `${size} ${estimate > 0 ? 'higher' : 'lower'}`
  const lines = estimatedLines(outcome.result).length
  const start = lines === 1 ? `At the one ${view.words.line} estimated` : `Taking ${howMany(view, lines)} together`
  const includesZero = low <= 0 && high >= 0
  const verdict = includesZero
    ? `The interval includes zero, so the data do not settle whether ${outcome.result.outcome} rises or falls there.`
    : `The interval excludes zero.`
  const means = `The fitted means there are ${fixed(jump.at_line.untreated, places)} untreated and ${fixed(jump.at_line.treated, places)} treated (plain fit).`
  const source = biasAware
    ? `bias-aware estimate; ${view.words.level} interval ${intervalText(biasAware, places)}`
    : `corrected estimate; ${view.words.level} interval ${intervalText(jump.corrected, places)}, ${pWords(jump.corrected.p)}`
  const instead =
    biasAware && view.choices.interval === 'auto'
      ? ` The bias-aware interval is given because fewer than 10 distinct distances lie within the bandwidth on a side; the corrected one is ${intervalText(jump.corrected, places)}, about ${fixed(jump.corrected.estimate, places)}.`
      : ''
  return `${start}, ${outcome.result.outcome} is ${way} just inside the treated side of ${view.words.theLine} than just outside it (${source}). ${verdict} ${means}${instead}`
}

/** Below this many units the interval is known to cover a few points less than it says (test/long/honest.test.ts). */
const fewUnits = 1000

function fewWords({ untreated, treated }: Jump['units_in_bandwidth']): string {
  return untreated + treated < fewUnits
    ? ' With so few units it can’t be promised to cover as often as it says: two or three points less is possible.'
    : ''
}

function biasAwareSentence(view: View, jump: Jump | undefined, places: Places): string[] {
  const found = jump?.bias_aware
  if (!found) return []
  const from = found.smoothness_from === 'rule' ? 'by a rule of thumb from the data' : 'as the study says'
  return [
    `If the curves bend by no more than ${significant(found.smoothness)} (second derivative, ${from}), the ${view.words.level} bias-aware interval is ${intervalText(found, places)}, about ${fixed(found.estimate, places)}, at its own bandwidth.${fewWords(found.units_in_bandwidth)}`,
  ]
}

function targetSentence(view: View, target: Target, places: Places): string {
  if (!isEstimated(target)) return `The stated target has no estimate: ${reasonText(view, target.not_estimated)}.`
  return `The stated target, the average of each ${view.words.line}’s own estimate ${targetWords(target.kind)}, is ${fixed(target.estimate, places)} (${intervalText(target, places)}, ${pWords(target.p)}).${populationWords(view, target.covers)}`
}

/** Whose average a target by stated shares is, and how much of them the estimates reach. */
function populationWords(view: View, covers = 1): string {
  const population = view.results.target_population
  if (!population) return ''
  const { name, file, total, rows_passed_over: rows } = population
  const passed =
    rows === undefined
      ? ''
      : `; ${count(rows)} ${rows === 1 ? 'row' : 'rows'} there for no ${view.words.line} of the study left out`
  const reached =
    covers < 1
      ? ` The ${view.words.lines} with an estimate hold ${fixed(100 * covers, 1)}% of it, and stand for it alone.`
      : ''
  return ` Its population: ${name} of ${file}, ${significant(total)} in all${passed}.${reached}`
}

function differenceSentence(view: View, comparison: Comparison, places: Places): string {
  const { wald, welch } = comparison
  const alpha = 1 - view.choices.level
  const differ =
    (welch ?? wald).p < alpha
      ? `The ${view.words.lines} differ by more than chance alone would produce`
      : `Nothing here shows that the ${view.words.lines} differ: their estimates vary no more than chance could produce`
  const share = `${fixed(comparison.i_squared, 0)}% of the variation between estimates is beyond chance (I²)`
  const prediction = comparison.prediction
    ? ` At one more ${view.words.line} like these the effect would be expected between ${fixed(comparison.prediction.low, places)} and ${fixed(comparison.prediction.high, places)}.`
    : ''
  const waldWords = `Wald ${fixed(wald.statistic, 1)} on ${count(wald.df)} degrees of freedom, ${pWords(wald.p)}`
  const welchWords = welch
    ? `Welch’s F ${fixed(welch.statistic, 2)} on ${count(welch.df[0])} and ${count(Math.round(welch.df[1]))}, ${pWords(welch.p)}; `
    : ''
  const caution =
    welch && welch.p >= alpha && wald.p < alpha
      ? ' The Wald test takes the standard error of each as known, which with few units in each rejects too often; Welch’s does not.'
      : ''
  return `${differ} (${welchWords}${waldWords}); ${share}.${caution}${prediction}`
}

function factsOf(view: View, outcome: OutcomeView, jump: Jump | undefined): [string, string][] {
  const total = outcome.result.lines.length
  const estimated = estimatedLines(outcome.result).length
  const lines: [string, string] = [
    view.words.lines,
    estimated === total ? count(total) : `${count(estimated)} of ${count(total)} estimated`,
  ]
  if (!jump) return [lines]
  const units = jump.units_in_bandwidth
  return [
    [
      'units in bandwidth',
      `${cell(units.untreated, view.smallestCell)} untreated, ${cell(units.treated, view.smallestCell)} treated`,
    ],
    ['bandwidth', widthText(view, jump.bandwidth)],
    lines,
    ...(jump.clusters === undefined ? [] : [['clusters', count(jump.clusters)] as [string, string]]),
  ]
}
