/** report.html: one page, no request, and no script but that of its panel and of its list of lines. The answer in words first, then what it rests on. */
import { auditTable } from '../auditTable.js'
import { conflictTable, waterfallTable, whatElseTable } from '../borderTables.js'
import { comparisonTable, contrastTable } from '../comparisonTable.js'
import { escapeHtml } from '../escape.js'
import type { ReportFigures } from '../figures/all.js'
import { ladderTable, placeboTable, standardsTable } from '../ladderTable.js'
import { checksTable, ledgerTable, setAsideTable } from '../ledgerTable.js'
import { capital, pageLineTable } from '../lineTable.js'
import { awayTable, movedTable } from '../movedTable.js'
import { count, missing } from '../numbers.js'
import { passportsHtml } from '../passports/passports.js'
import { pooledTable } from '../pooledTable.js'
import { sharedTable } from '../sharedTable.js'
import { geometryWords } from '../summary.js'
import { type TextTable, toHtml } from '../tables.js'
import { variantTable } from '../variantTable.js'
import { howMany, type OutcomeView, type View } from '../view.js'
import { answerOf } from './answer.js'
import { cautionsOf } from './cautions.js'
import { numberedFigures, type ShowFigures } from './figures.js'
import { methodsOf } from './methods.js'
import { contentPolicy } from './policy.js'
import { pageStyle } from './style.js'
import { whatIfHtml } from './whatIf.js'

interface Section {
  readonly id: string
  readonly title: string
  readonly body: string
  /** Hidden until the script runs. */
  readonly needsScript?: boolean
}

const tallTable = 40
const whatIfId = 'what-if'

/** `script`: text that runs at the end of the page, where there is something for it. */
export function pageHtml(view: View, figures: ReportFigures, script?: string): string {
  const { results } = view
  const panel = script === undefined ? undefined : whatIfHtml(view)
  const passports = passportsHtml(view)
  const hasScript = script !== undefined && (panel !== undefined || passports !== '')
  const sections = sectionsOf(view, figures, { panel, passports })
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
<meta http-equiv="Content-Security-Policy" content="${contentPolicy(pageStyle, hasScript ? script : undefined)}">
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
${hasScript ? `<script>${script}</script>\n` : ''}</body>
</html>
`
}

function hiddenMark({ needsScript }: Section): string {
  return needsScript ? ' class="needs-script" hidden' : ''
}

/** A step: level ground, the line, higher ground. */
const emblem =
  '<svg width="34" height="20" viewBox="0 0 34 20" aria-hidden="true"><path class="s-muted" d="M17 1V19" fill="none" stroke-width="1" stroke-dasharray="2 2"/><path class="s-untreated" d="M1 15L17 14" fill="none" stroke-width="3"/><path class="s-treated" d="M17 6L33 5" fill="none" stroke-width="3"/></svg>'

/** Sections in the order of the page; one without a part is left out. `panel`: what the script fills in. */
function sectionsOf(
  view: View,
  figures: ReportFigures,
  { panel, passports }: { readonly panel: string | undefined; readonly passports: string },
): Section[] {
  const show = numberedFigures()
  const ofOutcomes = (table: (view: View, outcome: OutcomeView) => TextTable | undefined) =>
    tablesHtml(view.outcomes.map((outcome) => table(view, outcome)))
  const sections: readonly [id: string, title: string, parts: readonly string[]][] = [
    ['answer', 'The answer', [answerHtml(view)]],
    ['together', 'What it rests on', [tablesHtml([pooledTable(view)])]],
    ['cautions', 'Before you use it', [cautionsHtml(view)]],
    ['figures', 'Figures', [figuresHtml(view, figures, show)]],
    [whatIfId, 'What if', panel === undefined ? [] : [panel]],
    [
      'lines',
      'Line by line',
      [...view.outcomes.map((outcome) => lineTableHtml(view, outcome)), tablesHtml([sharedTable(view)])],
    ],
    ['passports', `A passport for each ${view.words.line}`, [passports]],
    [
      'comparison',
      'Comparison',
      view.results.lines.length > 1 ? [tablesHtml([comparisonTable(view)]), ofOutcomes(contrastTable)] : [],
    ],
    [
      'ground',
      'The border',
      [show(figures.waterfall), tablesHtml([waterfallTable(view), whatElseTable(view), conflictTable(view)])],
    ],
    ['variants', 'Run otherwise', [ofOutcomes(awayTable), ofOutcomes(movedTable), ofOutcomes(variantTable)]],
    [
      'checks',
      'Checks',
      [
        tablesHtml([checksTable(view), auditTable(view)]),
        show(figures.shared),
        ...view.outcomes.flatMap((outcome, index) => [
          figures.checks[index].length > 0 ? subhead(view, outcome) : '',
          show(figures.checks[index]),
          tablesHtml([ladderTable(view, outcome), placeboTable(view, outcome)]),
        ]),
      ],
    ],
    ['standards', 'Against the handbook', [ofOutcomes((_, outcome) => standardsTable(outcome))]],
    ['ledger', 'From rows to units', [tablesHtml([ledgerTable(view), setAsideTable(view)]), show(figures.ledger)]],
    ['methods', 'Methods used', [methodsHtml(view)]],
    ['study', 'The study, in full', [studyHtml(view)]],
    ['inputs', 'Inputs and run', [inputsHtml(view)]],
  ]
  return sections
    .map(([id, title, parts]) => ({
      id,
      title,
      body: parts.filter((part) => part !== '').join('\n'),
      needsScript: id === whatIfId,
    }))
    .filter(({ body }) => body !== '')
}

function tablesHtml(tables: readonly (TextTable | undefined)[]): string {
  return tables.flatMap((table) => (table ? [toHtml(table)] : [])).join('\n')
}

/** The outcome's name above what is its own, where there are several. */
function subhead(view: View, { result }: OutcomeView): string {
  return view.outcomes.length > 1 ? `<h3>${escapeHtml(result.outcome)}</h3>` : ''
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

function figuresHtml(view: View, figures: ReportFigures, show: ShowFigures): string {
  const effects = view.outcomes.flatMap((outcome, index) => [subhead(view, outcome), show(figures.effects[index])])
  const more = figures.leftOut > 0 ? ` ${count(figures.leftOut)} more were left out.` : ''
  const folder = `<p class="note">Every figure is in the folder figures/ beside this page as SVG and PDF, with its numbers as CSV; captions.md has the captions. ${count(figures.lines.length)} figures of single ${view.words.lines} are there too.${more}</p>`
  return [...effects, show(figures.ground), folder].join('\n')
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
