/** Every line's estimate as rows, for a paper and for the page. */
import type { Jump } from '../results.js'
import { fixed, missing, type Places, sharedPlaces } from './numbers.js'
import { type Cell, countCell, fixedCell, pCell, percentCell, severalCell, unitsCell, wholeCell } from './tableCells.js'
import type { TableRow, TextTable } from './tables.js'
import { estimatedLines, howMany, isEstimated, labelOf, type OutcomeView, reasonText, type View } from './view.js'

/** Places shared by all estimates of an outcome's lines. */
export function linePlaces(outcome: OutcomeView): Places {
  const lines = estimatedLines(outcome.result)
  return sharedPlaces(
    lines.map((line) => line.corrected.standard_error),
    lines.map((line) => line.corrected.estimate),
  )
}

export function intervalText(interval: { readonly low: number; readonly high: number }, places: Places): string {
  if (!Number.isFinite(interval.low) && !Number.isFinite(interval.high)) return missing
  return `${fixed(interval.low, places)} to ${fixed(interval.high, places)}`
}

/** The same, with both ends in full; its column has the parts `intervalParts`. */
export function intervalCell(interval: { readonly low: number; readonly high: number }, places: Places): Cell {
  return severalCell(intervalText(interval, places), [
    fixedCell(interval.low, places),
    fixedCell(interval.high, places),
  ])
}

export const intervalParts = ['low', 'high'] as const

/** Places that the bandwidths of a column share. */
export function widthPlaces(jumps: readonly Jump[]): Places {
  return sharedPlaces(
    [],
    jumps.flatMap((jump) => [jump.bandwidth.untreated, jump.bandwidth.treated]),
  )
}

/** One number, or both sides' where they differ. */
export function widthWords(width: Jump['bandwidth'], places: Places): string {
  const [left, right] = [fixed(width.untreated, places), fixed(width.treated, places)]
  return width.untreated === width.treated ? left : `${left} / ${right}`
}

/** The same, with both sides in full; its column has the parts `sideParts`. */
export function widthCell(width: Jump['bandwidth'], places: Places): Cell {
  const sides = [fixedCell(width.untreated, places), fixedCell(width.treated, places)]
  return severalCell(widthWords(width, places), sides)
}

export const sideParts = ['untreated', 'treated'] as const

/** The table for a paper: what each line rests on, then what it says; files break it after the first half. */
export function paperLineTable(view: View, outcome: OutcomeView): TextTable {
  const places = linePlaces(outcome)
  const estimated = estimatedLines(outcome.result)
  const widths = widthPlaces(estimated)
  const hasClusters = estimated.some(({ clusters }) => clusters !== undefined)
  const { pooled, target } = outcome.result
  const pooledShare = isEstimated(pooled) ? pooled.weights : {}
  const targetShare = isEstimated(target) ? target.weights : {}
  return {
    caption: `${outcome.result.outcome}: jump at each ${view.words.line}`,
    columns: [
      { head: capital(view.words.line), isText: true },
      { head: view.words.isBorder ? 'Length, km' : 'Cutoff at' },
      { head: 'N untreated' },
      { head: 'N treated' },
      { head: bandwidthHead(view), parts: sideParts },
      ...(hasClusters ? [{ head: 'Clusters' }] : []),
      { head: 'Pooled weight' },
      { head: 'Target weight' },
      { head: 'Untreated mean' },
      { head: 'Estimate' },
      { head: 'Standard error' },
      { head: `${view.words.level} interval`, parts: intervalParts },
      { head: 'p' },
    ],
    rows: outcome.result.lines.map((line): TableRow => {
      const head = labelOf(view, line.line)
      if (!isEstimated<Jump>(line)) return { head, across: notEstimated(view, line.not_estimated) }
      const { length_m: metres, cutoff } = view.lineOf.get(line.line) ?? {}
      return [
        head,
        view.words.isBorder ? fixedCell(metres === undefined ? undefined : metres / 1000, 3) : wholeCell(cutoff),
        ...unitCells(view, line),
        widthCell(line.bandwidth, widths),
        ...(hasClusters ? [line.clusters === undefined ? missing : countCell(line.clusters)] : []),
        percentCell(pooledShare[line.line]),
        percentCell(targetShare[line.line]),
        fixedCell(line.at_line.untreated, places),
        fixedCell(line.corrected.estimate, places),
        fixedCell(line.corrected.standard_error, places),
        intervalCell(line.corrected, places),
        pCell(line.corrected.p),
      ]
    }),
    notes: lineNotes(view, outcome),
  }
}

const rowsOnPage = 500

/** The table for the page: the paper's columns and the plain estimate, the weight and the shrunken effect. */
export function pageLineTable(view: View, outcome: OutcomeView): TextTable {
  const places = linePlaces(outcome)
  const widths = widthPlaces(estimatedLines(outcome.result))
  const pooled = outcome.result.pooled
  const weights = isEstimated(pooled) ? pooled.weights : {}
  const shrunken = new Map(outcome.result.comparison?.shrunken.map((effect) => [effect.line, effect]))
  const hidden = outcome.result.lines.length - rowsOnPage
  return {
    caption: `${outcome.result.outcome}: jump at each ${view.words.line}`,
    columns: [
      { head: capital(view.words.line), isText: true },
      { head: view.words.isBorder ? 'Length, m' : 'Cutoff at' },
      { head: 'N untreated' },
      { head: 'N treated' },
      { head: bandwidthHead(view), parts: sideParts },
      { head: 'Pooled weight' },
      { head: 'Untreated mean' },
      { head: 'Plain' },
      { head: 'Corrected' },
      { head: 'Standard error' },
      { head: `${view.words.level} interval`, parts: intervalParts },
      { head: 'p' },
      { head: 'Shrunken' },
    ],
    rows: outcome.result.lines.slice(0, rowsOnPage).map((line): TableRow => {
      const head = labelOf(view, line.line)
      if (!isEstimated<Jump>(line)) return { head, across: notEstimated(view, line.not_estimated) }
      const summary = view.lineOf.get(line.line)
      const place = view.words.isBorder ? fixedCell(summary?.length_m, 0) : wholeCell(summary?.cutoff)
      return [
        head,
        place,
        ...unitCells(view, line),
        widthCell(line.bandwidth, widths),
        percentCell(weights[line.line]),
        fixedCell(line.at_line.untreated, places),
        fixedCell(line.plain.estimate, places),
        fixedCell(line.corrected.estimate, places),
        fixedCell(line.corrected.standard_error, places),
        intervalCell(line.corrected, places),
        pCell(line.corrected.p),
        fixedCell(shrunken.get(line.line)?.estimate, places),
      ]
    }),
    notes: [
      ...lineNotes(view, outcome),
      ...(hidden > 0 ? [`${hidden} more are in lines.csv, which has every ${view.words.line}.`] : []),
    ],
  }
}

function lineNotes(view: View, outcome: OutcomeView): string[] {
  const first = estimatedLines(outcome.result)[0]
  const fit = first
    ? ` Local polynomial of order ${first.order}, ${first.kernel} kernel, variance ${first.variance}.`
    : ''
  return [
    `N counts units within the bandwidth; the untreated mean is the plain fit at ${view.words.theLine}. Estimate, standard error, interval and p are corrected (bias-corrected, with the robust standard error).${fit} Lines estimated: ${estimatedLines(outcome.result).length} of ${howMany(view, outcome.result.lines.length)}.`,
    ...quotedNotes(view, outcome),
    ...(view.smallestCell > 1 ? [`Counts under ${view.smallestCell} are withheld.`] : []),
  ]
}

/** Lines where another interval than the one in the table is to go by. */
function quotedNotes(view: View, outcome: OutcomeView): string[] {
  const coarse = estimatedLines(outcome.result).filter((line) => line.quoted_because !== undefined)
  if (coarse.length === 0) return []
  return [
    `At ${howMany(view, coarse.length)} fewer than 10 distinct distances lie within the bandwidth on a side: go by the bias-aware interval there, which lines.csv has.`,
  ]
}

function unitCells(view: View, jump: Jump): Cell[] {
  const units = jump.units_in_bandwidth
  return [unitsCell(units.untreated, view.smallestCell), unitsCell(units.treated, view.smallestCell)]
}

export function bandwidthHead(view: View): string {
  return view.exhibits.isBorder ? `Bandwidth, ${view.exhibits.xUnit}` : 'Bandwidth'
}

function notEstimated(view: View, reason: string): string {
  return `not estimated: ${reasonText(view, reason)}`
}

export function capital(text: string): string {
  return text.charAt(0).toUpperCase() + text.slice(1)
}
