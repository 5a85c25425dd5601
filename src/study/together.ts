/** Rules about keys that are each right by themselves but not together. */
import type { Problem } from '../problem.js'
import { isRecord } from './leaf.js'
import { lineForm } from './schema.js'
import { type Path, pathText, type Source } from './source.js'

/** Looks only at values of the right type, so that it can run beside the schema and every problem is told at once. */
export function togetherProblems(source: Source, file: string): Problem[] {
  const { records, line, estimation } = partsOf(source.data)
  const form = lineForm(line)
  const problems: Problem[] = []
  const say = (path: Path, must: string, found: string, todo: string) =>
    problems.push({ file, line: source.lineOf(path), what: `${pathText(path)}${must}`, found, todo })

  const recordsFile = typeof records.file === 'string' ? records.file : ''
  if (form === 'zones' && records.position === undefined && recordsFile !== '' && !pointFile.test(recordsFile))
    say(['records', 'position'], '', 'missing', 'name the two columns: [lon, lat]')
  if ((form === 'score' || form === 'distance') && records.position !== undefined)
    say(['records', 'position'], ': is for borders only', `line has ${form}`, 'leave it out')
  const isClustered = estimation.variance === 'clusters' || estimation.variance === 'few-clusters'
  if ((form === 'score' || form === 'distance') && records.crs !== undefined)
    say(['records', 'crs'], ': is for borders only', `line has ${form}`, 'leave it out')
  if (form !== 'zones' && form !== undefined && line.pieces !== true && isClustered && records.cluster === undefined)
    say(
      ['estimation', 'variance'],
      `: ${estimation.variance} needs a column`,
      'no records.cluster',
      'name the column in records.cluster',
    )

  if (estimation.variance === 'few-clusters' && Array.isArray(records.cluster))
    say(['records', 'cluster'], ': few-clusters takes one column', 'two columns', 'name one, or write clusters')
  if (estimation.spatial !== undefined && form !== undefined && form !== 'zones')
    say(['estimation', 'spatial'], ': is for borders only', `line has ${form}`, 'leave it out')
  if (estimation.spatial !== undefined && estimation.variance !== undefined)
    say(
      ['estimation', 'spatial'],
      ': is a variance of its own',
      `got variance ${JSON.stringify(estimation.variance)} too`,
      'keep one of them',
    )
  if (estimation.interval === 'bias-aware' && estimation.order !== undefined && estimation.order !== 1)
    say(
      ['estimation', 'interval'],
      ': bias-aware is for order 1',
      `got order ${JSON.stringify(estimation.order)}`,
      'write order 1, or corrected',
    )

  const away = isRecord(source.data) ? source.data.away_from_line : undefined
  if (away !== undefined && form !== undefined && form !== 'score')
    say(['away_from_line'], ': is for cutoffs on a score', `line has ${form}`, 'leave it out')
  const target = isRecord(source.data) && isRecord(source.data.pooling) ? source.data.pooling.target : undefined
  if (isRecord(target) && target.value !== undefined && [target.line].flat().includes(target.value))
    say(
      ['pooling', 'target', 'value'],
      ': also names the line',
      `got ${JSON.stringify(target.value)}`,
      'name the column that holds the shares',
    )
  if (form === 'zones') borderProblems(line, say)
  if (line.pieces === true && line.name === undefined)
    say(['line', 'pieces'], ': needs the piece of each unit', 'no line.name', 'name the column in line.name')
  const narrowest = Math.min(...fixedWidths(estimation.bandwidth))
  errorProblem(line, narrowest, say)
  if (typeof estimation.donut === 'number' && estimation.donut >= narrowest)
    say(
      ['estimation', 'donut'],
      ': leaves no units inside the bandwidth',
      `got ${estimation.donut}, and a bandwidth of ${narrowest}`,
      'write a donut below the bandwidth',
    )
  if (isPositive(line.reach) && isPositive(estimation.donut) && estimation.donut >= line.reach)
    say(
      ['line', 'reach'],
      ': leaves no units outside the donut',
      `got ${line.reach}, and a donut of ${estimation.donut}`,
      'write a reach above the donut',
    )

  if (isRecord(line.cutoff) && Array.isArray(line.cutoff.by) && line.cutoff.by.includes(line.cutoff.value))
    say(
      ['line', 'cutoff', 'value'],
      ': is also a key of the schedule',
      `got ${JSON.stringify(line.cutoff.value)}`,
      'name the column that holds the cutoffs',
    )
  if (
    isRecord(line.cutoff) &&
    line.cutoff.period !== undefined &&
    ![line.cutoff.by].flat().includes(line.cutoff.period)
  )
    say(
      ['line', 'cutoff', 'period'],
      ': is not a key of the schedule',
      `got ${JSON.stringify(line.cutoff.period)}`,
      'name the column of `by` that is time',
    )
  if (
    form === 'score' &&
    isRecord(line.cutoff) &&
    Object.hasOwn(line.cutoff, 'column') &&
    line.cutoff.column === line.score
  )
    say(
      ['line', 'cutoff', 'column'],
      ': is the score itself',
      `got ${JSON.stringify(line.score)}`,
      'name the column that holds the cutoffs',
    )
  return problems
}

/** Files whose rows are points by themselves. */
const pointFile = /\.(geojson|topojson|shp|gpkg|zip|kml|kmz)$/i

type Say = (path: Path, must: string, found: string, todo: string) => void

const metres: Readonly<Record<string, number>> = { m: 1, km: 1000, ft: 0.3048, mi: 1609.344 }

/** Rules about the keys of a border. */
function borderProblems(line: Readonly<Record<string, unknown>>, say: Say): void {
  if (line.treated === undefined && line.dose === undefined)
    say(['line', 'treated'], '', 'missing', 'write [zone, zone] or {property: levy, equals: new}, or a dose')
  if (line.treated !== undefined && line.dose !== undefined)
    say(['line', 'dose'], ': does not go with treated', 'both are given', 'keep one of them')
  if (line.dose !== undefined && line.outside === 'untreated')
    say(['line', 'outside'], ': untreated does not go with dose', 'got "untreated"', 'leave it out')
  if (line.on_conflict !== undefined && line.side === undefined)
    say(['line', 'on_conflict'], ': needs the zone by the record', 'no line.side', 'name the column in line.side')
}

/** A fixed bandwidth must be at least twice the declared position error. */
function errorProblem(line: Readonly<Record<string, unknown>>, narrowest: number, say: Say): void {
  const perUnit = typeof line.unit === 'string' ? metres[line.unit] : 1
  const error = line.position_error
  if (!isPositive(error) || perUnit === undefined || !(narrowest * perUnit < 2 * error)) return
  const found = `a bandwidth of ${Number((narrowest * perUnit).toPrecision(6))} m, and an error of ${error} m`
  say(['line', 'position_error'], ': the bandwidth is under twice this', found, 'write a wider bandwidth')
}

function partsOf(data: unknown): Record<'records' | 'line' | 'estimation', Readonly<Record<string, unknown>>> {
  const part = (key: string) => (isRecord(data) && isRecord(data[key]) ? data[key] : {})
  return { records: part('records'), line: part('line'), estimation: part('estimation') }
}

function fixedWidths(bandwidth: unknown): number[] {
  const wide = isRecord(bandwidth) ? [bandwidth.main, bandwidth.untreated, bandwidth.treated] : [bandwidth]
  return wide.filter(isPositive)
}

function isPositive(value: unknown): value is number {
  return typeof value === 'number' && value > 0
}
