/** The panel in which a reader changes the bandwidth: hidden until its script runs, with the numbers that this works on. */
import type { BySide, Estimate, Jump, NotEstimated, WhatIfSubject } from '../../results.js'
import { escapeHtml } from '../escape.js'
import { cell } from '../numbers.js'
import { pooledPlaces } from '../pooledTable.js'
import { isEstimated, labelOf, type OutcomeView, type View } from '../view.js'
import type { PanelData, PanelEstimate, PanelInterval, PanelOutcome, PanelSubject } from '../whatIfData.js'

/** Undefined where nothing can be re-estimated. */
export function whatIfHtml(view: View): string | undefined {
  const hasAny = view.outcomes.some(({ exhibit }) => exhibit?.whatIf?.pooled || exhibit?.whatIf?.lines.some(Boolean))
  if (!hasAny) return undefined
  const json = JSON.stringify(panelData(view)).replace(/</g, '\\u003c')
  return `<p>Move the bandwidth, or change the kernel, the order or the hole at ${escapeHtml(view.words.theLine)}: the estimate is made again here, with both bandwidths equal to the one you choose, and is what <code>scarp run</code> gives with that as <code>estimation.bandwidth</code>. Looking around is not a test: the study’s choice was made by its rule, before anyone saw where the answer is largest.</p>
<div id="what-if-panel"></div>
<script type="application/json" id="what-if-data">${json}</script>`
}

function panelData(view: View): PanelData {
  const { words, choices, exhibits, results } = view
  const isAlone = results.lines.length === 1
  return {
    level: choices.level,
    reference: choices.reference === 'normal' ? 'normal' : 't',
    levelWords: words.level,
    kernel: choices.kernel,
    order: choices.order,
    donut: choices.donut,
    unit: exhibits.isBorder ? ` ${exhibits.xUnit}` : '',
    axis: words.axis,
    xUnit: exhibits.xUnit,
    line: words.line,
    lines: words.lines,
    all: isAlone ? [] : results.lines.map(({ line }) => ({ line, label: labelOf(view, line) })),
    outcomes: view.outcomes.map((outcome) => outcomeData(view, outcome, isAlone)),
  }
}

function outcomeData(view: View, outcome: OutcomeView, isAlone: boolean): PanelOutcome {
  const { result, exhibit } = outcome
  const { pooled } = result
  const again = exhibit?.whatIf
  const subject = (jump: Jump | NotEstimated, made: WhatIfSubject | null | undefined): PanelSubject => ({
    ...(isEstimated<Jump>(jump) ? { own: ownOf(view, jump) } : {}),
    ...(made ? { again: made } : {}),
  })
  return {
    outcome: result.outcome,
    places: pooledPlaces(outcome),
    pooled: subject(pooled, again?.pooled),
    lines: isAlone ? [] : result.lines.map((jump, i) => subject(jump, again?.lines[i])),
  }
}

function ownOf(view: View, { bandwidth, units_in_bandwidth: units, plain, corrected }: Jump): PanelEstimate {
  const interval = ({ estimate, low, high, p }: Estimate): PanelInterval => ({ estimate, low, high, p })
  return {
    bandwidth,
    units: bySide(units, (count) => cell(count, view.smallestCell)),
    plain: interval(plain),
    corrected: interval(corrected),
  }
}

function bySide<T, U>({ untreated, treated }: BySide<T>, change: (value: T) => U): BySide<U> {
  return { untreated: change(untreated), treated: change(treated) }
}
