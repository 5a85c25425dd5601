/** `scarp replicate`: a folder from which others can make every exhibit again, with the records or without. */
import { statSync } from 'node:fs'
import { dirname, relative, resolve, sep } from 'node:path'
import type { UnitsApart } from '../analyze.js'
import type { Problem } from '../problem.js'
import { type ExitCode, exitCodes } from './exitCodes.js'
import { hashOfFile } from './frozen.js'
import { readStudyFile, type StudyFile } from './inputs.js'
import { analyzeStudy, type Job, readAllInputs, whyNothing } from './job.js'
import { defaultOutFolder, factsOf, outFolderProblems } from './outFolder.js'
import { type Manifest, ownFiles, packKind } from './pack.js'
import { writePack } from './packFiles.js'
import { progressLine } from './progress.js'
import { mendResultsFolder, writeResultsFolder } from './resultsFolder.js'
import { say, sayProblems } from './say.js'

export interface ReplicateOptions {
  readonly out?: string
  readonly quiet?: boolean
  readonly workers?: number
  /** Commander's names for --with-inputs and --without-units. */
  readonly withInputs?: boolean
  readonly withoutUnits?: boolean
}

type Input = Manifest['inputs'][number]

/** The folder appears whole or not at all. */
export async function replicate(file: string, options: ReplicateOptions): Promise<ExitCode> {
  const begun = performance.now()
  const started = new Date().toISOString()
  const out = options.out ?? defaultOutFolder(file, 'replication')
  mendResultsFolder(out)
  const { progress, clear } = progressLine(options.quiet === true)
  const studyFile = await readStudyFile(file)
  if (!studyFile.ok) return refuse(studyFile.problems)
  const from = studyFile.value
  const inputs = await readAllInputs(from, progress)
  const names = await inputNames(from)
  const problems = [
    ...(await outProblems(out, from)),
    ...(options.withInputs ? outsideProblems(file, names) : []),
    ...(inputs.ok ? [] : inputs.problems),
  ]
  if (problems.length > 0 || !inputs.ok) {
    clear()
    return refuse(problems)
  }
  const seconds = () => Math.round(performance.now() - begun) / 1000
  const { workers } = options
  const job = await analyzeStudy(from, inputs.value, { clock: { started, seconds }, workers, progress })
  clear()
  if (!job.ok) return refuse(job.problems)
  const apart = options.withoutUnits ? undefined : await unitsOf(from, job.value)
  const hasInputs = options.withInputs === true
  await writeResultsFolder(out, (write) => writePack(write, { from, job: job.value, apart, inputs: names, hasInputs }))
  if (!options.quiet) process.stdout.write(`${said(out, job.value, apart, options).join('\n')}\n`)
  const reason = whyNothing(job.value.analysis.results)
  if (reason === undefined) return exitCodes.done
  say(`${file}: nothing can be estimated: ${reason}; see ${out}`)
  return exitCodes.nothingEstimated
}

function refuse(problems: readonly Problem[]): ExitCode {
  sayProblems(problems)
  return exitCodes.unusable
}

async function outProblems(out: string, { paths }: StudyFile): Promise<Problem[]> {
  const problems = outFolderProblems(out, paths, packKind)
  if (problems.length > 0 || !factsOf(out)) return problems
  const own = await ownFiles(out)
  if (own.length === 0) return []
  const found = `files in it were edited or added: ${own.slice(0, 3).join(', ')}`
  return [{ file: out, what: packKind.name, found, todo: 'move them away, or choose another --out' }]
}

/** The files a study reads, relative to it, with their hashes; a part of a layer that is not there is none. */
async function inputNames({ file, paths }: StudyFile): Promise<Input[]> {
  const [, ...read] = paths
  const there = read.filter((path) => factsOf(path)?.isFile())
  const folder = dirname(resolve(file))
  return Promise.all(
    there.map(async (path) => ({
      file: relative(folder, path).split(sep).join('/'),
      sha256: await hashOfFile(path),
      bytes: statSync(path).size,
    })),
  )
}

function outsideProblems(study: string, inputs: readonly Input[]): Problem[] {
  return inputs
    .filter(({ file }) => file.startsWith('../'))
    .map(({ file }) => ({
      file: study,
      what: '--with-inputs',
      found: `${file} lies outside the folder of the study`,
      todo: 'move it beside the study, or leave the inputs out',
    }))
}

async function unitsOf({ study }: StudyFile, { inputs, analysis }: Job): Promise<UnitsApart> {
  const { unitsApart } = await import('../analyze.js')
  return unitsApart(study, inputs, analysis.units, analysis.results.lines)
}

function said(out: string, { analysis }: Job, apart: UnitsApart | undefined, options: ReplicateOptions): string[] {
  const { title, seconds } = analysis.results
  return [
    title,
    `${out}: the study, its results, and the list of their hashes; blanks for the author are in ${out}/README.md`,
    apart
      ? `${out}/units has ${apart.table.rows} rows, one for each unit, with its outcomes and without coordinates and ids: ` +
        'check it against the licence of the data before you share it (--without-units leaves it out)'
      : 'no units are in it: exhibits can be drawn again, and not estimated again',
    options.withInputs
      ? `${out}/inputs has every file the study reads, as it is: check that all of them may be shared`
      : 'no records are in it: who has them puts them into its inputs folder',
    `${seconds.toFixed(1)} s; rebuild it with: scarp rebuild ${out}`,
  ]
}
