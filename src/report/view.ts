/** One look at the input that every page, figure and table shares: look-ups and words, no numbers of its own. */
import { parse } from 'yaml'
import type {
  Exhibits,
  Jump,
  LineJump,
  LineSummary,
  NotEstimated,
  OutcomeExhibit,
  OutcomeResult,
  Results,
} from '../results.js'
import { slugs } from './escape.js'
import type { ReportInput } from './input.js'
import { significant } from './numbers.js'

export interface View {
  readonly results: Results
  readonly exhibits: Exhibits
  readonly resolvedStudy: string
  readonly choices: Choices
  readonly smallestCell: number
  readonly lineOf: ReadonlyMap<string, LineSummary>
  readonly outcomes: readonly OutcomeView[]
  readonly words: Words
}

export interface OutcomeView {
  readonly result: OutcomeResult
  readonly exhibit: OutcomeExhibit | undefined
  /** Unique part of file names and of ids in the page. */
  readonly slug: string
}

/** Choices of the resolved study that change words. */
export interface Choices {
  readonly level: number
  readonly reference: string
  /** The interval to quote. */
  readonly interval: string
  readonly bandwidth: string
  readonly order: number
  readonly kernel: string
  readonly donut: number
  readonly fixedEffects: boolean
  readonly weight: string | undefined
  readonly cluster: string | undefined
}

export interface Words {
  readonly isBorder: boolean
  /** "border piece", "cutoff" or "line". */
  readonly line: string
  readonly lines: string
  /** "the border", "the cutoff" or "the line". */
  readonly theLine: string
  /** "95%". */
  readonly level: string
  /** Title of the horizontal axis of a scatter. */
  readonly axis: string
}

export function viewOf(input: ReportInput): View {
  const { results, exhibits } = input.analysis
  const choices = choicesOf(input.resolvedStudy)
  const slug = slugs(results.outcomes.map((outcome) => outcome.outcome))
  return {
    results,
    exhibits,
    resolvedStudy: input.resolvedStudy,
    choices,
    smallestCell: input.disclosure.smallestCell,
    lineOf: new Map(results.lines.map((line) => [line.line, line])),
    outcomes: results.outcomes.map((result, index) => ({
      result,
      exhibit: exhibits.outcomes.find((exhibit) => exhibit.outcome === result.outcome),
      slug: slug[index],
    })),
    words: wordsOf(results, exhibits, choices),
  }
}

export const isEstimated = <T>(jump: T | NotEstimated): jump is T => !('not_estimated' in (jump as object))

export function estimatedLines(outcome: OutcomeResult): (Jump & { readonly line: string })[] {
  return outcome.lines.filter((jump): jump is Jump & { readonly line: string } => isEstimated<LineJump>(jump))
}

export function labelOf(view: View, line: string): string {
  return view.lineOf.get(line)?.label ?? line
}

/** "1 cutoff", "24 cutoffs". */
export function howMany(view: View, lines: number): string {
  return `${lines} ${lines === 1 ? view.words.line : view.words.lines}`
}

/** A width in x units: "820.4 m" on the ground, the bare number on a score; both sides where they differ. */
export function widthText(view: View, width: { readonly untreated: number; readonly treated: number }): string {
  const unit = view.exhibits.isBorder ? ` ${view.exhibits.xUnit}` : ''
  const [left, right] = [significant(width.untreated), significant(width.treated)]
  return width.untreated === width.treated ? `${left}${unit}` : `${left}${unit} untreated, ${right}${unit} treated`
}

/** A reason for no estimate names counts of units; those under the smallest cell are withheld like any other. */
export function reasonText(view: View, reason: string): string {
  return reason.replace(/\bonly (\d+)\b/g, (whole, digits: string) => {
    const units = Number(digits)
    return units > 0 && units < view.smallestCell ? `fewer than ${view.smallestCell}` : whole
  })
}

function choicesOf(resolvedStudy: string): Choices {
  const study = (parse(resolvedStudy) ?? {}) as Record<string, Record<string, unknown> | undefined>
  const level = study.estimation?.level
  if (!(typeof level === 'number' && level > 0 && level < 1)) {
    throw new Error('the resolved study gives no estimation.level between 0 and 1')
  }
  const name = (value: unknown) => (typeof value === 'string' ? value : undefined)
  return {
    level,
    reference: name(study.estimation?.reference) ?? 't',
    interval: name(study.estimation?.interval) ?? 'auto',
    bandwidth: ruleOf(study.estimation?.bandwidth),
    order: Number(study.estimation?.order ?? 1),
    kernel: name(study.estimation?.kernel) ?? 'triangular',
    donut: Number(study.estimation?.donut ?? 0),
    fixedEffects: study.pooling?.fixed_effects === true,
    weight: name(study.records?.weight),
    cluster: name(study.records?.cluster),
  }
}

/** The bandwidth rule, alone or under `main` beside a bias bandwidth; `fixed` where widths are given. */
function ruleOf(bandwidth: unknown): string {
  const main = typeof bandwidth === 'object' && bandwidth !== null ? (bandwidth as { main?: unknown }).main : bandwidth
  return typeof main === 'string' ? main : 'fixed'
}

function wordsOf(results: Results, exhibits: Exhibits, choices: Choices): Words {
  const isBorder = exhibits.isBorder
  const isPieces = isBorder && results.lines.some((line) => line.piece !== undefined)
  const isCutoff = !isBorder && results.lines.some((line) => line.cutoff !== undefined)
  const line = isPieces ? 'border piece' : isBorder ? 'border' : isCutoff ? 'cutoff' : 'line'
  const theLine = isBorder ? 'the border' : isCutoff ? 'the cutoff' : 'the line'
  return {
    isBorder,
    line,
    lines: `${line}s`,
    theLine,
    level: `${significant(choices.level * 100)}%`,
    axis: isBorder
      ? `Distance to the border in ${exhibits.xUnit}; treated side positive`
      : `Distance from ${theLine} in ${exhibits.xUnit}; treated side positive`,
  }
}

/** Layers of which more than a twentieth of the border in use runs along a line, with that share in percent. */
export function bundledLayers(view: View): { readonly name: string; readonly share: string }[] {
  const found = view.results.border?.what_else_changes
  return (found?.layers ?? []).flatMap((name, i) => {
    const share = found?.whole.shares[i] ?? 0
    return share > 0.05 ? [{ name, share: `${Math.round(share * 100)}%` }] : []
  })
}
