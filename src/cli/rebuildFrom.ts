/** The ways to make the exhibits of a replication folder again: from the records, from its units, from its numbers. */
import { join } from 'node:path'
import type { AnalysisInputs, Progress } from '../analyze.js'
import { readJsonFile, readTextFile } from '../layers/index.js'
import type { Checked, Problem } from '../problem.js'
import type { ComparedRuns, Results } from '../results.js'
import { mostStudyBytes, readStudyFile, type StudyFile, studyFileOf } from './inputs.js'
import { analyzeStudy, type Clock, type Drawable, readAllInputs, writeDrawn } from './job.js'
import type { Manifest } from './pack.js'
import { readResultsFolder } from './readResults.js'
import { renamedLines } from './renamedLines.js'
import type { WriteFile } from './resultsFolder.js'
import { resultsJson } from './resultsJson.js'

export interface Pack {
  readonly folder: string
  readonly manifest: Manifest
  /** As given, with its inputs where they are looked for. */
  readonly study: StudyFile
  readonly hasInputs: boolean
  readonly workers?: number
  readonly progress?: Progress
}

export interface Made {
  readonly write: (write: WriteFile) => Promise<void>
  /** How it was made, for the terminal. */
  readonly words: readonly string[]
  /** Numbers that are not the published ones. */
  readonly problems: readonly Problem[]
}

const mostDrawnBytes = 500_000_000

/** The study as given, its paths relative to `inputs` or else to where it lies in the folder. */
export async function packStudy(folder: string, { study }: Manifest, inputs?: string): Promise<Checked<StudyFile>> {
  const path = join(folder, study)
  const text = await readTextFile(path, { shownAs: path, askedBy: 'study', mostBytes: mostStudyBytes })
  if (!text.ok) return text
  return studyFileOf(text.value.text, inputs === undefined ? path : join(inputs, study.split('/').at(-1) as string))
}

/** From the records where all of them are there; else from the units, and where these do not give every byte, from the numbers. */
export async function makeAgain(pack: Pack): Promise<Checked<Made>> {
  if (pack.hasInputs) return fromRecords(pack)
  const published = await readResultsFolder(join(pack.folder, 'results'))
  if (!published.ok) return published
  const { results } = published.value
  if (pack.manifest.units === undefined) return fromNumbers(pack, results, [])
  const again = await fromUnits(pack, results)
  if (!again.ok) return again
  if (resultsJson(again.value.results) === resultsJson(results)) {
    const words = ['estimated and drawn again from units/units.csv: every number is the published one to the last bit']
    return { ok: true, value: { words, problems: [], write: (write) => writeDrawn(write, pack.study, again.value) } }
  }
  const { words, problems } = await comparedNumbers(pack, results, again.value.results)
  const drawn = await fromNumbers(pack, results, words)
  return drawn.ok ? { ok: true, value: { ...drawn.value, problems } } : drawn
}

/** The time of the published run, so that every byte can be the same. */
function clockOf({ started, seconds }: Manifest): Clock {
  return { started, seconds: () => seconds }
}

async function fromRecords({ manifest, study, workers, progress }: Pack): Promise<Checked<Made>> {
  const inputs = await readAllInputs(study, progress)
  if (!inputs.ok) return inputs
  const job = await analyzeStudy(study, inputs.value, { clock: clockOf(manifest), workers, progress })
  if (!job.ok) return job
  const { units: _, ...drawable } = job.value.analysis
  const words = ['the inputs are those of the published run: estimated and drawn again from them']
  return { ok: true, value: { words, problems: [], write: (write) => writeDrawn(write, study, drawable) } }
}

/** Estimated from the units; what is said of the records is what the published results say of them. */
async function fromUnits(
  { folder, manifest, workers, progress }: Pack,
  published: Results,
): Promise<Checked<Drawable>> {
  const study = await readStudyFile(join(folder, 'units', 'study.yaml'))
  if (!study.ok) return study
  const inputs = await readAllInputs(study.value, progress)
  if (!inputs.ok) return inputs
  const named = inputsAsPublished(inputs.value, published)
  const job = await analyzeStudy(study.value, named, { clock: clockOf(manifest), workers, progress })
  return job.ok ? { ok: true, value: job.value.analysis } : job
}

/** Tables come first among the inputs of results: the records, the schedule, the shares. */
function inputsAsPublished(inputs: AnalysisInputs, { inputs: files, placement }: Results): AnalysisInputs {
  const rest = [...files]
  const named = <T extends { readonly file: string; readonly sha256: string }>(table: T): T => {
    const { file, sha256 } = rest.shift() ?? table
    return { ...table, file, sha256 }
  }
  const { schedule, shares } = inputs
  return {
    ...inputs,
    table: { ...named(inputs.table), rowsRead: placement.read },
    ...(schedule ? { schedule: named(schedule) } : {}),
    ...(shares ? { shares: named(shares) } : {}),
  }
}

/** Far under what any reader sees, and over what sums in another order differ by. */
const rounding = 1e-9

/** The numbers estimated from the units beside the published ones. */
async function comparedNumbers({ folder, manifest }: Pack, published: Results, made: Results) {
  const { compareRuns } = await import('../analyze.js')
  const { lines = [] } = manifest.units ?? {}
  const second = { results: renamedLines(made, lines), options: {} }
  const compared = compareRuns({ results: published, options: {} }, second)
  return told(compared, manifest.units?.altered === true, join(folder, 'results', 'results.json'))
}

function told(compared: ComparedRuns, isAltered: boolean, file: string): { words: string[]; problems: Problem[] } {
  const ofOutcomes = compared.moved.filter(({ path }) => path[0] === 'outcomes')
  const isRounding = ({ first, second, difference, standard_error }: ComparedRuns['moved'][number]) =>
    Math.abs(difference) <= rounding * Math.max(Math.abs(first), Math.abs(second), standard_error ?? 0)
  const moved = ofOutcomes.filter((one) => !isRounding(one))
  const rounded = ofOutcomes.length - moved.length
  const absent = compared.only.first.filter(({ value }) => typeof value === 'number').length
  const counts =
    `estimated again from units/units.csv: ${compared.equal} numbers are the published ones to the last bit, ` +
    `${rounded} but for rounding, ${moved.length} are not; ${absent} need what is not in the folder`
  // what README.md says the units lack changes the estimates: nothing is wrong then
  if (isAltered) return { words: [`${counts}, and without it others are not the same`], problems: [] }
  const problems = moved.map(({ number, first, second }) => ({
    file,
    what: number,
    found: `published ${first}, and ${second} from units/units.csv`,
    todo: 'compare the version of the program and of Node.js with those in replication.json',
  }))
  return { words: [counts], problems }
}

/** Drawn from results.json and drawn.json, with no estimate made. */
async function fromNumbers(
  { folder, study }: Pack,
  results: Results,
  words: readonly string[],
): Promise<Checked<Made>> {
  const file = join(folder, 'drawn.json')
  const drawn = await readJsonFile(file, { shownAs: file, askedBy: 'replication', mostBytes: mostDrawnBytes })
  if (!drawn.ok) return drawn
  const drawable = { ...(drawn.value.content as Omit<Drawable, 'results'>), results }
  const made = [...words, 'drawn again from results.json and drawn.json']
  return { ok: true, value: { words: made, problems: [], write: (write) => writeDrawn(write, study, drawable) } }
}
