/** The first stage: what lines do to take-up, shown before what they do to the outcome. */
import type { Jump, TakeUp } from '../../results.js'
import { fixed, missing, type Places, sharedPlaces, significant } from '../numbers.js'
import { inReadingOrder } from '../order.js'
import { estimatedLines, howMany, isEstimated, type OutcomeView, type View } from '../view.js'
import { type Figure, figureOf } from './figure.js'
import { labelWithCutoff } from './forest.js'
import { drawRows, type Row, type RowsLayout, rowAxis, rowScale } from './rows.js'
import { scatterFigure } from './scatter.js'

const width = 760
const barFactor = 1.96
const mostNamed = 60
const tallest = 700

/** Nothing where units are taken to get what they are assigned to. */
export function takeUpFigures(view: View, outcome: OutcomeView): Figure[] {
  const stages = stagesOf(outcome)
  const { exhibit, result, slug } = outcome
  const pooled = stageOf(result.pooled)
  const places = sharedPlaces(
    [pooled, ...stages.map(({ stage }) => stage)].map((stage) => stage?.standard_error),
    [pooled, ...stages.map(({ stage }) => stage)].map((stage) => stage?.jump),
  )
  const shown = exhibit?.takeUp
  const scatter =
    shown && pooled
      ? [
          scatterFigure(view, {
            name: `${slug}-take-up`,
            column: shown.column,
            of: `${howMany(view, estimatedLines(result).length || result.lines.length)} pooled`,
            title: titleOf(view, shown.column, pooled, places),
            jump: shown,
            exhibit: shown,
            places,
          }),
        ]
      : []
  return stages.length > 1 ? [...scatter, linesFigure(view, outcome, stages, pooled, places)] : scatter
}

interface Stage {
  readonly line: string
  readonly stage: TakeUp
}

function stageOf(jump: object): TakeUp | undefined {
  return (jump as { readonly take_up?: TakeUp }).take_up
}

function stagesOf({ result }: OutcomeView): Stage[] {
  return result.lines.flatMap((line) => {
    const stage = stageOf(line)
    return stage ? [{ line: line.line, stage }] : []
  })
}

const strengthOf = ({ f }: TakeUp) => (f === null ? 'all take up what they are assigned to' : `F = ${significant(f)}`)

function titleOf(view: View, column: string, stage: TakeUp, places: Places): string {
  const { jump } = stage
  return `${column} ${jump >= 0 ? 'rises' : 'falls'} by ${fixed(Math.abs(jump), places)} at ${view.words.theLine} (${strengthOf(stage)})`
}

function linesFigure(
  view: View,
  outcome: OutcomeView,
  stages: readonly Stage[],
  pooled: TakeUp | undefined,
  places: Places,
): Figure {
  const rowOf = (label: string, stage: TakeUp, mark: Row['mark']): Row => ({
    label,
    mark,
    estimate: {
      estimate: stage.jump,
      low: stage.jump - barFactor * stage.standard_error,
      high: stage.jump + barFactor * stage.standard_error,
    },
    says: `${fixed(stage.jump, places)} (${stage.f === null ? missing : `F ${significant(stage.f)}`})`,
  })
  const ordered = inReadingOrder(stages, ({ line }) => view.lineOf.get(line) ?? { line, label: line })
  const rows = ordered.map(({ line, stage }) => rowOf(labelWithCutoff(view, line), stage, 'line'))
  const together = pooled ? [rowOf('Pooled', pooled, 'pooled')] : []
  const named: RowsLayout = { width, labelWidth: 220, places }
  const layout = rows.length <= mostNamed ? named : { ...named, bare: Math.min(3, tallest / rows.length) }
  const weak = stages.filter(({ stage }) => stage.f !== null && stage.f < 16).length
  const { outcome: name } = outcome.result
  const withheld = outcome.result.lines.filter((line) => stageOf(line) && !isEstimated<Jump>(line as Jump)).length
  return figureOf({
    name: `${outcome.slug}-take-up-lines`,
    width,
    title: `Take-up at ${howMany(view, stages.length)}: the first stage is weak (F under 16) at ${weak === 0 ? 'none' : weak}`,
    lines: ['Corrected jump of take-up, bars ±1.96 standard errors. Right: the jump and the F of its being none.'],
    description: `Jumps of take-up at ${howMany(view, stages.length)} and pooled; ${weak} have an F under 16.`,
    caption: `The first stage of the effects on ${name}: the corrected jump of take-up at every ${view.words.line}, at the bandwidths of the outcome. Effects per unit of take-up rest on it; where F is under 16 go by the Anderson–Rubin sets.${withheld > 0 ? ` At ${howMany(view, withheld)} it is too weak for a ratio.` : ''}`,
    data: {
      columns: ['line', 'jump', 'standard_error', 'f'],
      rows: [
        ...ordered.map(({ line, stage }) => [line, stage.jump, stage.standard_error, stage.f]),
        ...(pooled ? [['pooled', pooled.jump, pooled.standard_error, pooled.f]] : []),
      ],
    },
    draw: (top) => {
      const x = rowScale([...rows, ...together], named)
      const first = drawRows(rows, x, layout, top + 14)
      const second = drawRows(together, x, named, first.end + 8)
      const axis = rowAxis(x, top + 14, second.end, 'Jump in take-up, treated minus untreated', width)
      return { marks: [...axis.marks, ...first.marks, ...second.marks], end: axis.end }
    },
  })
}
