/** The whole job between reading a study and writing its results: what `run` does, and what a replication does again. */
import type { AnalysisInputs, Progress } from '../analyze.js'
import type { Checked } from '../problem.js'
import type { Analysis, Results } from '../results.js'
import { withFrozen } from './frozen.js'
import { withGround } from './ground.js'
import { readInputs, type StudyFile } from './inputs.js'
import { resultNames } from './outFolder.js'
import { pageScript } from './pageScript.js'
import { pdfOf } from './pdf.js'
import type { WriteFile } from './resultsFolder.js'
import { resultsJson } from './resultsJson.js'
import { unitsCsv } from './unitsCsv.js'
import { withVariants } from './variantInputs.js'
import { packageVersion } from './version.js'

export interface Clock {
  /** ISO 8601, UTC. */
  readonly started: string
  /** Asked once, when the results are there. */
  readonly seconds: () => number
}

export interface JobOptions {
  readonly clock: Clock
  readonly workers?: number
  readonly progress?: Progress
}

export interface Job {
  readonly inputs: AnalysisInputs
  readonly analysis: Analysis
}

/** What results are drawn from beside themselves; it carries no record, id or unit coordinate. */
export type Drawable = Omit<Analysis, 'units'>

/** The inputs of a study and of its variants. */
export async function readAllInputs(from: StudyFile, progress?: Progress): Promise<Checked<AnalysisInputs>> {
  const read = await readInputs(from, { progress })
  return read.ok ? withVariants(from, read.value, { progress }) : read
}

export async function analyzeStudy(
  from: StudyFile,
  inputs: AnalysisInputs,
  options: JobOptions,
): Promise<Checked<Job>> {
  const { clock, workers, progress } = options
  const { analyze } = await import('../analyze.js')
  const frozen = await withFrozen(from, inputs)
  if (!frozen.ok) return frozen
  const ready = await withGround(from.study, frozen.value.inputs, { workers, progress })
  if (!ready.ok) return ready
  const made = analyze(from.study, ready.value, { version: packageVersion(), started: clock.started, progress })
  if (!made.ok) return made
  const results = withGeometry({ ...made.value.results, seconds: clock.seconds() }, frozen.value.geometry)
  return { ok: true, value: { inputs, analysis: { ...made.value, results } } }
}

/** After the inputs, where a reader looks for it. */
function withGeometry(results: Results, geometry: Results['geometry']): Results {
  if (!geometry) return results
  const { format, title, version, seed, started, seconds, inputs, ...rest } = results
  return { format, title, version, seed, started, seconds, inputs, geometry, ...rest }
}

/** Every file of the results folder but units.csv; they follow from `analysis` and the study alone. */
export async function writeDrawn(write: WriteFile, { study }: StudyFile, analysis: Drawable): Promise<void> {
  const { resolvedStudy } = await import('../study/index.js')
  const { drawReport, pdfPath, reportTables } = await import('../report/index.js')
  const { docxOf } = await import('./documents.js')
  const { xlsxOf } = await import('./workbook.js')
  const resolved = resolvedStudy(study)
  await write('results.json', [resultsJson(analysis.results)])
  await write('study.resolved.yaml', [resolved])
  const input = { analysis, resolvedStudy: resolved, disclosure: study.disclosure, script: pageScript() }
  const drawn = drawReport(input)
  for (const [path, text] of drawn) {
    if (written.has(path)) continue
    await write(known(path), [text])
    const pdf = pdfPath(path)
    if (pdf !== undefined) await write(known(pdf), [await pdfOf(text)])
  }
  const tables = reportTables(input)
  await write('tables/tables.docx', [await docxOf(study.title, tables)])
  await write('tables/tables.xlsx', [await xlsxOf(tables)])
}

/** One row for each unit placed, with its id and its foot on the border. */
export async function writeUnits(write: WriteFile, { study }: StudyFile, { analysis, inputs }: Job): Promise<void> {
  await write('units.csv', unitsCsv(analysis, inputs.table, study.records.id))
}

const written: ReadonlySet<string> = new Set(['results.json', 'study.resolved.yaml', 'units.csv'])

/** A file that the guard of `--out` does not know would stop the next run. */
function known(path: string): string {
  const [top] = path.split('/')
  if (!resultNames.has(top)) throw new Error(`${path} is not a file of the results folder`)
  return path
}

/** Why no outcome has an estimate, pooled or at any line; undefined where one has. */
export function whyNothing(results: Results): string | undefined {
  const jumps = results.outcomes.flatMap((outcome) => [outcome.pooled, ...outcome.lines])
  if (jumps.some((jump) => !('not_estimated' in jump))) return undefined
  const [first] = jumps
  return first !== undefined && 'not_estimated' in first ? first.not_estimated : 'no unit is placed against a line'
}
