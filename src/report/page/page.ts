/** report.html: one page, no request, and no script but that of its one panel. The answer in words first, then what it rests on. */
import { auditTable } from '../auditTable.js'
import { conflictTable, waterfallTable, whatElseTable } from '../borderTables.js'
import { escapeHtml } from '../escape.js'
import { ladderTable, placeboTable, standardsTable } from '../ladderTable.js'
import { checksTable, ledgerTable, setAsideTable } from '../ledgerTable.js'
import { capital, pageLineTable } from '../lineTable.js'
import { awayTable, movedTable } from '../movedTable.js'
import { count, missing, significant } from '../numbers.js'
import { comparisonTable, contrastTable, pooledTable } from '../pooledTable.js'
import { sharedTable } from '../sharedTable.js'
import { geometryWords } from '../summary.js'
import { toHtml } from '../tables.js'
import { variantTable } from '../variantTable.js'
import { estimatedLines, howMany, type OutcomeView, type View, widthText } from '../view.js'
import { answerOf } from './answer.js'
import { cautionsOf } from './cautions.js'
import { methodsOf } from './methods.js'
import { contentPolicy } from './policy.js'
import { pageStyle } from './style.js'
import { whatIfHtml } from './whatIf.js'

/** Figures of the page, as SVG. */
export interface PageFigures {
  readonly map: string | undefined
  readonly byOutcome: readonly {
    readonly pooled: string | undefined
    readonly forest: string
    readonly along: string | undefined
  }[]
  /** Lines that have a figure of their own in the folder, and those left out. */
  readonly lineFigures: { readonly drawn: number; readonly leftOut: number }
}

interface Section {
  readonly id: string
  readonly title: string
  readonly body: string
  /** Hidden until the script runs. */
  readonly needsScript?: boolean
}

const tallForest = 60
const tallTable = 40

/** `script`: text that runs at the end of the page, where there is something for it. */
export function pageHtml(view: View, figures: PageFigures, script?: string): string {
  const { results } = view
  const panel = script === undefined ? undefined : whatIfHtml(view)
  const sections = sectionsOf(view, figures, panel)
  const links = sections
    .map((one) => `<li${hiddenMark(one)}><a href="#${one.id}">${escapeHtml(one.title)}</a></li>`)
    .join('')
  const body = sections.map(
    (one) =>
      `<section id="${one.id}" aria-labelledby="${one.id}-head"${hiddenMark(one)}>\n<h2 id="${one.id}-head">${escapeHtml(one.title)}</h2>\n${one.body}\n</section>`,
  )
  return `<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="${contentPolicy(pageStyle, panel && script)}">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="generator" content="scarp ${escapeHtml(results.version)}">
<title>${escapeHtml(results.title)}</title>
<link rel="icon" href="data:,">
<style>${pageStyle}</style>
</head>
<body>
<a class="skip" href="#content">Skip to the content</a>
<div class="sheet">
<header class="top">
<p class="kicker">${emblem}<span>Jumps at ${howMany(view, results.lines.length)}</span></p>
<h1>${escapeHtml(results.title)}</h1>
<p class="by">${escapeHtml(dateWords(results.started))} · ${count(results.placement.placed)} of ${count(results.placement.read)} rows placed · scarp ${escapeHtml(results.version)}</p>
</header>
<div class="body">
<nav aria-labelledby="contents"><h2 id="contents">Contents</h2><ul>${links}</ul></nav>
<main id="content" tabindex="-1">
${body.join('\n')}
</main>
</div>
<footer>Drawn by scarp ${escapeHtml(results.version)} from results.json beside this page, which has every number in full. Seed ${results.seed}.</footer>
</div>
${panel ? `<script>${script}</script>\n` : ''}</body>
</html>
`
}

function hiddenMark({ needsScript }: Section): string {
  return needsScript ? ' class="needs-script" hidden' : ''
}

/** A step: level ground, the line, higher ground. */
const emblem =
  '<svg width="34" height="20" viewBox="0 0 34 20" aria-hidden="true"><path class="s-muted" d="M17 1V19" fill="none" stroke-width="1" stroke-dasharray="2 2"/><path class="s-untreated" d="M1 15L17 14" fill="none" stroke-width="3"/><path class="s-treated" d="M17 6L33 5" fill="none" stroke-width="3"/></svg>'

function sectionsOf(view: View, figures: PageFigures, panel: string | undefined): Section[] {
  const checks = checksTable(view)
  const setAside = setAsideTable(view)
  const ground = [waterfallTable(view), whatElseTable(view), conflictTable(view)].filter((table) => table !== undefined)
  const shared = sharedTable(view)
  const audit = auditTable(view)
  const again = view.outcomes.flatMap((outcome) =>
    [ladderTable(view, outcome) ?? [], placeboTable(view, outcome) ?? []].flat(),
  )
  const standards = view.outcomes.flatMap((outcome) => standardsTable(outcome) ?? [])
  const variants = view.outcomes.flatMap((outcome) =>
    [awayTable(view, outcome) ?? [], movedTable(view, outcome) ?? [], variantTable(view, outcome) ?? []].flat(),
  )
  const hasComparison = view.results.lines.length > 1
  const contrasts = view.outcomes.flatMap((outcome) => contrastTable(view, outcome) ?? [])
  return [
    { id: 'answer', title: 'The answer', body: answerHtml(view) },
    { id: 'cautions', title: 'Before you use it', body: cautionsHtml(view) },
    { id: 'figures', title: 'Figures', body: figuresHtml(view, figures) },
    ...(panel ? [{ id: 'what-if', title: 'What if', body: panel, needsScript: true }] : []),
    { id: 'together', title: 'All together', body: toHtml(pooledTable(view)) },
    {
      id: 'lines',
      title: 'Line by line',
      body: [...view.outcomes.map((outcome) => lineTableHtml(view, outcome)), ...(shared ? [toHtml(shared)] : [])].join(
        '\n',
      ),
    },
    ...(hasComparison
      ? [
          {
            id: 'comparison',
            title: 'Comparison',
            body: [comparisonTable(view), ...contrasts].map((table) => toHtml(table)).join('\n'),
          },
        ]
      : []),
    ...(ground.length > 0
      ? [{ id: 'ground', title: 'The border', body: ground.map((table) => toHtml(table)).join('\n') }]
      : []),
    ...(variants.length > 0
      ? [{ id: 'variants', title: 'Run otherwise', body: variants.map((table) => toHtml(table)).join('\n') }]
      : []),
    ...(checks
      ? [
          {
            id: 'checks',
            title: 'Checks',
            body: [checks, ...(audit ? [audit] : []), ...again].map((table) => toHtml(table)).join('\n'),
          },
        ]
      : []),
    ...(standards.length > 0
      ? [{ id: 'standards', title: 'Against the handbook', body: standards.map((table) => toHtml(table)).join('\n') }]
      : []),
    {
      id: 'ledger',
      title: 'From rows to units',
      body: [ledgerTable(view), ...(setAside ? [setAside] : [])].map((table) => toHtml(table)).join('\n'),
    },
    { id: 'methods', title: 'Methods used', body: methodsHtml(view) },
    { id: 'study', title: 'The study, in full', body: studyHtml(view) },
    { id: 'inputs', title: 'Inputs and run', body: inputsHtml(view) },
  ]
}

function answerHtml(view: View): string {
  const answers = view.outcomes.map((outcome) => {
    const answer = answerOf(view, outcome)
    const head = answer.headline
      ? `<p class="head"><strong>${escapeHtml(answer.headline.estimate)}</strong> <span>${escapeHtml(answer.headline.interval)}, ${tied(escapeHtml(answer.headline.p))}${answer.headline.bundle ? `; ${escapeHtml(answer.headline.bundle)}` : ''}</span></p>`
      : ''
    const facts = answer.facts
      .map(([term, value]) => `<div><dt>${escapeHtml(term)}</dt><dd>${escapeHtml(value)}</dd></div>`)
      .join('')
    return `<div class="answer">
<h3>Pooled jump in ${escapeHtml(outcome.result.outcome)}</h3>
${head}
${answer.sentences.map((sentence) => `<p>${tied(escapeHtml(sentence))}</p>`).join('\n')}
<dl class="facts">${facts}</dl>
</div>`
  })
  return `${answers.join('\n')}
<p class="terms">A jump is the treated side minus the untreated side at ${view.words.theLine}. <b>Plain</b> is the difference of the two fitted curves there. <b>Corrected</b> takes out the plain fit’s estimated smoothing bias and widens the standard error for having estimated it; intervals and p-values quoted are corrected unless they say plain or bias-aware.</p>`
}

/** Keeps `p = 0.012` on one line. */
function tied(html: string): string {
  return html.replace(/\bp (=|&lt;|&gt;) /g, 'p\u00a0$1\u00a0')
}

function cautionsHtml(view: View): string {
  const items = cautionsOf(view).map(
    ({ head, text }) => `<li><strong>${escapeHtml(head)}.</strong> ${escapeHtml(text)}</li>`,
  )
  return `<ul class="cautions">\n${items.join('\n')}\n</ul>`
}

function figuresHtml(view: View, figures: PageFigures): string {
  let number = 0
  const figure = (svg: string, name: string, caption: string, isTall = false) =>
    `<figure><div class="drawing${isTall ? ' tall' : ''}" tabindex="0" role="region" aria-label="${escapeHtml(name)}">${svg}</div><figcaption><b>Figure ${++number}.</b> ${escapeHtml(caption)}</figcaption></figure>`
  const parts = view.outcomes.flatMap((outcome, index) => {
    const { pooled, forest, along } = figures.byOutcome[index]
    const name = outcome.result.outcome
    return [
      ...(view.outcomes.length > 1 ? [`<h3>${escapeHtml(name)}</h3>`] : []),
      ...(pooled ? [figure(pooled, `Figure: ${name}, pooled`, scatterCaption(view, outcome))] : []),
      figure(
        forest,
        `Figure: ${name}, every ${view.words.line}`,
        forestCaption(view, outcome),
        outcome.result.lines.length > tallForest,
      ),
      ...(along ? [figure(along, `Figure: ${name}, along the border`, alongCaption(view, outcome))] : []),
    ]
  })
  const map = figures.map
    ? [
        figure(
          figures.map,
          'Figure: map',
          `Border pieces on the ground. Light and dark follow the corrected estimates of ${view.outcomes[0].result.outcome}; noisy pieces look extreme by chance, so read the map with the intervals above. No unit is drawn.`,
        ),
      ]
    : []
  const { drawn, leftOut } = figures.lineFigures
  const folder = `<p class="note">${count(drawn)} figures of single ${view.words.lines} are in the folder figures/.${leftOut > 0 ? ` ${count(leftOut)} more were left out.` : ''}</p>`
  return [...parts, ...map, folder].join('\n')
}

function scatterCaption(view: View, outcome: OutcomeView): string {
  return `Mean ${outcome.result.outcome} by distance from ${view.words.theLine}, all ${view.words.lines} pooled. Hollow: untreated; filled: treated. Look at the points before the curves: the curves are a model, and the plain one.`
}

function forestCaption(view: View, outcome: OutcomeView): string {
  const missingLines = outcome.result.lines.length - estimatedLines(outcome.result).length
  const missingWords =
    missingLines === 0 ? '' : ` ${howMany(view, missingLines)} could not be estimated; the table says why.`
  return `Every ${view.words.line} with its own bandwidth, above three ways of taking them together: pooled in one fit, the stated target, and the random-effects mean.${missingWords}`
}

function alongCaption(view: View, { result }: OutcomeView): string {
  const average = result.along_average?.length
  const width = result.along_bandwidth
  const mean =
    average && 'estimate' in average
      ? ` Weighted by length of border the points average ${significant(average.estimate)} (${significant(average.low)} to ${significant(average.high)}).`
      : ''
  const rule = width ? ` Bandwidth ${widthText(view, width)}: ${width.rule}.` : ''
  return `The jump at points along the border, fitted in two coordinates, which bends of the border do not bias as they do distance alone.${mean}${rule}`
}

function lineTableHtml(view: View, outcome: OutcomeView): string {
  return toHtml(pageLineTable(view, outcome), outcome.result.lines.length > tallTable ? 'dense tall' : 'dense')
}

function methodsHtml(view: View): string {
  const items = methodsOf(view).map(
    ({ text, papers }) =>
      `<li>${escapeHtml(text)}${papers.length > 0 ? `<cite>${papers.map(escapeHtml).join(' · ')}</cite>` : ''}</li>`,
  )
  return `<ul class="methods">\n${items.join('\n')}\n</ul>`
}

function studyHtml(view: View): string {
  return `<p>The study with every default filled in. It is study.resolved.yaml in the results folder, and running it again gives these numbers.</p>
<pre tabindex="0" role="region" aria-label="The resolved study"><code>${escapeHtml(view.resolvedStudy.trimEnd())}</code></pre>`
}

function inputsHtml(view: View): string {
  const { inputs, version, seed, started, seconds, geometry } = view.results
  const table = toHtml(
    {
      caption: 'Files read',
      columns: [
        { head: 'File', isText: true },
        { head: 'Rows or features' },
        { head: 'Coordinates', isText: true },
        { head: 'SHA-256', isText: true },
      ],
      rows: inputs.map((input) => [
        input.file,
        count(input.rows ?? input.features),
        input.crs ?? missing,
        input.sha256,
      ]),
      notes: geometry ? [`${capital(geometryWords(geometry))}.`] : [],
    },
    'inputs',
  )
  return `${table}
<dl class="facts"><div><dt>program</dt><dd>scarp ${escapeHtml(version)}</dd></div><div><dt>seed</dt><dd>${seed}</dd></div><div><dt>started</dt><dd>${escapeHtml(started)}</dd></div><div><dt>seconds</dt><dd>${seconds.toFixed(1)}</dd></div></dl>`
}

const months = [
  'January',
  'February',
  'March',
  'April',
  'May',
  'June',
  'July',
  'August',
  'September',
  'October',
  'November',
  'December',
]

/** "4 March 2026" of an ISO date; the text itself where it is none. */
function dateWords(iso: string): string {
  const found = /^(\d{4})-(\d{2})-(\d{2})T/.exec(iso)
  return found ? `${Number(found[3])} ${months[Number(found[2]) - 1]} ${found[1]}` : iso
}
