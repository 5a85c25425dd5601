/** What all lines say together, by outcome: pooled plain and corrected, the stated target, the random-effects mean. */
import type { Jump, TakeUp } from '../results.js'
import {
  bandwidthHead,
  capital,
  intervalCell,
  intervalParts,
  sideParts,
  widthCell,
  widthPlaces,
  widthWords,
} from './lineTable.js'
import { count, fixed, missing, type Places, sharedPlaces, significant } from './numbers.js'
import {
  type Cell,
  countCell,
  fixedCell,
  pCell,
  percentCell,
  severalCell,
  significantCell,
  unitsCell,
} from './tableCells.js'
import { type TableRow, type TextTable, withColumns } from './tables.js'
import { estimatedLines, howMany, isEstimated, type OutcomeView, reasonText, type View } from './view.js'

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

type Shared = readonly [lines: Cell, km: Cell, untreated: Cell, treated: Cell, bandwidth: Cell, clusters: Cell]

/** What the numbers rest on, then the numbers; files break it between. Up to seven rows an outcome. */
export function paperPooledTable(view: View): TextTable {
  const hasClusters = view.outcomes.some(
    ({ result: { pooled } }) => isEstimated<Jump>(pooled) && pooled.clusters !== undefined,
  )
  const left = new Set<number>([...(view.words.isBorder ? [] : [at.km]), ...(hasClusters ? [] : [at.clusters])])
  return withColumns(wholePooledTable(view), (column) => !left.has(column))
}

/** The same in nine columns, for the page, whose notes say what is left out. */
export function pooledTable(view: View): TextTable {
  const left = new Set<number>(Object.values(at))
  return withColumns(wholePooledTable(view), (column) => !left.has(column))
}

/** Columns that not every table of pooled numbers has. */
const at = { lines: 2, km: 3, clusters: 7, weight: 8, mean: 9 } as const

function wholePooledTable(view: View): TextTable {
  return {
    caption: `All ${view.words.lines} together`,
    columns: [
      { head: 'Outcome', isText: true },
      { head: 'Number', isText: true },
      { head: capital(view.words.lines) },
      { head: 'Border, km' },
      { head: 'N untreated' },
      { head: 'N treated' },
      { head: bandwidthHead(view), parts: sideParts },
      { head: 'Clusters' },
      { head: 'Largest weight' },
      { head: 'Untreated mean' },
      { head: 'Estimate' },
      { head: 'Standard error' },
      { head: `${view.words.level} interval`, parts: intervalParts },
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
  const lines = countCell(estimatedLines(outcome.result).length)
  const km = kmCell(view, outcome)
  const none: Shared = [lines, km, missing, missing, missing, missing]
  const rows: TableRow[] = []
  if (isEstimated(pooled)) {
    const shared: Shared = [
      lines,
      km,
      unitsCell(pooled.units_in_bandwidth.untreated, view.smallestCell),
      unitsCell(pooled.units_in_bandwidth.treated, view.smallestCell),
      widthCell(pooled.bandwidth, widthPlaces([pooled])),
      pooled.clusters === undefined ? missing : countCell(pooled.clusters),
    ]
    const weight = largest(pooled.weights)
    const mean = fixedCell(pooled.at_line.untreated, places)
    if (pooled.take_up) rows.push(...firstStageRows(head, pooled.take_up, [...shared, weight, missing], places))
    for (const name of ['plain', 'corrected'] as const) {
      const estimate = pooled[name]
      const what = pooled.take_up ? `pooled per unit of take-up, ${name}` : `pooled, ${name}`
      rows.push([head, what, ...shared, weight, mean, ...estimateCells(estimate, places), pCell(estimate.p)])
    }
    if (pooled.bias_aware) rows.push(biasAwareRow(head, pooled.bias_aware, pooled.quoted, { lines, km, places }))
  } else {
    rows.push({ head, across: `pooled: not estimated: ${reasonText(view, pooled.not_estimated)}` })
    if (pooled.take_up) rows.push(...firstStageRows(head, pooled.take_up, [...none, missing, missing], places))
  }
  if (isEstimated(target)) {
    const what = `target, ${targetWords(target.kind)}`
    const cells = [largest(target.weights), missing, ...estimateCells(target, places), pCell(target.p)]
    rows.push([head, what, ...none, ...cells])
  } else {
    rows.push({ head, across: `target: not estimated: ${reasonText(view, target.not_estimated)}` })
  }
  if (comparison) {
    const mean = [...estimateCells(comparison.random_effects, places), missing]
    rows.push([head, 'random-effects mean', ...none, missing, missing, ...mean])
  }
  return rows
}

type Shares = Readonly<Record<string, number>>

/** The part of the line that counts most. */
function largest(weights: Shares): Cell {
  return percentCell(Object.values(weights).reduce((most, share) => Math.max(most, share), 0))
}

/** Border along the lines that have an estimate. */
function kmCell(view: View, outcome: OutcomeView): Cell {
  const metres = estimatedMetres(view, outcome)
  return metres > 0 ? significantCell(metres / 1000) : missing
}

function estimatedMetres(view: View, { result }: OutcomeView): number {
  return estimatedLines(result).reduce((sum, { line }) => sum + (view.lineOf.get(line)?.length_m ?? 0), 0)
}

/** Take-up first, then the effect of being eligible, which needs no first stage. `shared`: all cells before the estimate. */
function firstStageRows(head: string, takeUp: TakeUp, shared: readonly Cell[], places: Places): TableRow[] {
  const { eligibility } = takeUp
  const set = takeUp.anderson_rubin.map(([low, high]) => `${end(low, '−∞', places)} to ${end(high, '∞', places)}`)
  return [
    [
      head,
      'jump in take-up',
      ...shared,
      significantCell(takeUp.jump),
      significantCell(takeUp.standard_error),
      takeUp.f === null ? 'F –' : `F ${fixed(takeUp.f, 1)}`,
      missing,
    ],
    [
      head,
      'eligibility, corrected',
      ...shared,
      ...estimateCells(eligibility.corrected, places),
      pCell(eligibility.corrected.p),
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
  { lines, km, places }: { readonly lines: Cell; readonly km: Cell; readonly places: Places },
): TableRow {
  const { untreated, treated } = found.bandwidth
  return [
    head,
    `pooled, bias-aware (curvature up to ${significant(found.smoothness)})${quoted === 'bias-aware' ? ', quoted' : ''}`,
    lines,
    km,
    missing,
    missing,
    severalCell(significant(treated), [significantCell(untreated), significantCell(treated)]),
    missing,
    missing,
    missing,
    ...estimateCells(found, places),
    missing,
  ]
}

function estimateCells(
  estimate: { readonly estimate: number; readonly standard_error: number; readonly low: number; readonly high: number },
  places: Places,
): Cell[] {
  return [
    fixedCell(estimate.estimate, places),
    fixedCell(estimate.standard_error, places),
    intervalCell(estimate, places),
  ]
}

function pooledNote(view: View, outcome: OutcomeView): string {
  const pooled = outcome.result.pooled
  const lines = howMany(view, estimatedLines(outcome.result).length)
  if (!isEstimated<Jump & { weights: unknown }>(pooled)) return `${outcome.result.outcome}: ${lines} estimated.`
  const metres = estimatedMetres(view, outcome)
  const parts = [
    `${outcome.result.outcome}: ${lines} estimated`,
    ...(metres > 0 ? [`${significant(metres / 1000)} km of border`] : []),
    `untreated mean at ${view.words.theLine} ${fixed(pooled.at_line.untreated, pooledPlaces(outcome))}`,
    `order ${pooled.order}, ${pooled.kernel} kernel, bias bandwidth ${widthWords(pooled.bias_bandwidth, widthPlaces([pooled]))}`,
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
