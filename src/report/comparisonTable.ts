/** How far lines differ from one another: all together, and pair by pair. */
import type { Comparison } from '../results.js'
import { capital, intervalCell, intervalParts, intervalText } from './lineTable.js'
import { count, fixed, missing, p, sharedPlaces, significant } from './numbers.js'
import { pooledPlaces } from './pooledTable.js'
import { type Cell, countCell, fixedCell, numberCell, pCell, severalCell, significantCell } from './tableCells.js'
import type { TableRow, TextTable } from './tables.js'
import { estimatedLines, labelOf, type OutcomeView, reasonText, type View } from './view.js'

/** How far the lines differ, one row an outcome. */
export function comparisonTable(view: View): TextTable {
  const hasWelch = view.outcomes.some(({ result }) => result.comparison?.welch)
  return {
    caption: `Do the ${view.words.lines} differ?`,
    columns: [
      { head: 'Outcome', isText: true },
      { head: capital(view.words.lines) },
      { head: 'Wald test of equal effects', parts: ['statistic', 'df'] },
      hasWelch ? { head: 'p (Welch’s)', parts: ['Wald', 'Welch'] } : { head: 'p' },
      { head: 'Q' },
      { head: 'I²' },
      { head: 'τ, three ways', parts: ['DerSimonian–Laird', 'REML', 'Paule–Mandel'] },
      { head: 'Random-effects mean', parts: ['estimate', ...intervalParts] },
      { head: `${view.words.level} prediction`, parts: intervalParts },
    ],
    rows: view.outcomes.map((outcome): TableRow => {
      const { comparison, comparison_reason: reason } = outcome.result
      const head = outcome.result.outcome
      if (!comparison)
        return { head, across: `not compared: ${reasonText(view, reason ?? 'fewer than two lines have an estimate')}` }
      const places = pooledPlaces(outcome)
      const { wald, welch, random_effects: mean, prediction } = comparison
      return [
        head,
        countCell(estimatedLines(outcome.result).length),
        severalCell(`${fixed(wald.statistic, 2)} on ${count(wald.df)} df`, [
          fixedCell(wald.statistic, 2),
          countCell(wald.df),
        ]),
        welch ? severalCell(`${p(wald.p)} (${p(welch.p)})`, [pCell(wald.p), pCell(welch.p)]) : pCell(wald.p),
        fixedCell(comparison.q, 2),
        numberCell(comparison.i_squared / 100, `${fixed(comparison.i_squared, 1)}%`),
        tauCell(comparison),
        severalCell(`${fixed(mean.estimate, places)} (${intervalText(mean, places)})`, [
          fixedCell(mean.estimate, places),
          intervalCell(mean, places),
        ]),
        prediction ? intervalCell(prediction, places) : missing,
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

function tauCell({ tau_squared: tau }: Comparison): Cell {
  const three = [tau.dl, tau.reml, tau.pm].map(Math.sqrt)
  return severalCell(three.map(significant).join(', '), three.map(significantCell))
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
      { head: `Simultaneous ${view.words.level} interval`, parts: intervalParts },
      { head: 'p' },
      { head: 'p, Holm' },
    ],
    rows: shown.map((contrast) => [
      labelOf(view, contrast.lines[0]),
      labelOf(view, contrast.lines[1]),
      fixedCell(contrast.estimate, places),
      fixedCell(contrast.standard_error, places),
      intervalCell(contrast, places),
      pCell(contrast.p),
      pCell(contrast.p_holm),
    ]),
    notes: [
      `First minus second; ${count(shown.length)} of ${count(comparison.contrasts_of)} pairs. The Holm p and the interval allow for all ${count(comparison.contrasts_of)}.`,
    ],
  }
}
