/** `scarp rebuild`: every exhibit of a replication folder again, compared with what is in it. */
import { dirname, join, resolve } from 'node:path'
import type { Problem } from '../problem.js'
import { type ExitCode, exitCodes } from './exitCodes.js'
import { factsOf, outFolderProblems } from './outFolder.js'
import { changedFiles, changeOf, filesUnder, type Manifest, readManifest } from './pack.js'
import { progressLine } from './progress.js'
import { makeAgain, packStudy } from './rebuildFrom.js'
import { mendResultsFolder, writeResultsFolder } from './resultsFolder.js'
import { sayProblems } from './say.js'
import { packageVersion } from './version.js'

export interface RebuildOptions {
  readonly out?: string
  /** The folder that the study's paths are relative to, where it is not in the replication folder. */
  readonly inputs?: string
  readonly quiet?: boolean
  readonly workers?: number
}

/** Nothing is written into the replication folder. 0 where every exhibit is the same, byte for byte. */
export async function rebuild(folder: string, options: RebuildOptions): Promise<ExitCode> {
  const out = options.out ?? `${resolve(folder).split(/[\\/]/).at(-1)}-rebuilt`
  const manifest = await readManifest(folder)
  if (!manifest.ok) return refuse(manifest.problems)
  const ofPack = filesUnder(folder).map((file) => resolve(folder, file))
  const problems = [...outFolderProblems(out, ofPack), ...(await changedFiles(folder, manifest.value))]
  if (problems.length > 0) return refuse(problems)
  mendResultsFolder(out)
  const study = await packStudy(folder, manifest.value, options.inputs)
  if (!study.ok) return refuse(study.problems)
  const inputs = await inputsThere(study.value.file, manifest.value, options.inputs !== undefined)
  if (inputs.problems.length > 0) return refuse(inputs.problems)
  const { progress, clear } = progressLine(options.quiet === true)
  const made = await makeAgain({
    folder,
    manifest: manifest.value,
    study: study.value,
    hasInputs: inputs.absent.length === 0,
    workers: options.workers,
    progress,
  })
  clear()
  if (!made.ok) return refuse(made.problems)
  await writeResultsFolder(out, made.value.write)
  const different = await differences(out, folder, manifest.value)
  if (!options.quiet) {
    const missing = inputs.absent.length > 0 ? [`without ${inputs.absent.join(', ')}, which the study reads`] : []
    const lines = [
      manifest.value.title,
      ...missing,
      ...made.value.words,
      sameWords(out, manifest.value, different.length),
    ]
    process.stdout.write(`${lines.join('\n')}\n`)
  }
  if (different.length === 0 && made.value.problems.length === 0) return exitCodes.done
  return refuse([...made.value.problems, ...different])
}

function refuse(problems: readonly Problem[]): ExitCode {
  sayProblems(problems)
  return exitCodes.unusable
}

/** Which inputs are not there; one that changed is a problem, and where a folder is named so is one that is absent. */
async function inputsThere(study: string, { inputs }: Manifest, isAsked: boolean) {
  const paths = inputs.map(({ file }) => join(dirname(study), file))
  const there = paths.map((path) => factsOf(path) !== undefined)
  const changes = await Promise.all(
    paths.map((path, i) => (there[i] || isAsked ? changeOf(path, inputs[i].sha256) : undefined)),
  )
  const problems = changes.flatMap((found, i): Problem[] => {
    const todo = 'give the file that the results came from'
    return found === undefined ? [] : [{ file: paths[i], what: 'input', found, todo }]
  })
  return { absent: inputs.filter((_, i) => !there[i]).map(({ file }) => file), problems }
}

/** Both folders file by file, whatever they hold. */
async function differences(out: string, folder: string, { files, version }: Manifest): Promise<Problem[]> {
  const published = new Map(
    files.filter(({ file }) => file.startsWith('results/')).map(({ file, sha256 }) => [file.slice(8), sha256]),
  )
  const now = packageVersion()
  const todo =
    now === version
      ? `see what moved: scarp compare ${join(folder, 'results')} ${out}`
      : `it was made by scarp ${version}, and this is ${now}: take that version`
  const problem = (file: string, found: string): Problem => ({ file: join(out, file), what: 'rebuilt', found, todo })
  const made = filesUnder(out)
  const problems: Problem[] = []
  for (const file of made) {
    const sha256 = published.get(file)
    if (sha256 === undefined) problems.push(problem(file, 'no such file was published'))
    else if (await changeOf(join(out, file), sha256)) problems.push(problem(file, 'it differs from the published file'))
  }
  const gone = [...published.keys()].filter((file) => !made.includes(file))
  return [...problems, ...gone.map((file) => problem(file, 'it was published, and was not made again'))]
}

function sameWords(out: string, { files }: Manifest, different: number): string {
  if (different === 0) return `every file is the published one, byte for byte: ${out}`
  const published = files.filter(({ file }) => file.startsWith('results/')).length
  return `${Math.max(0, published - different)} of ${published} files are the published ones, byte for byte: ${out}`
}
