/** A passport for every line: where it is, what else changes there, who is near it, what was estimated and what its checks say. */
import type { CheckResult, Jump, LineSummary } from '../../results.js'
import { escapeHtml } from '../escape.js'
import { capital, intervalText, linePlaces, widthPlaces, widthWords } from '../lineTable.js'
import { cell, count, fixed, missing, p, percent, significant, wholeNumber } from '../numbers.js'
import { isEstimated, type OutcomeView, reasonText, type View } from '../view.js'
import { type Ground, groundOf, pieceMap, smallScatter } from './drawings.js'

/** With more lines the page has the tables alone. */
const mostPassports = 1000
/** Pictures of more lines would make the page heavy; their figures are in the folder. */
const mostPictures = 250

/** In the order of the study, closed; each can be linked to as #line-NUMBER. Empty with one line, whose figures are the page. */
export function passportsHtml(view: View): string {
  const { lines } = view.results
  if (lines.length < 2) return ''
  if (lines.length > mostPassports)
    return `<p class="note">${count(lines.length)} ${view.words.lines}: their numbers are in lines.csv.</p>`
  const ground = lines.length <= mostPictures ? groundOf(view.exhibits.map) : undefined
  return `${ground?.shared ?? ''}<div class="passports" data-passports>
${lines.map((line, index) => passportHtml(view, line, index, ground)).join('\n')}
</div>`
}

function passportHtml(view: View, line: LineSummary, index: number, ground: Ground | undefined): string {
  const checks = checksOf(view, line)
  const facts = factsOf(view, line)
    .map(([term, value]) => `<div><dt>${escapeHtml(term)}</dt><dd>${escapeHtml(value)}</dd></div>`)
    .join('')
  const pictures = picturesOf(view, line, index, ground)
  return `<details class="passport" id="line-${index + 1}"${sortKeys(view, line, index, checks)}>
<summary><span class="name">${escapeHtml(line.label)}</span> <span class="gist">${escapeHtml(gistOf(view, index))}</span></summary>
<div class="inside"><dl class="facts">${facts}</dl>${pictures}
${numbersHtml(view, line, index)}
${balanceHtml(line)}
${checks.length === 0 ? `<p class="note">No check speaks of this ${view.words.line} alone.</p>` : checksHtml(checks)}
<p class="note"><a href="#line-${index + 1}">Link to this ${view.words.line}</a></p></div>
</details>`
}

/** What a script sorts and filters by: numbers as they are, nothing where there is none. */
function sortKeys(view: View, { units }: LineSummary, index: number, checks: readonly CheckResult[]): string {
  const [outcome] = view.outcomes
  const jump = outcome?.result.lines[index]
  const made = jump && isEstimated<Jump>(jump) ? jump.corrected : undefined
  const isOpen = Math.min(units.untreated, units.treated) >= view.smallestCell
  const keys = {
    place: index + 1,
    units: isOpen ? units.untreated + units.treated : undefined,
    estimate: made?.estimate,
    error: made?.standard_error,
    p: made?.p,
    doubts: checks.filter(({ verdict }) => verdict === 'doubt' || verdict === 'fail').length,
  }
  return Object.entries(keys)
    .map(([key, value]) => (value === undefined || !Number.isFinite(value) ? '' : ` data-${key}="${value}"`))
    .join('')
}

/** The first outcome's estimate in a line. */
function gistOf(view: View, index: number): string {
  const [outcome] = view.outcomes
  const jump = outcome.result.lines[index]
  if (!isEstimated<Jump>(jump)) return 'not estimated'
  const places = linePlaces(outcome)
  return `${outcome.result.outcome} ${fixed(jump.corrected.estimate, places)} (${intervalText(jump.corrected, places)})`
}

function factsOf(view: View, line: LineSummary): [string, string][] {
  const { cutoff, zones, length_m: metres, straightness, largest_turn: turn, dose, units } = line
  const found = view.results.border?.what_else_changes
  const pair = zones && found?.pairs.find((one) => one.zones.join('|') === zones.join('|'))
  const what = (found?.layers ?? []).map((layer, i) => `${layer} ${percent(pair?.shares[i] ?? undefined)}`)
  return [
    ...(cutoff === undefined ? [] : [['cutoff', wholeNumber(cutoff)] as [string, string]]),
    ...(zones ? [['untreated and treated zone', zones.join(' | ')] as [string, string]] : []),
    ...(metres === undefined ? [] : [['length', `${fixed(metres / 1000, 2)} km`] as [string, string]]),
    ...(straightness === undefined ? [] : [['straightness', fixed(straightness, 2)] as [string, string]]),
    ...(turn === undefined ? [] : [['largest turn', `${fixed(turn, 0)}°`] as [string, string]]),
    ...(dose === undefined ? [] : [['difference in dose', significant(dose)] as [string, string]]),
    ...(found ? [['what else changes along this pair', what.join(', ')] as [string, string]] : []),
    [
      'units placed',
      `${cell(units.untreated, view.smallestCell)} untreated, ${cell(units.treated, view.smallestCell)} treated`,
    ],
  ]
}

function picturesOf(view: View, line: LineSummary, index: number, ground: Ground | undefined): string {
  if (view.results.lines.length > mostPictures) return ''
  const piece = view.exhibits.map?.pieces.find((one) => one.line === line.line)
  const map = ground && piece ? [pieceMap(ground, piece, line.label)] : []
  const plots = view.outcomes.slice(0, 2).flatMap(({ result, exhibit }) => {
    const drawn = exhibit?.lines[index]
    const label = `Binned means of ${result.outcome} at ${line.label}: untreated hollow on the left, treated filled on the right`
    const svg = drawn ? smallScatter(drawn, view.smallestCell, label) : ''
    return svg === ''
      ? []
      : [
          `<figure>${svg}<figcaption>${escapeHtml(result.outcome)}, bin means ±1.96 standard errors</figcaption></figure>`,
        ]
  })
  const all = [...map.map((svg) => `<figure>${svg}<figcaption>where it lies</figcaption></figure>`), ...plots]
  return all.length === 0 ? '' : `<div class="pictures">${all.join('')}</div>`
}

const heads = [
  'Outcome',
  'N untreated',
  'N treated',
  'Bandwidth',
  'Untreated mean',
  'Plain',
  'Corrected',
  'Interval',
  'p',
  'Bias-aware',
  'Shrunken',
  'Pooled weight',
]

function numbersHtml(view: View, line: LineSummary, index: number): string {
  const rows = view.outcomes.map((outcome) => rowOf(view, outcome, index, line.line))
  const head = heads.map((text, i) => `<th scope="col"${i === 0 ? ' class="words"' : ''}>${text}</th>`).join('')
  return `<div class="scroll" tabindex="0" role="region" aria-label="${escapeHtml(`Estimates at ${line.label}`)}"><table><thead><tr>${head}</tr></thead><tbody>${rows.join('')}</tbody></table></div>`
}

function rowOf(view: View, outcome: OutcomeView, index: number, id: string): string {
  const { outcome: name, lines, pooled, comparison } = outcome.result
  const jump = lines[index]
  const head = `<th scope="row">${escapeHtml(name)}</th>`
  if (!isEstimated<Jump>(jump)) {
    const why = escapeHtml(`not estimated: ${reasonText(view, jump.not_estimated)}`)
    return `<tr>${head}<td class="words" colspan="${heads.length - 1}">${why}</td></tr>`
  }
  const places = linePlaces(outcome)
  const { units_in_bandwidth: units, corrected, bias_aware: biasAware } = jump
  const shrunken = comparison?.shrunken.find(({ line }) => line === id)
  const cells = [
    cell(units.untreated, view.smallestCell),
    cell(units.treated, view.smallestCell),
    widthWords(jump.bandwidth, widthPlaces([jump])),
    fixed(jump.at_line.untreated, places),
    fixed(jump.plain.estimate, places),
    fixed(corrected.estimate, places),
    intervalText(corrected, places),
    p(corrected.p),
    biasAware ? intervalText(biasAware, places) : missing,
    fixed(shrunken?.estimate, places),
    percent(isEstimated<{ weights: Readonly<Record<string, number>> }>(pooled) ? pooled.weights[id] : undefined),
  ]
  return `<tr>${head}${cells.map((text) => `<td>${escapeHtml(text)}</td>`).join('')}</tr>`
}

function balanceHtml({ balance }: LineSummary): string {
  if (!balance || balance.length === 0) return ''
  const parts = balance.map((one) =>
    'not_estimated' in one
      ? `${one.column}: ${one.not_estimated}`
      : `${one.column} ${significant(one.estimate)} (standard error ${significant(one.standard_error)}, p ${p(one.p)})`,
  )
  return `<p>${escapeHtml(`Predetermined columns jump by: ${parts.join('; ')}.`)}</p>`
}

function checksOf(view: View, line: LineSummary): CheckResult[] {
  const all = view.outcomes.flatMap(({ result }) => result.checks.filter((check) => check.line === line.line))
  const seen = new Set<string>()
  return all.filter(({ check, says }) => !seen.has(check + says) && seen.add(check + says))
}

function checksHtml(checks: readonly CheckResult[]): string {
  const items = checks.map(
    ({ check, verdict, says }) => `<li><b>${escapeHtml(capital(check))}</b>, ${verdict}: ${escapeHtml(says)}</li>`,
  )
  return `<ul class="cautions">${items.join('')}</ul>`
}
