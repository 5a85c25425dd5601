/** `scarp measure`: only the placement, unit by unit, as a table. */
import { randomBytes } from 'node:crypto'
import { open, rename, rm } from 'node:fs/promises'
import { basename, dirname, extname, join, resolve } from 'node:path'
import type { Placed } from '../analyze.js'
import type { Checked, Problem } from '../problem.js'
import type { Table } from '../records/index.js'
import type { Study } from '../study/index.js'
import { type ExitCode, exitCodes } from './exitCodes.js'
import { withGround } from './ground.js'
import { readInputs } from './inputs.js'
import { measuredColumns } from './measuredColumns.js'
import { measureStudy } from './measureStudy.js'
import { factsOf, realPath } from './outFolder.js'
import { progressLine } from './progress.js'
import { removeWhenStopped } from './resultsFolder.js'
import { sayProblems } from './say.js'

export interface MeasureOptions {
  readonly zones: string
  readonly position?: string
  readonly zoneName: string
  readonly treated?: string
  readonly dose?: string
  readonly unit: string
  readonly out: string
  readonly workers?: number
}

export async function measure(records: string, options: MeasureOptions): Promise<ExitCode> {
  const { progress, clear } = progressLine(false)
  const study = await measureStudy(records, options)
  const problems = [...(study.ok ? [] : study.problems), ...outFileProblems(options.out, [records, options.zones])]
  if (!study.ok || problems.length > 0) return refuse(problems)
  const inputs = await readInputs({ study: study.value, file: './measure', paths: [] }, { progress, all: true })
  const { placeStudy } = await import('../analyze.js')
  const ready = inputs.ok ? await withGround(study.value, inputs.value, { workers: options.workers, progress }) : inputs
  const placed: Checked<Placed> = ready.ok ? placeStudy(study.value, ready.value, progress) : ready
  clear()
  if (!inputs.ok || !placed.ok) return refuse(placed.ok ? [] : placed.problems.map(inOptions))
  const { table } = inputs.value
  await writeMeasured(options.out, study.value, table, placed.value)
  const reasons = [...placed.value.setAside].map(([reason, units]) => `, ${units} ${reason}`).join('')
  process.stdout.write(`${placed.value.units} of ${table.rows} units placed${reasons}: ${options.out}\n`)
  return exitCodes.done
}

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
async function writeMeasured(out: string, study: Study, table: Table, placed: Placed): Promise<void> {
  const { headerOf, writeTable } = await import('../records/files.js')
  const { positionColumns } = await import('../analyze.js')
  const [lon, lat] = positionColumns(study)
  const header = await headerOf(study.records.file, study.records.file)
  const columns = measuredColumns(inOrder(table, header.ok ? header.value : []), placed)
  const target = realPath(resolve(out))
  const name = `.${basename(target)}-${process.pid}-${randomBytes(4).toString('hex')}${extname(target)}`
  const stage = join(dirname(target), name)
  const letGo = removeWhenStopped(stage)
  try {
    await writeTable(stage, columns, table.rows, { lon, lat })
    const handle = await open(stage, 'r')
    await handle.sync()
    await handle.close()
    await rename(stage, target)
  } finally {
    await rm(stage, { force: true })
    letGo()
  }
}

/** The table with its columns in the order of the file; positions read from geometry come first. */
function inOrder(table: Table, header: readonly string[]): Table {
  const columns = [...table.columns].sort(([a], [b]) => header.indexOf(a) - header.indexOf(b))
  return { ...table, columns: new Map(columns) }
}

function outFileProblems(out: string, inputs: readonly string[]): Problem[] {
  const problem = (what: string, found: string, todo: string): Problem[] => [{ file: out, what, found, todo }]
  if (!/\.(csv|parquet|geojson)$/i.test(out))
    return problem('--out', 'the name does not say what to write', 'end it in .csv, .parquet or .geojson')
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
