/**
 * Geometry kept in files: `measure` writes a `.lines` file beside its table, and a study that names the table takes its
 * geometry from there while zones, records and options are those it was made from.
 */
import { createHash } from 'node:crypto'
import { createReadStream } from 'node:fs'
import { writeFile } from 'node:fs/promises'
import { dirname, join, resolve } from 'node:path'
import type { AnalysisInputs } from '../analyze.js'
import type { BorderOptions, Lines, Zones } from '../borders/index.js'
import { readTextFile } from '../layers/index.js'
import type { Checked, Problem } from '../problem.js'
import { labelsOf, numbersOf } from '../records/index.js'
import type { GeometryUsed } from '../results.js'
import type { BorderLine, Study } from '../study/index.js'
import type { StudyFile } from './inputs.js'
import { severalZones } from './measuredColumns.js'
import { factsOf } from './outFolder.js'
import { packageVersion } from './version.js'

const mostLinesBytes = 500_000_000

/** What a `.lines` file holds: a border, what it was made from, and the table of units measured against it. */
interface LinesFile extends MadeFrom {
  readonly format: 'scarp-lines/1'
  readonly version: string
  readonly placement: { readonly sha256: string; readonly rows: number }
  /** SHA-256 of `lines` as JSON. */
  readonly lines_sha256: string
  readonly lines: Lines
}

/** Everything that the border and the distances of the units follow from. */
interface MadeFrom {
  readonly zones: { readonly file: string; readonly sha256: string }
  readonly records: { readonly file: string; readonly sha256: string; readonly read: Readonly<Record<string, unknown>> }
  readonly options: Readonly<Record<string, unknown>>
}

export const linesFileOf = (placement: string) => `${placement}.lines`

function madeFrom({ records }: Study, line: BorderLine, { zones, table }: AnalysisInputs): MadeFrom {
  const { file, keep = null, position = null, crs = null, layer = null } = records
  const options = optionsOf(line)
  return {
    zones: { file: line.zones.file, sha256: zones?.sha256 ?? '' },
    records: { file, sha256: table.sha256, read: { keep, position, crs, layer } },
    options: {
      zone_name: line.zoneName,
      layer: line.zones.layer ?? null,
      crs: line.zones.crs ?? null,
      treated: options.treated ?? null,
      dose: options.dose ?? null,
      outside: line.outside,
      snap_m: options.snapMetres,
      piece_m: options.pieceMetres,
    },
  }
}

const metresPerUnit = { m: 1, km: 1000, ft: 0.3048, mi: 1609.344 } as const

function optionsOf(line: BorderLine): BorderOptions {
  const { treated, dose, outside, snap, piece, unit } = line
  return { treated, dose, outside, snapMetres: snap, pieceMetres: piece * metresPerUnit[unit] }
}

/** Writes the `.lines` file of a placement that has just been written. */
export async function writeLinesFile(
  placement: string,
  study: Study,
  inputs: AnalysisInputs,
  lines: Lines,
): Promise<void> {
  if (study.line.kind !== 'border') throw new Error('only a border has lines to keep')
  const file: LinesFile = {
    format: 'scarp-lines/1',
    version: packageVersion(),
    ...madeFrom(study, study.line, inputs),
    placement: { sha256: await hashOfFile(placement), rows: inputs.table.rows },
    lines_sha256: hashOfLines(lines),
    lines,
  }
  await writeFile(linesFileOf(placement), `${JSON.stringify(file)}\n`)
}

function hashOfLines(lines: Lines): string {
  return createHash('sha256').update(JSON.stringify(lines)).digest('hex')
}

/** SHA-256, hexadecimal. */
export async function hashOfFile(path: string): Promise<string> {
  const hash = createHash('sha256')
  for await (const chunk of createReadStream(path)) hash.update(chunk as Uint8Array)
  return hash.digest('hex')
}

export interface WithGeometry {
  readonly inputs: AnalysisInputs
  /** Where the study names a placement. */
  readonly geometry?: GeometryUsed
}

/** The inputs with the ground from the study's placement, or as they are with the reason why it does not fit. */
export async function withFrozen(from: StudyFile, inputs: AnalysisInputs): Promise<Checked<WithGeometry>> {
  const { line } = from.study
  if (line.kind !== 'border' || line.measured === undefined) return { ok: true, value: { inputs } }
  const path = resolve(dirname(from.file), line.measured)
  const shownAs = linesFileOf(line.measured)
  const refuse = (found: string, todo: string): Checked<never> => {
    const problem: Problem = { file: shownAs, what: 'line.measured', found, todo }
    return { ok: false, problems: [problem] }
  }
  const again = `scarp measure ${from.file} --out ${join(dirname(from.file), line.measured)}`
  if (!factsOf(linesFileOf(path))) return refuse('there is no such file', `write it: ${again}`)
  const text = await readTextFile(linesFileOf(path), { shownAs, askedBy: 'line.measured', mostBytes: mostLinesBytes })
  if (!text.ok) return text
  const file = parsed(text.value.text)
  if (!file) return refuse('not a .lines file of this program', `write it again: ${again}`)
  const anew = (because: string): Checked<WithGeometry> => ({
    ok: true,
    value: { inputs, geometry: { from: line.measured as string, reused: false, because } },
  })
  if (hashOfLines(file.lines) !== file.lines_sha256) return anew(`${shownAs} has changed since it was written`)
  const changed = whatChanged(file, madeFrom(from.study, line, inputs), inputs.table.rows)
  if (changed !== undefined) return anew(changed)
  let hash: string
  try {
    hash = await hashOfFile(path)
  } catch {
    return refuse(`the table ${line.measured} can't be read`, 'put it beside its .lines file')
  }
  if (hash !== file.placement.sha256) return anew(`${line.measured} has changed since it was measured`)
  const ground = await groundOf(path, from.study, line, inputs, file.lines)
  if (!ground.ok) return ground
  if (!ground.value) return anew(`${line.measured} does not say which zone and piece each row has`)
  return {
    ok: true,
    value: { inputs: { ...inputs, ground: ground.value }, geometry: { from: line.measured, reused: true } },
  }
}

function parsed(text: string): LinesFile | undefined {
  try {
    const file = JSON.parse(text) as LinesFile
    const isWhole = file.format === 'scarp-lines/1' && Array.isArray(file.lines?.pieces) && file.placement?.sha256
    return isWhole && file.zones && file.records && file.options ? file : undefined
  } catch {
    return undefined
  }
}

/** In words, the first thing that differs. */
function whatChanged(then: LinesFile, now: MadeFrom, rows: number): string | undefined {
  if (then.zones.sha256 !== now.zones.sha256) return `${now.zones.file} has changed`
  if (then.records.sha256 !== now.records.sha256) return `${now.records.file} has changed`
  for (const part of ['options', 'records'] as const) {
    const [a, b] = part === 'options' ? [then.options, now.options] : [then.records.read, now.records.read]
    for (const key of Object.keys(b)) {
      const [before, after] = [JSON.stringify(a[key] ?? null), JSON.stringify(b[key] ?? null)]
      if (before !== after) return `${key} was ${before}, and is ${after}`
    }
  }
  return then.placement.rows === rows ? undefined : `it has ${then.placement.rows} rows, and ${rows} are kept`
}

/** Undefined where the table lacks a column, or names what is no zone or piece. */
async function groundOf(
  path: string,
  study: Study,
  line: BorderLine,
  { zones, table }: AnalysisInputs,
  lines: Lines,
): Promise<Checked<AnalysisInputs['ground'] | undefined>> {
  const { borderOfLines, measuredOfColumns, readZones } = await import('../borders/index.js')
  if (!zones) throw new Error('the study has zones, but none were read')
  const ready: Checked<Zones> = readZones(zones.content, zones.file, line.zoneName)
  if (!ready.ok) return ready
  const border = borderOfLines(ready.value, optionsOf(line), lines)
  if (!border.ok) return border
  const { readTable } = await import('../records/files.js')
  const ask = (kind: 'number' | 'label', name: string) => ({ kind, name, askedBy: 'line.measured' })
  const read = await readTable(path, {
    wanted: [
      ask('label', 'zone'),
      ask('label', 'nearest'),
      ...['distance_m', 'foot_lon', 'foot_lat', 'position_m'].map((name) => ask('number', name)),
    ],
    shownAs: line.measured as string,
  })
  if (!read.ok || read.value.rows !== table.rows) return { ok: true, value: undefined }
  const { value: kept } = read
  const { positionColumns } = await import('../analyze.js')
  const [lon, lat] = positionColumns(study).map((name) => numbersOf(table, name))
  const measured = measuredOfColumns(border.value, lon, lat, {
    zone: labelsOf(kept, 'zone'),
    severalZones,
    nearest: labelsOf(kept, 'nearest'),
    distanceMetres: numbersOf(kept, 'distance_m'),
    footLon: numbersOf(kept, 'foot_lon'),
    footLat: numbersOf(kept, 'foot_lat'),
    positionMetres: numbersOf(kept, 'position_m'),
  })
  return { ok: true, value: measured && { border: border.value, measured } }
}
