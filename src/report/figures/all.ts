/** All figures of a report, by the part of the page that shows them. */

import { linePlaces } from '../lineTable.js'
import { pooledPlaces } from '../pooledTable.js'
import { estimatedLines, howMany, isEstimated, labelOf, type OutcomeView, type View } from '../view.js'
import { alongFigure } from './along.js'
import { balanceFigure } from './balance.js'
import { bandwidthFigure } from './bandwidth.js'
import { densityFigure } from './density.js'
import { type Figure, withMore } from './figure.js'
import { jumpFinding } from './findings.js'
import { forestFigure } from './forest.js'
import { laddersFigure } from './ladders.js'
import { mapFigure } from './map.js'
import { placeboBordersFigure, placeboLinesFigure } from './placebos.js'
import { scatterFigure } from './scatter.js'
import { slopeFigure } from './slope.js'
import { smoothnessFigure } from './smoothness.js'
import { takeUpFigures } from './takeUp.js'
import { pointsMapFigure, unitsMapFigure } from './unitsMap.js'
import { ledgerFigure, waterfallFigure } from './waterfall.js'

export interface ReportFigures {
  /** In the order of the outcomes: the effects. */
  readonly effects: readonly (readonly Figure[])[]
  /** Whether the design holds, whatever the outcome. */
  readonly shared: readonly Figure[]
  /** In the order of the outcomes: whether they hold. */
  readonly checks: readonly (readonly Figure[])[]
  /** The ground, of all outcomes. */
  readonly ground: readonly Figure[]
  /** What the rules leave of the border, and of the rows. */
  readonly waterfall: readonly Figure[]
  readonly ledger: readonly Figure[]
  /** Of single lines, in the folder alone; `leftOut`: how many more there would be. */
  readonly lines: readonly Figure[]
  readonly leftOut: number
}

const mostLineFigures = 200

export function reportFigures(view: View): ReportFigures {
  const lines = view.outcomes.flatMap((outcome) => lineFigures(view, outcome))
  return {
    effects: view.outcomes.map((outcome) => effectFigures(view, outcome)),
    checks: view.outcomes.map((outcome) => checkFigures(view, outcome)),
    ground: present([mapFigure(view), unitsMapFigure(view), pointsMapFigure(view)]),
    shared: present([densityFigure(view), balanceFigure(view)]),
    waterfall: present([waterfallFigure(view)]),
    ledger: present([ledgerFigure(view)]),
    lines: lines.slice(0, mostLineFigures).map((draw) => draw()),
    leftOut: Math.max(0, lines.length - mostLineFigures),
  }
}

/** Figures that the page shows, each with those behind it. */
export function mainFigures({ effects, ground, waterfall, shared, checks, ledger }: ReportFigures): readonly Figure[] {
  return [...effects.flat(), ...ground, ...waterfall, ...shared, ...checks.flat(), ...ledger].flatMap(withMore)
}

function present(figures: readonly (Figure | undefined)[]): Figure[] {
  return figures.filter((figure) => figure !== undefined)
}

function effectFigures(view: View, outcome: OutcomeView): Figure[] {
  return present([
    ...takeUpFigures(view, outcome),
    pooledFigure(view, outcome),
    forestFigure(view, outcome),
    slopeFigure(view, outcome),
    alongFigure(view, outcome),
  ])
}

function checkFigures(view: View, outcome: OutcomeView): Figure[] {
  return present([
    bandwidthFigure(view, outcome),
    smoothnessFigure(view, outcome),
    laddersFigure(view, outcome),
    placeboLinesFigure(view, outcome),
    placeboBordersFigure(view, outcome),
  ])
}

function pooledFigure(view: View, outcome: OutcomeView): Figure | undefined {
  const jump = outcome.result.pooled
  const exhibit = outcome.exhibit?.pooled
  if (!exhibit || !isEstimated(jump)) return undefined
  const lines = estimatedLines(outcome.result).length
  const places = pooledPlaces(outcome)
  const { outcome: column } = outcome.result
  return scatterFigure(view, {
    name: `${outcome.slug}-pooled`,
    column,
    of: lines === 1 ? `the one ${view.words.line}` : `${howMany(view, lines)} pooled`,
    title: jumpFinding(view, column, jump, places),
    jump,
    exhibit,
    places,
  })
}

/** Figures of single lines, numbered by the line's place in the study; drawn when called. */
function lineFigures(view: View, outcome: OutcomeView): (() => Figure)[] {
  const { outcome: column } = outcome.result
  const places = linePlaces(outcome)
  return outcome.result.lines.flatMap((jump, index) => {
    const exhibit = outcome.exhibit?.lines[index]
    if (!exhibit || 'not_estimated' in jump) return []
    return [
      () =>
        scatterFigure(view, {
          name: `${outcome.slug}-line-${index + 1}`,
          column,
          of: labelOf(view, jump.line),
          title: `${labelOf(view, jump.line)}: ${jumpFinding(view, column, jump, places)}`,
          jump,
          exhibit,
          places,
        }),
    ]
  })
}
