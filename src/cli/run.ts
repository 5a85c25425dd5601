/** `scarp run`: the whole job, from a study file to a results folder. */
import { type ExitCode, exitCodes } from './exitCodes.js'
import { readStudyFile } from './inputs.js'
import { analyzeStudy, readAllInputs, whyNothing, writeDrawn, writeUnits } from './job.js'
import { defaultOutFolder, outFolderProblems } from './outFolder.js'
import { progressLine } from './progress.js'
import { mendResultsFolder, writeResultsFolder } from './resultsFolder.js'
import { resultsJson } from './resultsJson.js'
import { say, sayProblems } from './say.js'

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
  const outProblems = outFolderProblems(out, studyFile.value.paths)
  const inputs = await readAllInputs(studyFile.value, progress)
  if (!inputs.ok || outProblems.length > 0) {
    clear()
    return refuse([...outProblems, ...(inputs.ok ? [] : inputs.problems)])
  }

  const seconds = () => Math.round(performance.now() - begun) / 1000
  const { workers } = options
  const job = await analyzeStudy(studyFile.value, inputs.value, { clock: { started, seconds }, workers, progress })
  if (!job.ok) {
    clear()
    return refuse(job.problems)
  }
  const { results } = job.value.analysis
  await writeResultsFolder(out, async (write) => {
    await writeDrawn(write, studyFile.value, job.value.analysis)
    await writeUnits(write, studyFile.value, job.value)
  })
  clear()

  if (options.json) process.stdout.write(resultsJson(results))
  else if (!options.quiet) {
    const { summaryLines } = await import('../report/index.js')
    process.stdout.write(`${summaryLines(results, out).join('\n')}\n`)
  }
  const reason = whyNothing(results)
  if (reason === undefined) return exitCodes.done
  say(`${file}: nothing can be estimated: ${reason}; see ${out}`)
  return exitCodes.nothingEstimated
}

function refuse(problems: Parameters<typeof sayProblems>[0]): ExitCode {
  sayProblems(problems)
  return exitCodes.unusable
}
