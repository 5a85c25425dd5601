/** Door of the report room: results in, text files out. It computes no estimate, and no record, id or unit coordinate passes it. */

import { auditTable } from './auditTable.js'
import { conflictTable, waterfallTable, whatElseTable } from './borderTables.js'
import { checksCsv, linesCsv, pooledCsv } from './csv.js'
import { alongFigure } from './figures/along.js'
import { forestFigure } from './figures/forest.js'
import { mapFigure } from './figures/map.js'
import { scatterFigure } from './figures/scatter.js'
import { bordersGeojson } from './geojson.js'
import type { ReportInput } from './input.js'
import { ladderTable, placeboTable, standardsTable } from './ladderTable.js'
import { ledgerTable } from './ledgerTable.js'
import { paperLineTable } from './lineTable.js'
import { awayTable, movedTable } from './movedTable.js'
import { type PageFigures, pageHtml } from './page/page.js'
import { pooledTable } from './pooledTable.js'
import { sharedTable } from './sharedTable.js'
import { type TextTable, toLatex, toMarkdown } from './tables.js'
import { variantTable } from './variantTable.js'
import { estimatedLines, howMany, isEstimated, labelOf, type OutcomeView, type View, viewOf } from './view.js'

export { comparedLines } from './comparedText.js'
export { exhibitsOf } from './exhibitList.js'
export type { ReportInput } from './input.js'
export { planLines } from './planText.js'
export { type ReplicationFacts, replicationReadme } from './replicationReadme.js'
export { geometryWords, summaryLines } from './summary.js'

const mostLineFigures = 200

/** All text files of the results folder but results.json, units.csv and study.resolved.yaml: path -> text. */
export function drawReport(input: ReportInput): Map<string, string> {
  const view = viewOf(input)
  const files = new Map<string, string>()
  const figures: PageFigures = {
    map: view.exhibits.map ? mapFigure(view, 'figure-map') : undefined,
    byOutcome: view.outcomes.map((outcome) => ({
      pooled: pooledFigure(view, outcome),
      forest: forestFigure(view, outcome, `figure-${outcome.slug}-forest`),
      along: alongFigure(view, outcome, `figure-${outcome.slug}-along`),
    })),
    lineFigures: addLineFigures(view, files),
  }
  view.outcomes.forEach((outcome, index) => {
    const { pooled, forest, along } = figures.byOutcome[index]
    if (along) files.set(`figures/${outcome.slug}-along.svg`, along)
    if (pooled) files.set(`figures/${outcome.slug}-pooled.svg`, pooled)
    files.set(`figures/${outcome.slug}-forest.svg`, forest)
    addTable(files, `lines-${outcome.slug}`, paperLineTable(view, outcome))
    const more = {
      variants: variantTable(view, outcome),
      moved: movedTable(view, outcome),
      away: awayTable(view, outcome),
      ladders: ladderTable(view, outcome),
      placebos: placeboTable(view, outcome),
      standards: standardsTable(outcome),
    }
    for (const [name, table] of Object.entries(more)) if (table) addTable(files, `${name}-${outcome.slug}`, table)
  })
  if (figures.map) files.set('figures/map.svg', figures.map)
  addTable(files, 'pooled', pooledTable(view))
  addTable(files, 'ledger', ledgerTable(view))
  const shared = sharedTable(view)
  if (shared) addTable(files, 'shared-units', shared)
  const audit = auditTable(view)
  if (audit) addTable(files, 'audit', audit)
  const borderTables = { waterfall: waterfallTable(view), 'what-else': whatElseTable(view), sides: conflictTable(view) }
  for (const [name, table] of Object.entries(borderTables)) if (table) addTable(files, name, table)
  files.set('lines.csv', linesCsv(view))
  files.set('pooled.csv', pooledCsv(view))
  files.set('checks.csv', checksCsv(view))
  if (view.exhibits.map) files.set('borders.geojson', bordersGeojson(view, view.exhibits.map))
  files.set('report.html', pageHtml(view, figures))
  return files
}

function addTable(files: Map<string, string>, name: string, table: TextTable): void {
  files.set(`tables/${name}.md`, toMarkdown(table))
  files.set(`tables/${name}.tex`, toLatex(table))
}

function pooledFigure(view: View, outcome: OutcomeView): string | undefined {
  const jump = outcome.result.pooled
  const exhibit = outcome.exhibit?.pooled
  if (!exhibit || !isEstimated(jump)) return undefined
  const lines = estimatedLines(outcome.result).length
  return scatterFigure(view, {
    id: `figure-${outcome.slug}-pooled`,
    outcome: outcome.result.outcome,
    of: lines === 1 ? `the one ${view.words.line}` : `${howMany(view, lines)} pooled`,
    jump,
    exhibit,
  })
}

/** Figures of single lines, numbered by the line's place in the study; at most 200 over all outcomes. */
function addLineFigures(view: View, files: Map<string, string>): PageFigures['lineFigures'] {
  let drawn = 0
  let leftOut = 0
  for (const outcome of view.outcomes) {
    outcome.result.lines.forEach((jump, index) => {
      const exhibit = outcome.exhibit?.lines[index]
      if (!exhibit || 'not_estimated' in jump) return
      if (drawn >= mostLineFigures) {
        leftOut++
        return
      }
      const name = `${outcome.slug}-line-${index + 1}`
      files.set(
        `figures/${name}.svg`,
        scatterFigure(view, {
          id: `figure-${name}`,
          outcome: outcome.result.outcome,
          of: labelOf(view, jump.line),
          jump,
          exhibit,
        }),
      )
      drawn++
    })
  }
  return { drawn, leftOut }
}
