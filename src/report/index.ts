/** Door of the report room: results in, text files out. It computes no estimate, and no record, id or unit coordinate passes it. */

import { checksCsv, linesCsv, pooledCsv } from './csv.js'
import { escapeMarkdown } from './escape.js'
import { mainFigures, type ReportFigures, reportFigures } from './figures/all.js'
import { withMore } from './figures/figure.js'
import { bordersGeojson } from './geojson.js'
import type { ReportInput } from './input.js'
import { pageHtml } from './page/page.js'
import { type NamedTable, paperTables } from './paperTables.js'
import { splitTable } from './splitTable.js'
import { toCsv, toLatex, toMarkdown } from './tables.js'
import { viewOf } from './view.js'

export { comparedLines } from './comparedText.js'
export { escapeHtml } from './escape.js'
export { exhibitsOf } from './exhibitList.js'
export type { ReportInput } from './input.js'
export { machineTable } from './machineTable.js'
export type { NamedTable } from './paperTables.js'
export { planLines } from './planText.js'
export { type ReplicationFacts, replicationReadme } from './replicationReadme.js'
export { splitTable } from './splitTable.js'
export { geometryWords, summaryLines } from './summary.js'
export { type Cell, type ShownNumber, shownText } from './tableCells.js'
export type { TableRow, TextTable } from './tables.js'

/** Path of the PDF that a figure's SVG is to have, made where files are written; nothing for figures of single lines. */
export function pdfPath(svgPath: string): string | undefined {
  const isMain = /^figures\/.*\.svg$/.test(svgPath) && !/-line-\d+(?:-fit)?\.svg$/.test(svgPath)
  return isMain ? svgPath.replace(/svg$/, 'pdf') : undefined
}

/** All text files of the results folder but results.json, units.csv and study.resolved.yaml: path -> text. */
export function drawReport(input: ReportInput): Map<string, string> {
  const view = viewOf(input)
  const files = new Map<string, string>()
  const figures = reportFigures(view)
  addFigures(files, figures)
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

/** SVG and CSV of every figure, and all captions in one file. */
function addFigures(files: Map<string, string>, figures: ReportFigures): void {
  const main = mainFigures(figures)
  for (const { name, svg, csv } of [...main, ...figures.lines.flatMap(withMore)]) {
    files.set(`figures/${name}.svg`, svg)
    files.set(`figures/${name}.csv`, csv)
  }
  const captions = main.map(({ name, title, caption }) =>
    [`## ${name}`, '', `**${escapeMarkdown(title)}.** ${escapeMarkdown(caption)}`, ''].join('\n'),
  )
  files.set('figures/captions.md', ['# Captions of the figures', '', ...captions].join('\n'))
}
