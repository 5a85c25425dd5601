/** The options of `scarp measure` as a study without outcomes, so that units are placed by the one way there is. */
import { pointLayer } from '../layers/index.js'
import type { Checked, Problem } from '../problem.js'
import type { LengthUnit, Study } from '../study/index.js'
import type { MeasureOptions } from './measure.js'

const units: readonly string[] = ['m', 'km', 'ft', 'mi'] satisfies LengthUnit[]

/** Names with commas between; a name that holds a comma stands in double quotation marks. */
export function namesIn(text: string): string[] {
  const names = text.match(/"(?:[^"]|"")*"|[^,]+/g) ?? []
  return names
    .map((name) => name.trim())
    .map((name) => (name.startsWith('"') ? name.slice(1, -1).replaceAll('""', '"') : name))
    .filter((name) => name !== '')
}

export async function measureStudy(records: string, options: MeasureOptions): Promise<Checked<Study>> {
  const problems: Problem[] = []
  const say = (what: string, found: string, todo: string) => problems.push({ file: 'scarp', what, found, todo })
  const treated = namesIn(options.treated ?? '')
  const { zones, zoneName = 'name', unit = 'm' } = options
  if (zones === undefined) say('--zones', 'missing', 'name the file of zones, or measure a study file')
  if (options.dose !== undefined && treated.length > 0) say('--dose', 'given with --treated', 'keep one of them')
  if (options.dose === undefined && treated.length === 0)
    say('--treated', 'missing', 'name the treated zones: --treated Inner,Harbour, or a numeric property: --dose rate')
  if (!units.includes(unit)) say('--unit', `got ${unit}`, 'write m, km, ft or mi')
  const position = options.position === undefined ? undefined : namesIn(options.position)
  if (position === undefined && !/\.geojson$/i.test(records) && !pointLayer.test(records))
    say('--position', 'missing', 'name the columns of longitude and latitude: --position lon,lat')
  if (position !== undefined && position.length !== 2)
    say('--position', `got ${options.position}`, 'name two columns, longitude first: --position lon,lat')
  if (problems.length > 0) return { ok: false, problems }

  const rule = options.dose === undefined ? { treated } : { dose: options.dose }
  const line = { zones, zone_name: zoneName, ...rule, unit }
  const written = { records: { file: records, position }, outcomes: ['none'], line }
  const { readStudy } = await import('../study/index.js')
  const study = readStudy(JSON.stringify(written), 'scarp')
  // No line of a file stands behind these problems: the line of the text above says nothing.
  if (!study.ok) return { ok: false, problems: study.problems.map((problem) => ({ ...problem, line: undefined })) }
  return { ok: true, value: { ...study.value, outcomes: [] } }
}
