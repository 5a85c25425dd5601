/** Studies for the panel, in memory, and what its script is given and shows, without a browser. */
import { buildSync } from 'esbuild'
import { type AnalysisInputs, analyze } from '../../src/analyze.js'
import { seededRandom } from '../../src/math/index.js'
import { problemText } from '../../src/problem.js'
import { type Model, modelOf } from '../../src/report/client/model.js'
import { drawReport } from '../../src/report/index.js'
import type { PanelData } from '../../src/report/whatIfData.js'
import type { Analysis } from '../../src/results.js'
import { readStudy, resolvedStudy, type Study } from '../../src/study/index.js'

/** The page's script from source, as `npm run build` makes it. */
export function pageScript(): string {
  const { outputFiles } = buildSync({
    entryPoints: ['src/report/client/main.ts'],
    bundle: true,
    minify: true,
    format: 'iife',
    target: 'es2022',
    write: false,
  })
  return outputFiles[0].text.trimEnd()
}

export interface Columns {
  readonly [name: string]: Float64Array
}

/** Units around 0 on `lines` lines: weight, village, a covariate and take-up; the outcome jumps by 0.4 and bends. */
export function inventUnits(count: number, lines: number, seed: number): Columns {
  const random = seededRandom(seed)
  const normal = () => Math.sqrt(-2 * Math.log(1 - random.next())) * Math.cos(2 * Math.PI * random.next())
  const fill = (value: (i: number) => number) => Float64Array.from({ length: count }, (_, i) => value(i))
  const score = fill(() => 20 * normal())
  const site = fill(() => Math.floor(lines * random.next()))
  const age = fill(() => 40 + 10 * normal())
  const took = fill((i) => (random.next() < (score[i] >= 0 ? 0.8 : 0.15) ? 1 : 0))
  const y = fill((i) => Math.sin(score[i] / 25) + 0.4 * took[i] + 0.2 * site[i] + 0.01 * age[i] + 0.7 * normal())
  return { score, site, age, took, y, share: fill(() => 0.5 + 2 * random.next()), village: fill((i) => i % 37) }
}

/** The text of a study on the columns' score, sites being the lines. */
export function studyOf(more: string): Study {
  const text = `records: {file: units.csv${/cluster/.test(more) ? ', cluster: village' : ''}${/weighted/.test(more) ? ', weight: share' : ''}}
outcomes: [y]
line: {score: score, cutoff: 0, treated: at-or-above, compare_by: [site]}
checks: none
${more}`
  const read = readStudy(text, 'study.yaml')
  if (!read.ok) throw new Error(read.problems.map(problemText).join('\n'))
  return read.value
}

export function inputsOf(columns: Columns): AnalysisInputs {
  const rows = columns.score.length
  const named = Object.entries(columns).map(
    ([name, values]) => [name, { kind: 'number' as const, name, values }] as const,
  )
  const lineOfRow = Int32Array.from({ length: rows }, (_, i) => i + 2)
  return {
    table: { file: 'units.csv', rowsRead: rows, rows, lineOfRow, columns: new Map(named), sha256: '0'.repeat(64) },
  }
}

export function analysisOf(study: Study, inputs: AnalysisInputs): Analysis {
  const made = analyze(study, inputs, { version: '0.0.0', started: '2026-03-04T05:06:07.000Z' })
  if (!made.ok) throw new Error(made.problems.map(problemText).join('\n'))
  return made.value
}

export function pageOf(study: Study, analysis: Analysis, script = ''): string {
  const files = drawReport({ analysis, resolvedStudy: resolvedStudy(study), disclosure: study.disclosure, script })
  return files.get('report.html') as string
}

/** What the page hands to its script. */
export function panelDataOf(page: string): PanelData {
  const found = /<script type="application\/json" id="what-if-data">(.*?)<\/script>/s.exec(page)
  if (!found) throw new Error('the page has no panel')
  return JSON.parse(found[1]) as PanelData
}

export function modelOfPage(page: string): Model {
  return modelOf(panelDataOf(page))
}
