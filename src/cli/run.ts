/** `scarp run`: the whole job, from a study file to a results folder. */
import type { Results } from '../results.js'
import { type ExitCode, exitCodes } from './exitCodes.js'
import { withFrozen } from './frozen.js'
import { withGround } from './ground.js'
import { readInputs, readStudyFile } from './inputs.js'
import { defaultOutFolder, outFolderProblems, resultNames } from './outFolder.js'
import { progressLine } from './progress.js'
import { mendResultsFolder, writeResultsFolder } from './resultsFolder.js'
import { resultsJson } from './resultsJson.js'
import { say, sayProblems } from './say.js'
import { unitsCsv } from './unitsCsv.js'
import { withVariants } from './variantInputs.js'
import { packageVersion } from './version.js'

export interface RunOptions {
  readonly out?: string
  readonly quiet?: boolean
  readonly json?: boolean
  readonly workers?: number
}

export async function run(file: string, options: RunOptions): Promise<ExitCode> {
  const begun = performance.now()
  const started = new Date().toISOString()
  const out = options.out ?? defaultOutFolder(file)
  mendResultsFolder(out)
  const { progress, clear } = progressLine(options.quiet === true)
  const studyFile = await readStudyFile(file)
  if (!studyFile.ok) return refuse(studyFile.problems)
  const { study, paths } = studyFile.value
  const outProblems = outFolderProblems(out, paths)
  const read = await readInputs(studyFile.value, { progress })
  const inputs = read.ok ? await withVariants(studyFile.value, read.value, { progress }) : read
  if (!inputs.ok || outProblems.length > 0) {
    clear()
    return refuse([...outProblems, ...(inputs.ok ? [] : inputs.problems)])
  }

  const { analyze } = await import('../analyze.js')
  const frozen = await withFrozen(studyFile.value, inputs.value)
  const ready = frozen.ok
    ? await withGround(study, frozen.value.inputs, { workers: options.workers, progress })
    : frozen
  const analysis = ready.ok ? analyze(study, ready.value, { version: packageVersion(), started, progress }) : ready
  if (!analysis.ok) {
    clear()
    return refuse(analysis.problems)
  }
  const { resolvedStudy } = await import('../study/index.js')
  const { drawReport, summaryLines } = await import('../report/index.js')
  const seconds = Math.round(performance.now() - begun) / 1000
  const { geometry } = frozen.ok ? frozen.value : {}
  const results: Results = withGeometry({ ...analysis.value.results, seconds }, geometry)
  const finished = { ...analysis.value, results }
  const resolved = resolvedStudy(study)
  const drawn = drawReport({ analysis: finished, resolvedStudy: resolved, disclosure: study.disclosure })
  const json = resultsJson(results)
  await writeResultsFolder(out, async (write) => {
    await write('results.json', [json])
    await write('study.resolved.yaml', [resolved])
    await write('units.csv', unitsCsv(finished, inputs.value.table, study.records.id))
    for (const [path, text] of drawn) if (!written.has(path)) await write(known(path), [text])
  })
  clear()

  if (options.json) process.stdout.write(json)
  else if (!options.quiet) process.stdout.write(`${summaryLines(results, out).join('\n')}\n`)
  const reason = whyNothing(results)
  if (reason === undefined) return exitCodes.done
  say(`${file}: nothing can be estimated: ${reason}; see ${out}`)
  return exitCodes.nothingEstimated
}

/** After the inputs, where a reader looks for it. */
function withGeometry(results: Results, geometry: Results['geometry']): Results {
  if (!geometry) return results
  const { format, title, version, seed, started, seconds, inputs, ...rest } = results
  return { format, title, version, seed, started, seconds, inputs, geometry, ...rest }
}

const written: ReadonlySet<string> = new Set(['results.json', 'study.resolved.yaml', 'units.csv'])

/** A file that the guard of `--out` does not know would stop the next run. */
function known(path: string): string {
  const [top] = path.split('/')
  if (!resultNames.has(top)) throw new Error(`${path} is not a file of the results folder`)
  return path
}

function refuse(problems: Parameters<typeof sayProblems>[0]): ExitCode {
  sayProblems(problems)
  return exitCodes.unusable
}

/** Why no outcome has an estimate, pooled or at any line; undefined where one has. */
function whyNothing(results: Results): string | undefined {
  const jumps = results.outcomes.flatMap((outcome) => [outcome.pooled, ...outcome.lines])
  if (jumps.some((jump) => !('not_estimated' in jump))) return undefined
  const [first] = jumps
  return first !== undefined && 'not_estimated' in first ? first.not_estimated : 'no unit is placed against a line'
}
