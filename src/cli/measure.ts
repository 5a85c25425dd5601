/** `scarp measure`: only the placement, unit by unit, as a table. */
import { randomBytes } from 'node:crypto'
import { open, rename, rm } from 'node:fs/promises'
import { basename, dirname, extname, join, resolve } from 'node:path'
import type { AnalysisInputs, Placed } from '../analyze.js'
import { pointLayer } from '../layers/index.js'
import type { Checked, Problem } from '../problem.js'
import { numbersOf, type Table } from '../records/index.js'
import { type ExitCode, exitCodes } from './exitCodes.js'
import { linesFileOf, writeLinesFile } from './frozen.js'
import { withGround } from './ground.js'
import { readInputs, readStudyFile, type StudyFile } from './inputs.js'
import { measuredColumns } from './measuredColumns.js'
import { measureStudy } from './measureStudy.js'
import { factsOf, realPath } from './outFolder.js'
import { progressLine } from './progress.js'
import { removeWhenStopped } from './resultsFolder.js'
import { sayProblems } from './say.js'

export interface MeasureOptions {
  readonly zones?: string
  readonly position?: string
  readonly zoneName?: string
  readonly treated?: string
  readonly dose?: string
  readonly unit?: string
  readonly out: string
  readonly workers?: number
  readonly runnerUp?: boolean
  /** Commander's name for --without-coordinates. */
  readonly withoutCoordinates?: boolean
}

/** Distances from a known border leave a strip, and from two borders a few places. */
const stillPlaced =
  'no coordinates are in it, but whoever has the zones learns from the distances how near to the border each unit is, and with runners-up where most are; other columns of the records are as they were'

/** `first`: a table of units, with zones beside it, or a study file that names both. */
export async function measure(first: string, options: MeasureOptions): Promise<ExitCode> {
  const { progress, clear } = progressLine(false)
  // records may be lines of JSON
  const isStudy = /\.ya?ml$/i.test(first) || (/\.json$/i.test(first) && options.zones === undefined)
  const from = isStudy ? await readStudyFile(first) : await studyOfOptions(first, options)
  const read = from.ok && isStudy ? readPaths(from.value) : [first, ...(options.zones ? [options.zones] : [])]
  const problems = [
    ...(from.ok ? [] : from.problems),
    ...(isStudy ? wordsBesideStudy(options) : []),
    ...outFileProblems(options.out, read, options.withoutCoordinates === true),
    ...(from.ok && from.value.study.line.kind !== 'border' ? [noBorderProblem(first)] : []),
  ]
  if (!from.ok || problems.length > 0) return refuse(problems)
  const { study } = from.value
  const inputs = await readInputs(from.value, { progress, all: true })
  const { placeStudy } = await import('../analyze.js')
  const ready = inputs.ok ? await withGround(study, inputs.value, { workers: options.workers, progress }) : inputs
  const placed: Checked<Placed> = ready.ok ? placeStudy(study, ready.value, progress) : ready
  clear()
  if (!inputs.ok || !placed.ok) return refuse(placed.ok ? [] : placed.problems.map(isStudy ? asItIs : inOptions))
  await writeMeasured(from.value, options, inputs.value, placed.value)
  const { table } = inputs.value
  const reasons = [...placed.value.setAside].map(([reason, units]) => `, ${units} ${reason}`).join('')
  process.stdout.write(`${placed.value.units} of ${table.rows} units placed${reasons}: ${options.out}\n`)
  process.stdout.write(
    options.withoutCoordinates === true
      ? `${stillPlaced}\n`
      : `the border it was measured against: ${linesFileOf(options.out)}\n`,
  )
  return exitCodes.done
}

async function studyOfOptions(records: string, options: MeasureOptions): Promise<Checked<StudyFile>> {
  const study = await measureStudy(records, options)
  return study.ok ? { ok: true, value: { study: study.value, file: './measure', paths: [], placements: [] } } : study
}

/** The study's own placement is not read, and may be written anew. */
function readPaths({ paths, placements }: StudyFile): string[] {
  return paths.filter((path) => !placements.includes(path))
}

/** A study says all of that itself. */
function wordsBesideStudy(options: MeasureOptions): Problem[] {
  const given = (['zones', 'position', 'zoneName', 'treated', 'dose', 'unit'] as const).filter(
    (key) => options[key] !== undefined,
  )
  return given.map((key) => ({
    file: 'scarp',
    what: `--${key === 'zoneName' ? 'zone-name' : key}`,
    found: 'given with a study file',
    todo: 'write it in the study',
  }))
}

function noBorderProblem(file: string): Problem {
  return { file, what: 'line', found: 'no border between zones', todo: 'measure a study with zones' }
}

const asItIs = (problem: Problem) => problem

/** The keys of a study under the names they have here. */
function inOptions(problem: Problem): Problem {
  const what = problem.what
    .replace(/^records\.position/, '--position')
    .replace(/^(line\.)?zones/, '--zones')
    .replace(/^(line\.)?treated/, '--treated')
    .replace(/^(line\.)?zone_name/, '--zone-name')
  return { ...problem, what }
}

function refuse(problems: readonly Problem[]): ExitCode {
  sayProblems(problems)
  return exitCodes.unusable
}

/** Writes beside the target and renames, so that an earlier file stays whole until the new one is. */
async function writeMeasured(
  { study, file }: StudyFile,
  { out, runnerUp, withoutCoordinates }: MeasureOptions,
  inputs: AnalysisInputs,
  placed: Placed,
): Promise<void> {
  const { table } = inputs
  const { headerOf, writeTable } = await import('../records/files.js')
  const { positionColumns } = await import('../analyze.js')
  const { linesOf, runnerUps } = await import('../borders/index.js')
  const { known } = placed
  if (!known) throw new Error('nothing was measured')
  const [lon, lat] = positionColumns(study)
  const records = resolve(dirname(file), study.records.file)
  const header = pointLayer.test(records) ? undefined : await headerOf(records, study.records.file)
  const { position } = study.records
  const columns = measuredColumns(inOrder(table, header?.ok ? header.value : []), placed, {
    ...(runnerUp
      ? { runnerUp: runnerUps(known.border, known.measured, numbersOf(table, lon), numbersOf(table, lat)) }
      : {}),
    ...(withoutCoordinates
      ? { withoutCoordinates: [lon, lat, ...(typeof position === 'string' ? [position] : [])] }
      : {}),
  })
  const target = realPath(resolve(out))
  const name = `.${basename(target)}-${process.pid}-${randomBytes(4).toString('hex')}${extname(target)}`
  const stage = join(dirname(target), name)
  const letGo = removeWhenStopped(stage)
  const letGoLines = removeWhenStopped(linesFileOf(stage))
  try {
    await writeTable(stage, columns, table.rows, withoutCoordinates ? undefined : { lon, lat })
    if (!withoutCoordinates) await writeLinesFile(stage, study, inputs, linesOf(known.border))
    const handle = await open(stage, 'r')
    await handle.sync()
    await handle.close()
    await rename(stage, target)
    if (!withoutCoordinates) await rename(linesFileOf(stage), linesFileOf(target))
  } finally {
    await rm(stage, { force: true })
    await rm(linesFileOf(stage), { force: true })
    letGo()
    letGoLines()
  }
}

/** The table with its columns in the order of the file; positions read from geometry come first. */
function inOrder(table: Table, header: readonly string[]): Table {
  const columns = [...table.columns].sort(([a], [b]) => header.indexOf(a) - header.indexOf(b))
  return { ...table, columns: new Map(columns) }
}

function outFileProblems(out: string, inputs: readonly string[], withoutCoordinates: boolean): Problem[] {
  const problem = (what: string, found: string, todo: string): Problem[] => [{ file: out, what, found, todo }]
  if (!/\.(csv|parquet|geojson)$/i.test(out))
    return problem('--out', 'the name does not say what to write', 'end it in .csv, .parquet or .geojson')
  if (withoutCoordinates && /\.geojson$/i.test(out))
    return problem('--without-coordinates', 'a GeoJSON file is made of them', 'end --out in .csv or .parquet')
  const facts = factsOf(out)
  if (facts?.isDirectory()) return problem('--out', 'this is a folder', 'give the name of a file')
  const isSame = (input: string) => {
    const other = factsOf(input)
    return facts !== undefined && other !== undefined && facts.ino === other.ino && facts.dev === other.dev
  }
  if (inputs.some(isSame)) return problem('--out', 'it is one of the files read', 'choose another name')
  if (!factsOf(dirname(resolve(out)))?.isDirectory())
    return problem('--out', 'there is no such folder', 'make the folder first')
  return []
}
