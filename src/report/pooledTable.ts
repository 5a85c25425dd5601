/** What all lines say together, by outcome: pooled plain and corrected, the stated target, the random-effects mean. */
import type { Comparison, Jump, TakeUp } from '../results.js'
import { bandwidthHead, capital, intervalText, widthCell, widthPlaces } from './lineTable.js'
import { cell, count, fixed, missing, type Places, p, sharedPlaces, significant } from './numbers.js'
import type { TableRow, TextTable } from './tables.js'
import { estimatedLines, howMany, isEstimated, labelOf, type OutcomeView, reasonText, type View } from './view.js'

/** Places shared by the numbers that stand for all lines of an outcome. */
export function pooledPlaces(outcome: OutcomeView): Places {
  const { pooled, target } = outcome.result
  const pooledEstimate = isEstimated(pooled) ? pooled.corrected : undefined
  const targetEstimate = isEstimated(target) ? target : undefined
  return sharedPlaces(
    [pooledEstimate?.standard_error, targetEstimate?.standard_error],
    [pooledEstimate?.estimate, targetEstimate?.estimate],
  )
}

/** In words: whose average the target is. */
export function targetWords(kind: string): string {
  const known: Readonly<Record<string, string>> = {
    units: 'weighted by the units near each',
    equal: 'all weighted equally',
    precision: 'weighted by precision',
  }
  return known[kind] ?? `weighted by ${kind}`
}

/** Nine columns, four rows an outcome. */
export function pooledTable(view: View): TextTable {
  return {
    caption: `All ${view.words.lines} together`,
    columns: [
      { head: 'Outcome', isText: true },
      { head: 'Number', isText: true },
      { head: 'N untreated' },
      { head: 'N treated' },
      { head: bandwidthHead(view) },
      { head: 'Estimate' },
      { head: 'Standard error' },
      { head: `${view.words.level} interval` },
      { head: 'p' },
    ],
    rows: view.outcomes.flatMap((outcome) => outcomeRows(view, outcome)),
    notes: view.outcomes.map((outcome) => pooledNote(view, outcome)),
  }
}

function outcomeRows(view: View, outcome: OutcomeView): TableRow[] {
  const { pooled, target, comparison } = outcome.result
  const head = outcome.result.outcome
  const places = pooledPlaces(outcome)
  const rows: TableRow[] = []
  if (isEstimated<Jump & { weights: unknown }>(pooled)) {
    const shared = [
      cell(pooled.units_in_bandwidth.untreated, view.smallestCell),
      cell(pooled.units_in_bandwidth.treated, view.smallestCell),
      widthCell(pooled.bandwidth, widthPlaces([pooled])),
    ]
    if (pooled.take_up) rows.push(...firstStageRows(head, pooled.take_up, shared, places))
    for (const name of ['plain', 'corrected'] as const) {
      const estimate = pooled[name]
      const what = pooled.take_up ? `pooled per unit of take-up, ${name}` : `pooled, ${name}`
      rows.push([head, what, ...shared, ...estimateCells(estimate, places), p(estimate.p)])
    }
    if (pooled.bias_aware) rows.push(biasAwareRow(head, pooled.bias_aware, pooled.quoted, places))
  } else {
    rows.push({ head, across: `pooled: not estimated: ${reasonText(view, pooled.not_estimated)}` })
    if (pooled.take_up) rows.push(...firstStageRows(head, pooled.take_up, [missing, missing, missing], places))
  }
  const none = [missing, missing, missing]
  if (isEstimated(target)) {
    rows.push([head, `target, ${targetWords(target.kind)}`, ...none, ...estimateCells(target, places), p(target.p)])
  } else {
    rows.push({ head, across: `target: not estimated: ${reasonText(view, target.not_estimated)}` })
  }
  if (comparison) {
    rows.push([head, 'random-effects mean', ...none, ...estimateCells(comparison.random_effects, places), missing])
  }
  return rows
}

/** Take-up first, then the effect of being eligible, which needs no first stage. */
function firstStageRows(head: string, takeUp: TakeUp, shared: readonly string[], places: Places): TableRow[] {
  const { eligibility } = takeUp
  const set = takeUp.anderson_rubin.map(([low, high]) => `${end(low, '−∞', places)} to ${end(high, '∞', places)}`)
  return [
    [
      head,
      'jump in take-up',
      ...shared,
      significant(takeUp.jump),
      significant(takeUp.standard_error),
      takeUp.f === null ? 'F –' : `F ${fixed(takeUp.f, 1)}`,
      missing,
    ],
    [
      head,
      'eligibility, corrected',
      ...shared,
      ...estimateCells(eligibility.corrected, places),
      p(eligibility.corrected.p),
    ],
    { head, across: `per unit of take-up, the Anderson–Rubin set: ${set.length > 0 ? set.join(' and ') : 'empty'}` },
  ]
}

function end(value: number | null, none: string, places: Places): string {
  return value === null ? none : fixed(value, places)
}

/** At a bandwidth of its own, whose units are not counted here. */
function biasAwareRow(
  head: string,
  found: NonNullable<Jump['bias_aware']>,
  quoted: Jump['quoted'],
  places: Places,
): TableRow {
  return [
    head,
    `pooled, bias-aware (curvature up to ${significant(found.smoothness)})${quoted === 'bias-aware' ? ', quoted' : ''}`,
    missing,
    missing,
    significant(found.bandwidth.treated),
    ...estimateCells(found, places),
    missing,
  ]
}

function estimateCells(
  estimate: { readonly estimate: number; readonly standard_error: number; readonly low: number; readonly high: number },
  places: Places,
): string[] {
  return [fixed(estimate.estimate, places), fixed(estimate.standard_error, places), intervalText(estimate, places)]
}

function pooledNote(view: View, outcome: OutcomeView): string {
  const pooled = outcome.result.pooled
  const lines = howMany(view, estimatedLines(outcome.result).length)
  if (!isEstimated<Jump & { weights: unknown }>(pooled)) return `${outcome.result.outcome}: ${lines} estimated.`
  const lengths = estimatedLines(outcome.result).map((line) => view.lineOf.get(line.line)?.length_m ?? 0)
  const metres = lengths.reduce((sum, length) => sum + length, 0)
  const parts = [
    `${outcome.result.outcome}: ${lines} estimated`,
    ...(metres > 0 ? [`${significant(metres / 1000)} km of border`] : []),
    `untreated mean at ${view.words.theLine} ${fixed(pooled.at_line.untreated, pooledPlaces(outcome))}`,
    `order ${pooled.order}, ${pooled.kernel} kernel, bias bandwidth ${widthCell(pooled.bias_bandwidth, widthPlaces([pooled]))}`,
    `variance ${pooled.variance}${pooled.clusters === undefined ? '' : `, ${count(pooled.clusters)} clusters`}`,
    view.choices.fixedEffects ? `with a fixed effect for each ${view.words.line}` : 'without fixed effects',
  ]
  return `${parts.join('; ')}.${covariateWords(pooled, pooledPlaces(outcome))}`
}

function covariateWords({ covariates: found }: Jump, places: Places): string {
  if (!found) return ''
  const out = found.left_out.length > 0 ? ` (${found.left_out.join(', ')} left out: constant, or a sum of others)` : ''
  const effect =
    found.moved === undefined
      ? ''
      : ` They move the estimate by ${fixed(found.moved, places)} and make its standard error ${fixed(found.standard_error_ratio, 2)} times what it is without them.`
  return ` Covariates: ${Object.keys(found.coefficients).join(', ') || 'none'}${out}.${effect}`
}

/** How far the lines differ, one row an outcome. */
export function comparisonTable(view: View): TextTable {
  const hasWelch = view.outcomes.some(({ result }) => result.comparison?.welch)
  return {
    caption: `Do the ${view.words.lines} differ?`,
    columns: [
      { head: 'Outcome', isText: true },
      { head: capital(view.words.lines) },
      { head: 'Wald test of equal effects' },
      { head: hasWelch ? 'p (Welch’s)' : 'p' },
      { head: 'Q' },
      { head: 'I²' },
      { head: 'τ, three ways' },
      { head: 'Random-effects mean' },
      { head: `${view.words.level} prediction` },
    ],
    rows: view.outcomes.map((outcome): TableRow => {
      const { comparison, comparison_reason: reason } = outcome.result
      const head = outcome.result.outcome
      if (!comparison)
        return { head, across: `not compared: ${reasonText(view, reason ?? 'fewer than two lines have an estimate')}` }
      const places = pooledPlaces(outcome)
      return [
        head,
        count(estimatedLines(outcome.result).length),
        `${fixed(comparison.wald.statistic, 2)} on ${count(comparison.wald.df)} df`,
        `${p(comparison.wald.p)}${comparison.welch ? ` (${p(comparison.welch.p)})` : ''}`,
        fixed(comparison.q, 2),
        `${fixed(comparison.i_squared, 1)}%`,
        tauText(comparison),
        `${fixed(comparison.random_effects.estimate, places)} (${intervalText(comparison.random_effects, places)})`,
        comparison.prediction ? intervalText(comparison.prediction, places) : missing,
      ]
    }),
    notes: [
      `All on the corrected estimates. ${hasWelch ? 'Welch’s p asks the same as the Wald test and allows for standard errors estimated from few units (Welch 1951), where lines share no unit or cluster. ' : ''}Q is Cochran’s, on the degrees of freedom of the Wald test; τ is the standard deviation of true effects between lines by DerSimonian–Laird, REML and Paule–Mandel; the mean has the Knapp–Hartung interval.`,
      ...view.outcomes.flatMap((outcome) => slopeNote(view, outcome)),
      ...view.outcomes.flatMap(({ result }) =>
        result.comparison && !result.comparison.prediction && result.comparison.prediction_reason
          ? [`${result.outcome}: no prediction interval: ${result.comparison.prediction_reason}.`]
          : [],
      ),
    ],
  }
}

function slopeNote(view: View, { result }: OutcomeView): string[] {
  const slope = result.comparison?.slope
  if (!slope || 'not_estimated' in slope) return []
  const places = sharedPlaces([slope.standard_error], [slope.estimate])
  return [
    `${result.outcome}: effects change by ${fixed(slope.estimate, places)} (${view.words.level} interval ${intervalText(slope, places)}, p = ${p(slope.p)}) for each unit of ${slope.attribute}, over ${count(slope.lines)} ${view.words.lines}.`,
  ]
}

function tauText({ tau_squared: tau }: Comparison): string {
  return [tau.dl, tau.reml, tau.pm].map((squared) => significant(Math.sqrt(squared))).join(', ')
}

const contrastsOnPage = 10

/** The pairs of lines that differ most clearly; nothing where there is no pair. */
export function contrastTable(view: View, outcome: OutcomeView): TextTable | undefined {
  const comparison = outcome.result.comparison
  if (!comparison || comparison.contrasts.length === 0) return undefined
  const shown = comparison.contrasts.slice(0, contrastsOnPage)
  const places = sharedPlaces(
    shown.map((contrast) => contrast.standard_error),
    shown.map((contrast) => contrast.estimate),
  )
  return {
    caption: `${outcome.result.outcome}: pairs of ${view.words.lines} that differ most clearly`,
    columns: [
      { head: 'First', isText: true },
      { head: 'Second', isText: true },
      { head: 'Difference' },
      { head: 'Standard error' },
      { head: `Simultaneous ${view.words.level} interval` },
      { head: 'p' },
      { head: 'p, Holm' },
    ],
    rows: shown.map((contrast) => [
      labelOf(view, contrast.lines[0]),
      labelOf(view, contrast.lines[1]),
      fixed(contrast.estimate, places),
      fixed(contrast.standard_error, places),
      intervalText(contrast, places),
      p(contrast.p),
      p(contrast.p_holm),
    ]),
    notes: [
      `First minus second; ${count(shown.length)} of ${count(comparison.contrasts_of)} pairs. The Holm p and the interval allow for all ${count(comparison.contrasts_of)}.`,
    ],
  }
}
