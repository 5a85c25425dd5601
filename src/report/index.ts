/** Door of the report room: results in, text files out. It computes no estimate, and no record, id or unit coordinate passes it. */

import { checksCsv, linesCsv, pooledCsv } from './csv.js'
import { alongFigure } from './figures/along.js'
import { forestFigure } from './figures/forest.js'
import { mapFigure } from './figures/map.js'
import { scatterFigure } from './figures/scatter.js'
import { bordersGeojson } from './geojson.js'
import type { ReportInput } from './input.js'
import { type PageFigures, pageHtml } from './page/page.js'
import { type NamedTable, paperTables } from './paperTables.js'
import { splitTable } from './splitTable.js'
import { toCsv, toLatex, toMarkdown } from './tables.js'
import { estimatedLines, howMany, isEstimated, labelOf, type OutcomeView, type View, viewOf } from './view.js'

export { comparedLines } from './comparedText.js'
export { exhibitsOf } from './exhibitList.js'
export type { ReportInput } from './input.js'
export type { NamedTable } from './paperTables.js'
export { planLines } from './planText.js'
export { type ReplicationFacts, replicationReadme } from './replicationReadme.js'
export { splitTable } from './splitTable.js'
export { geometryWords, summaryLines } from './summary.js'
export { type CellNumber, numberOfCell } from './tableCells.js'
export type { TableRow, TextTable } from './tables.js'

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
  })
  if (figures.map) files.set('figures/map.svg', figures.map)
  for (const { name, table } of paperTables(view)) {
    files.set(`tables/${name}.csv`, toCsv(table))
    const parts = splitTable(table)
    files.set(`tables/${name}.md`, parts.map(toMarkdown).join('\n'))
    files.set(`tables/${name}.tex`, parts.map(toLatex).join('\n'))
  }
  files.set('lines.csv', linesCsv(view))
  files.set('pooled.csv', pooledCsv(view))
  files.set('checks.csv', checksCsv(view))
  if (view.exhibits.map) files.set('borders.geojson', bordersGeojson(view, view.exhibits.map))
  files.set('report.html', pageHtml(view, figures, input.script))
  return files
}

/** The tables of tables/, for documents that hold them all. */
export function reportTables(input: ReportInput): NamedTable[] {
  return paperTables(viewOf(input))
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
