/**
 * The units of a study without what says who or where they are, and a study that estimates from them. On the ground a
 * unit keeps its line and its distance; on a score, the score and what finds its cutoff. Ids and positions are left
 * out, clusters and ids that occur again become numbers, and rows are put in an order that is not the file's.
 */
import { argsort } from '../math/index.js'
import { type Column, numbersOf, type Table } from '../records/index.js'
import type { LineSummary, UnitRows } from '../results.js'
import type { Study } from '../study/index.js'
import { columnsApart, freeName, hiddenColumns, pointsOf, unitsFile } from './apartColumns.js'
import { type AnalysisInputs, readingKey } from './inputs.js'
import { readShares } from './sharesOfFile.js'

export interface UnitsApart {
  /** Reads the tables by their names. */
  readonly study: Study
  readonly table: Table
  /** The schedule and the shares of lines, where the study has them. */
  readonly beside: readonly Table[]
  /** Ids of the lines that the column of lines numbers from 1; absent where lines keep their names. */
  readonly lines?: readonly string[]
  /** Whether estimates themselves are others for what is left out: a column of positions, or a variance that needs them. */
  readonly isAltered: boolean
  /** What the study has and this one has not, in words. */
  readonly leftOut: readonly string[]
}

const scheduleFile = 'schedule.csv'
const sharesFile = 'shares.csv'

type Named = readonly LineSummary[]

/** `units`: as the study places them, against `lines`. */
export function unitsApart(study: Study, inputs: AnalysisInputs, units: UnitRows, lines: Named): UnitsApart {
  const hidden = new Set(hiddenColumns(study))
  const isShown = (name: string) => !hidden.has(name)
  const kept = study.variants.filter((variant) => isKept(study, variant.study, isShown))
  const base = {
    ...study,
    covariates: study.covariates.filter(isShown),
    predetermined: study.predetermined.filter(isShown),
    variants: kept,
  }
  const lost = [...new Set([...study.covariates, ...study.predetermined])].filter((name) => hidden.has(name))
  const leftOut = [
    ...lost.map((name) => `column ${name}`),
    ...study.variants
      .filter((variant) => !kept.includes(variant))
      .map(({ name }) => `variant ${name}, which reads or places the units otherwise`),
  ]
  const isGround = study.line.kind === 'border'
  const apart = isGround ? apartOnGround(base, inputs, units, lines) : apartByScore(base, inputs)
  return {
    ...apart,
    isAltered: lost.length > 0 || study.estimation.spatial !== undefined,
    leftOut: [
      ...(isGround ? [ofTheMap] : []),
      ...(study.estimation.spatial === undefined ? [] : ['the spatial variance: standard errors are those without it']),
      ...leftOut,
    ],
  }
}

/** Variants that read the same rows; on the ground, those that leave the line as it is. */
function isKept(study: Study, other: Study, isShown: (name: string) => boolean): boolean {
  const isSameLine = JSON.stringify(other.line) === JSON.stringify(study.line)
  return (
    readingKey(other) === readingKey(study) &&
    other.records.id === study.records.id &&
    [...other.covariates, ...other.predetermined].every(isShown) &&
    (study.line.kind !== 'border' || (isSameLine && other.estimation.spatial === undefined))
  )
}

const ofTheMap =
  'what needs the map: the map, other rules about the border, estimates along it, density against the land there is, other borders and shifted lines, spatial correlation'

type Apart = Omit<UnitsApart, 'leftOut' | 'isAltered'>

function apartByScore(study: Study, inputs: AnalysisInputs): Apart {
  const { table } = inputs
  const { line } = study
  if (line.kind === 'border') throw new Error('a border has no score')
  const keys = numbersOf(table, line.kind === 'score' ? line.score : line.distance)
  const order = argsort(keys.map((key) => (Number.isNaN(key) ? Number.POSITIVE_INFINITY : key)))
  const { columns, records } = columnsApart(study, inputs, order)
  const { schedule, shares } = inputs
  const cutoff =
    line.kind === 'score' && line.cutoff.kind === 'schedule' ? { ...line.cutoff, file: scheduleFile } : undefined
  return {
    study: { ...withShares(study), records, line: line.kind === 'score' && cutoff ? { ...line, cutoff } : line },
    table: tableOf(columns, order.length),
    beside: [
      ...(schedule ? [{ ...schedule, file: scheduleFile }] : []),
      ...(shares ? [{ ...shares, file: sharesFile }] : []),
    ],
  }
}

/** `columns`: how many of those that name a line are kept; absent: all. */
function withShares(study: Study, columns?: number): Study {
  const { target } = study.pooling
  if (typeof target !== 'object' || !('shares' in target)) return study
  const line = target.line.slice(0, columns)
  return { ...study, pooling: { ...study.pooling, target: { ...target, shares: sharesFile, line } } }
}

function apartOnGround(study: Study, inputs: AnalysisInputs, units: UnitRows, lines: Named): Apart {
  const byDistance = argsort(units.x)
  const entries = Int32Array.from(byDistance).sort((a, b) => units.line[a] - units.line[b])
  const rows = Uint32Array.from(entries, (entry) => units.unit[entry])
  const { columns, records } = columnsApart(study, inputs, rows)
  const taken = new Set(columns.map(({ name }) => name))
  const [x, line] = [freeName('x', taken), freeName('line', taken)]
  const placed: Column[] = [
    { kind: 'number', name: line, values: Float64Array.from(entries, (entry) => units.line[entry] + 1) },
    { kind: 'number', name: x, values: Float64Array.from(entries, (entry) => units.x[entry]) },
  ]
  const points = pointsOf(study, inputs, rows, freeName('point', taken))
  const { spatial: _, ...estimation } = study.estimation
  return {
    study: {
      ...withShares(study, 1),
      records: points ? { ...records, cluster: points.name } : records,
      line: { kind: 'distance', distance: x, name: line, pieces: true },
      estimation,
    },
    table: tableOf([...placed, ...(points ? [points] : []), ...columns], rows.length),
    beside: numberedShares(study, inputs, lines),
    lines: lines.map(({ line }) => line),
  }
}

function tableOf(columns: readonly Column[], rows: number): Table {
  return {
    file: unitsFile,
    rowsRead: rows,
    rows,
    lineOfRow: Int32Array.from({ length: rows }, (_, row) => row + 2),
    columns: new Map(columns.map((column) => [column.name, column])),
    sha256: '',
  }
}

/** The shares of lines under the numbers that the lines have; rows for other lines have the numbers after those. */
function numberedShares({ pooling }: Study, { shares }: AnalysisInputs, lines: Named): Table[] {
  const { target } = pooling
  if (!shares || typeof target !== 'object' || !('shares' in target)) return []
  const named = lines.map(({ line, label, zones, length_m }) => ({ id: line, label, zones, lengthMetres: length_m }))
  const read = readShares(target, { shares }, named)
  if (!read.ok) throw new Error('the shares of the lines could be read before')
  const { entries } = read.value
  let others = lines.length
  const numbers = Float64Array.from(entries, ({ line }) => (line === undefined ? ++others : line + 1))
  const [name] = target.line
  const columns: Column[] = [
    { kind: 'number', name, values: numbers },
    { kind: 'number', name: target.value, values: Float64Array.from(entries, ({ share }) => share) },
  ]
  return [{ ...tableOf(columns, entries.length), file: sharesFile }]
}
