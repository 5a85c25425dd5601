/**
 * A study and everything it names, read from files. Every file is read before anything is refused,
 * so that one run shows all that is wrong. Nothing here writes.
 */
import { dirname, resolve } from 'node:path'
import type { AnalysisInputs, LayerInput, Progress } from '../analyze.js'
import type { Checked, Problem } from '../problem.js'
import type { Table } from '../records/index.js'
import type { Study } from '../study/index.js'
import { readJsonFile, readTextFile } from './textFile.js'

const mostStudyBytes = 4_000_000
/** A JavaScript string holds 2^29 - 24 characters. */
const mostLayerBytes = 500_000_000

export interface StudyFile {
  readonly study: Study
  /** The study file as the user named it. */
  readonly file: string
  /** Absolute paths of the study file and of every file it names. */
  readonly paths: readonly string[]
}

export async function readStudyFile(file: string): Promise<Checked<StudyFile>> {
  const text = await readTextFile(file, { shownAs: file, askedBy: 'study', mostBytes: mostStudyBytes })
  if (!text.ok) return text
  const { readStudy } = await import('../study/index.js')
  const study = readStudy(text.value.text, file)
  if (!study.ok) return study
  const named = namedFiles(study.value)
  const paths = [resolve(file), ...named.map((name) => resolve(dirname(file), name))]
  return { ok: true, value: { study: study.value, file, paths } }
}

/** Every file that a study names, as written there. */
function namedFiles(study: Study): string[] {
  const files = [study.records.file]
  const { line } = study
  if (line.kind === 'score' && line.cutoff.kind === 'schedule') files.push(line.cutoff.file)
  if (line.kind === 'border') files.push(line.zones, ...line.barriers.map((barrier) => barrier.file))
  return files
}

/** Records, schedule, zones and barriers, side by side; the problems of all of them. */
export async function readInputs(from: StudyFile, progress?: Progress): Promise<Checked<AnalysisInputs>> {
  const { study } = from
  const { line } = study
  const { wantedColumns } = await import('../analyze.js')
  const wanted = wantedColumns(study)
  const at = (name: string) => resolve(dirname(from.file), name)
  const { readTable } = await import('../records/files.js')

  progress?.('reading', 0, 1)
  const table = readTable(at(study.records.file), {
    wanted: wanted.records,
    keep: study.records.keep,
    keepAskedBy: 'records.keep',
    shownAs: study.records.file,
    positionFromGeometry: line.kind === 'border' && study.records.position === undefined,
  })
  const schedule =
    line.kind === 'score' && line.cutoff.kind === 'schedule'
      ? readTable(at(line.cutoff.file), { wanted: wanted.schedule ?? [], shownAs: line.cutoff.file })
      : undefined
  const zones = line.kind === 'border' ? readLayer(at(line.zones), line.zones, 'line.zones') : undefined
  const barriers =
    line.kind === 'border'
      ? line.barriers.map((barrier, i) => readLayer(at(barrier.file), barrier.file, `line.barriers[${i}].file`))
      : []

  const problems: Problem[] = []
  const inputs = {
    table: keep(await table, problems),
    schedule: schedule && keep(await schedule, problems),
    zones: zones && keep(await zones, problems),
    barriers: (await Promise.all(barriers)).map((barrier) => keep(barrier, problems)),
  }
  progress?.('reading', 1, 1)
  if (problems.length > 0) return { ok: false, problems }
  return { ok: true, value: inputs as { table: Table; schedule?: Table; zones?: LayerInput; barriers: LayerInput[] } }
}

export async function readLayer(path: string, shownAs: string, askedBy: string): Promise<Checked<LayerInput>> {
  const layer = await readJsonFile(path, { shownAs, askedBy, mostBytes: mostLayerBytes })
  if (!layer.ok) return layer
  return { ok: true, value: { file: shownAs, content: layer.value.content, sha256: layer.value.sha256 } }
}

function keep<T>(checked: Checked<T>, problems: Problem[]): T | undefined {
  if (checked.ok) return checked.value
  problems.push(...checked.problems)
  return undefined
}
