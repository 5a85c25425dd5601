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
  if (form === 'zones' && records.position === undefined && recordsFile !== '' && !/\.geojson$/i.test(recordsFile))
    say(['records', 'position'], '', 'missing', 'name the two columns: [lon, lat]')
  if ((form === 'score' || form === 'distance') && records.position !== undefined)
    say(['records', 'position'], ': is for borders only', `line has ${form}`, 'leave it out')
  if (form !== 'zones' && form !== undefined && estimation.variance === 'clusters' && records.cluster === undefined)
    say(
      ['estimation', 'variance'],
      ': clusters needs a column',
      'no records.cluster',
      'name the column in records.cluster',
    )

  const narrowest = Math.min(...fixedWidths(estimation.bandwidth))
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
