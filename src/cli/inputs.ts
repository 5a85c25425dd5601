/**
 * A study and everything it names, read from files. Every file is read before anything is refused,
 * so that one run shows all that is wrong. Nothing here writes.
 */
import { dirname, resolve } from 'node:path'
import type { AnalysisInputs, LayerInput, Progress } from '../analyze.js'
import { type Box, boxOf, extentOf, filesBeside, readTextFile, swappedAxes } from '../layers/index.js'
import type { Checked, Problem } from '../problem.js'
import { type Column, numbersOf, type Table, type WantedColumn } from '../records/index.js'
import type { LayerSource, Study } from '../study/index.js'
import { readRecords } from './records.js'

export const mostStudyBytes = 4_000_000

export interface StudyFile {
  readonly study: Study
  /** The study file as the user named it. */
  readonly file: string
  /** Absolute paths of the study file and of every file it names. */
  readonly paths: readonly string[]
  /** Those of them that `measure` wrote and may write anew: named by `line.measured` and nothing else. */
  readonly placements: readonly string[]
}

export async function readStudyFile(file: string): Promise<Checked<StudyFile>> {
  const text = await readTextFile(file, { shownAs: file, askedBy: 'study', mostBytes: mostStudyBytes })
  return text.ok ? studyFileOf(text.value.text, file) : text
}

/** A study from its text; paths in it are relative to `file`, whether or not that is there. */
export async function studyFileOf(text: string, file: string): Promise<Checked<StudyFile>> {
  const { readStudy } = await import('../study/index.js')
  const study = readStudy(text, file)
  if (!study.ok) return study
  const studies = [study.value, ...study.value.variants.map((variant) => variant.study)]
  const pathsOf = (files: (study: Study) => string[]) => [
    ...new Set(studies.flatMap(files).map((name) => resolve(dirname(file), name))),
  ]
  const named = pathsOf(namedFiles)
  const others = [resolve(file), ...named, ...named.flatMap(filesBeside)]
  const placements = pathsOf(placementFiles).filter((path) => !others.includes(path))
  return { ok: true, value: { study: study.value, file, paths: [...others, ...placements], placements } }
}

/** Every file that a study names but those of its placement, as written there. */
function namedFiles(study: Study): string[] {
  const files = [study.records.file]
  const { line, pooling } = study
  const { target } = pooling
  if (line.kind === 'score' && line.cutoff.kind === 'schedule') files.push(line.cutoff.file)
  if (typeof target === 'object' && 'shares' in target) files.push(target.shares)
  if (line.kind === 'border') files.push(...[line.zones, ...line.barriers, ...line.overlaps].map(({ file }) => file))
  return files
}

function placementFiles({ line }: Study): string[] {
  if (line.kind !== 'border' || line.measured === undefined) return []
  return [line.measured, `${line.measured}.lines`]
}

export interface ReadOptions {
  readonly progress?: Progress
  /** Every column of the records, not the study's alone. */
  readonly all?: boolean
}

/** Records, schedule, shares, zones and barriers; the problems of all of them. */
export async function readInputs(from: StudyFile, options: ReadOptions): Promise<Checked<AnalysisInputs>> {
  const { study } = from
  const { progress } = options
  progress?.('reading', 0, 1)
  const problems: Problem[] = []
  const found = await readParts(from, options, problems)
  progress?.('reading', 1, 1)
  if (problems.length === 0) return { ok: true, value: { ...found, table: found.table! } }
  return { ok: false, problems: [...problems, ...(await otherProblems(study, found))] }
}

interface Parts {
  readonly table?: Table
  readonly schedule?: Table
  readonly shares?: Table
  readonly zones?: LayerInput
  readonly barriers: readonly LayerInput[]
  readonly overlaps: readonly LayerInput[]
}

/** What could be read; the problems of the rest are added to `problems` in the order of the study. */
async function readParts({ study, file }: StudyFile, { all }: ReadOptions, problems: Problem[]): Promise<Parts> {
  const { line, records, pooling } = study
  const at = (name: string) => resolve(dirname(file), name)
  const keep = <T>(checked: Checked<T>): T | undefined => {
    if (checked.ok) return checked.value
    problems.push(...checked.problems)
    return undefined
  }
  const { wantedColumns } = await import('../analyze.js')
  const { headerOf, readTable } = await import('../records/files.js')
  const scheduleFile = line.kind === 'score' && line.cutoff.kind === 'schedule' ? line.cutoff.file : undefined
  const header = scheduleFile === undefined ? undefined : await headerOf(at(scheduleFile), scheduleFile)
  const wanted = wantedColumns(study, header?.ok ? header.value : [])
  const table = keep(
    await readRecords(at(records.file), study, {
      wanted: wanted.records,
      keep: records.keep,
      keepAskedBy: 'records.keep',
      shownAs: records.file,
      positionFromGeometry: line.kind === 'border' && records.position === undefined,
      all,
    }),
  )
  const schedule =
    scheduleFile === undefined || header === undefined
      ? undefined
      : keep(
          header.ok
            ? await readTable(at(scheduleFile), { wanted: wanted.schedule ?? [], shownAs: scheduleFile })
            : header,
        )
  const { target } = pooling
  const shares =
    typeof target === 'object' && 'shares' in target
      ? keep(
          await readTable(at(target.shares), {
            wanted: [
              ...target.line.map((name) => ({ name, kind: 'label' as const, askedBy: 'pooling.target.line' })),
              { name: target.value, kind: 'number', askedBy: 'pooling.target.value' },
            ],
            shownAs: target.shares,
          }),
        )
      : undefined
  const tables = { table, schedule, shares }
  if (line.kind !== 'border') return { ...tables, barriers: [], overlaps: [] }
  const { readGeoLayer } = await import('../layers/index.js')
  const units = table && (await unitsBox(study, table))
  const read = async (source: LayerSource, askedBy: string): Promise<LayerInput | undefined> => {
    const layer = keep(await readGeoLayer(at(source.file), { ...source, shownAs: source.file, askedBy, units }))
    return layer && { file: source.file, ...layer }
  }
  const zones = await read(line.zones, 'line.zones')
  problems.push(...swapProblems(study, zones, units))
  const readAll = async (key: 'barriers' | 'overlaps') => {
    const layers: LayerInput[] = []
    for (const [i, source] of line[key].entries()) {
      const layer = await read(source, `line.${key}[${i}].file`)
      if (layer) layers.push(layer)
    }
    return layers
  }
  return { ...tables, zones, barriers: await readAll('barriers'), overlaps: await readAll('overlaps') }
}

async function unitsBox(study: Study, table: Table): Promise<Box | undefined> {
  const { positionColumns } = await import('../analyze.js')
  const [x, y] = positionColumns(study).map((name) => numbersOf(table, name))
  return boxOf(x, y)
}

/** Units that would meet the zones with their axes swapped: one of the two files has them the wrong way round. */
function swapProblems({ records }: Study, zones: LayerInput | undefined, units: Box | undefined): Problem[] {
  const { features } = (zones?.content ?? {}) as { features?: unknown }
  const box = Array.isArray(features) ? extentOf(features) : undefined
  if (!zones || !box || !units || !swappedAxes(box, units)) return []
  const found = `they meet ${zones.file} only with longitude and latitude swapped`
  const todo = 'write the longitude column before the latitude column, or longitude before latitude in the zones'
  return [{ file: records.file, what: 'records.position', found, todo }]
}

/** Problems of the parts that could be read, where others could not: they are placed with no units at all. */
async function otherProblems(
  study: Study,
  { schedule, zones, barriers, overlaps }: Parts,
): Promise<readonly Problem[]> {
  const { line } = study
  const { placeStudy, wantedColumns } = await import('../analyze.js')
  const table = emptyTable(study.records.file, wantedColumns(study).records)
  if (line.kind === 'border' && zones !== undefined) {
    const read = (key: 'barriers' | 'overlaps', layers: readonly LayerInput[]) =>
      layers.map((layer) => line[key].find(({ file }) => file === layer.file)!)
    const known = { barriers: read('barriers', barriers), overlaps: read('overlaps', overlaps) }
    const placed = placeStudy({ ...study, line: { ...line, ...known } }, { table, zones, barriers, overlaps })
    return placed.ok ? [] : placed.problems
  }
  if (schedule !== undefined) {
    const placed = placeStudy(study, { table, schedule })
    return placed.ok ? [] : placed.problems
  }
  return []
}

function emptyTable(file: string, wanted: readonly WantedColumn[]): Table {
  const columns = wanted.map(({ name, kind }): [string, Column] => [
    name,
    kind === 'number'
      ? { kind, name, values: new Float64Array(0) }
      : { kind, name, codes: new Int32Array(0), labels: [] },
  ])
  return { file, rowsRead: 0, rows: 0, lineOfRow: new Int32Array(0), columns: new Map(columns), sha256: '' }
}
