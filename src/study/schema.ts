/** The study file as it is written: every key, what it may hold, and which keys are still to come. */
import { z } from 'zod'
import {
  choose,
  columnName,
  fileName,
  finiteNumber,
  isRecord,
  keyed,
  leaf,
  listOf,
  notNegative,
  numberWhere,
  oneOf,
  positive,
  refusal,
  textFor,
  trueOrFalse,
} from './leaf.js'
import { nearest } from './nearest.js'
import type { Path } from './source.js'

const columnNames = listOf(columnName, 'the names of columns')
const nameOrNames = choose<string | string[]>((value) => (Array.isArray(value) ? columnNames : columnName))

/** EPSG codes look like numbers, and are text. */
const crsText = textFor('a coordinate system: EPSG:5070')

const oneOrTwoColumns = choose<string | [string, string]>((value) =>
  Array.isArray(value)
    ? leaf<[string, string]>(
        'must name one column, or two that cross',
        { todo: 'write [one column, another]' },
        () => value.length === 2 && value[0] !== value[1] && value.every((name) => columnName.safeParse(name).success),
      )
    : columnName,
)

export const records = keyed({
  file: fileName,
  id: columnName.optional(),
  position: choose<string | [string, string]>((value) =>
    typeof value === 'string' && value.trim() !== ''
      ? columnName
      : leaf<[string, string]>(
          'must name two columns',
          { todo: 'write [longitude column, latitude column]' },
          () =>
            Array.isArray(value) &&
            value.length === 2 &&
            value[0] !== value[1] &&
            value.every((name) => columnName.safeParse(name).success),
        ),
  ).optional(),
  crs: crsText.optional(),
  layer: textFor('the name of a layer').optional(),
  keep: textFor('a condition over the columns').optional(),
  weight: columnName.optional(),
  cluster: oneOrTwoColumns.optional(),
})

const schedule = keyed({ schedule: fileName, by: nameOrNames, value: columnName, period: columnName.optional() })
const ladder = keyed({ ladder: listOf(finiteNumber, 'the steps') })
const column = keyed({ column: columnName })

const cutoff = choose((value): z.ZodType<number | z.infer<typeof schedule | typeof ladder | typeof column>> => {
  if (!isRecord(value)) return finiteNumber
  const forms = ['column', 'schedule', 'ladder'].filter((key) => Object.hasOwn(value, key))
  if (forms.length > 1) return refusal(`mixes ${forms.join(' and ')}`, 'keep one of them')
  if (forms[0] === 'column') return column
  if (forms[0] === 'ladder') return ladder
  if (forms[0] === 'schedule' || Object.hasOwn(value, 'by')) return schedule
  const near = Object.keys(value).map((key) => nearest(key, ['column', 'schedule', 'ladder']))
  if (near.includes('column')) return column
  if (near.includes('ladder')) return ladder
  if (near.includes('schedule')) return schedule
  return refusal('must say how the cutoff is known', 'write a number, {column}, {schedule, by, value} or {ladder}')
})

export const scoreLine = keyed({
  score: columnName,
  cutoff,
  treated: oneOf(['at-or-above', 'above', 'at-or-below', 'below']),
  compare_by: nameOrNames.optional(),
  rescale: oneOf(['none', 'spread']).optional(),
})

const treatedZones = choose(
  (value): z.ZodType<string[] | { property: string; equals: string | number | boolean }> =>
    isRecord(value) ? zonesByProperty : Array.isArray(value) ? zoneNames : refusal(...zonesWanted),
)
const zonesWanted = ['must say which zones are treated', 'write [zone, zone] or {property: levy, equals: new}'] as const
const zoneNames = listOf(textFor('the name of a zone'), 'the names of the treated zones')
const zonesByProperty = keyed({
  property: textFor('a property of the zones'),
  equals: leaf<string | number | boolean>(
    'must be text, a number, true or false',
    { todo: 'write the value of treated zones' },
    (value) => typeof value === 'string' || typeof value === 'boolean' || Number.isFinite(value),
  ),
})

const layerKeys = {
  file: fileName,
  layer: textFor('the name of a layer').optional(),
  geometry: columnName.optional(),
  crs: crsText.optional(),
}
const layerSource = choose<string | z.infer<typeof layerObject>>((value) => (isRecord(value) ? layerObject : fileName))
const layerObject = keyed(layerKeys)
const layerNear = keyed({ ...layerKeys, within: positive })

const repeatedPoints = choose<'keep' | 'cluster' | { cap: number }>((value) =>
  isRecord(value) ? keyed({ cap: wholeFrom1 }) : oneOf(['keep', 'cluster']),
)
const wholeFrom1 = numberWhere(
  'must be a whole number, 1 or more',
  'write how many units a point may have',
  (value) => Number.isSafeInteger(value) && value >= 1,
)

export const borderLine = keyed({
  zones: layerSource,
  zone_name: textFor('a property of the zones').optional(),
  treated: treatedZones.optional(),
  dose: textFor('a numeric property of the zones').optional(),
  outside: oneOf(['set-aside', 'untreated']).optional(),
  unit: oneOf(['m', 'km', 'ft', 'mi']).optional(),
  snap: positive.optional(),
  piece: positive.optional(),
  measured: fileName.optional(),
  reach: positive.optional(),
  barriers: z.array(layerNear).optional(),
  overlaps: z.array(layerNear).optional(),
  along: positive.optional(),
  side: columnName.optional(),
  on_conflict: oneOf(['set-aside', 'map', 'record']).optional(),
  position_error: notNegative.optional(),
  corner: notNegative.optional(),
  largest_turn: positive.optional(),
  repeated_points: repeatedPoints.optional(),
})

export const distanceLine = keyed({ distance: columnName, name: columnName.optional(), pieces: trueOrFalse.optional() })

export const lineForms = { score: scoreLine, zones: borderLine, distance: distanceLine } as const
export type LineForm = keyof typeof lineForms
type WrittenLine = z.infer<typeof scoreLine> | z.infer<typeof borderLine> | z.infer<typeof distanceLine>

/** The form a written line has, or most resembles; undefined where it has none. */
export function lineForm(line: unknown): LineForm | undefined {
  if (!isRecord(line)) return undefined
  const forms = Object.keys(lineForms) as LineForm[]
  const named = forms.find((form) => Object.hasOwn(line, form))
  if (named !== undefined) return named
  const likeness = (form: LineForm) =>
    Object.keys(line).filter((key) => Object.hasOwn(lineForms[form].shape, key) || nearest(key, [form]) === form).length
  const best = forms.reduce((a, b) => (likeness(b) > likeness(a) ? b : a))
  return likeness(best) > 0 ? best : undefined
}

const line = choose((value): z.ZodType<WrittenLine> => {
  const form = lineForm(value)
  if (form === undefined)
    return refusal('must say what the line is', 'write score and cutoff, or zones and treated, or distance')
  const mixed = Object.keys(lineForms).filter((key) => Object.hasOwn(value as object, key))
  if (mixed.length > 1) return refusal(`mixes ${mixed.join(' and ')}`, 'keep one of them, and one study for each')
  return lineForms[form]
})

const rule = oneOf(['mse', 'coverage'])
const width = choose<'mse' | 'coverage' | number>((value) =>
  rule.safeParse(value).success
    ? rule
    : typeof value === 'number'
      ? positive
      : leaf(
          'must be mse, coverage or a number above 0',
          { todo: 'write mse, coverage or a number', options: ['mse', 'coverage'], wants: 'number' },
          () => false,
        ),
)
const widthOfSides = keyed({ untreated: positive, treated: positive, bias: positive.optional() })
const widthAndBias = keyed({ main: width, bias: positive })

const bandwidth = choose(
  (value): z.ZodType<'mse' | 'coverage' | number | z.infer<typeof widthOfSides | typeof widthAndBias>> =>
    !isRecord(value)
      ? width
      : Object.hasOwn(value, 'untreated') || Object.hasOwn(value, 'treated')
        ? widthOfSides
        : widthAndBias,
)

export const estimation = keyed({
  order: leaf<0 | 1 | 2 | 3>('must be 0, 1, 2 or 3', { todo: 'write 1 for local lines', wants: 'number' }, (value) =>
    [0, 1, 2, 3].includes(value as number),
  ).optional(),
  kernel: oneOf(['triangular', 'epanechnikov', 'uniform']).optional(),
  bandwidth: bandwidth.optional(),
  sides: oneOf(['common', 'separate']).optional(),
  interval: oneOf(['auto', 'corrected', 'bias-aware']).optional(),
  smoothness: choose<'rule' | number>((value) =>
    typeof value === 'number'
      ? positive
      : leaf(
          'must be rule or a number above 0',
          { todo: 'write rule, or a bound on the second derivative', options: ['rule'], wants: 'number' },
          () => value === 'rule',
        ),
  ).optional(),
  variance: oneOf(['hc0', 'hc1', 'hc2', 'hc3', 'neighbours', 'clusters', 'few-clusters']).optional(),
  reference: oneOf(['t', 'normal']).optional(),
  spatial: positive.optional(),
  donut: notNegative.optional(),
  level: numberWhere('must lie between 0 and 1', 'write 0.95 for 95%', (value) => value > 0 && value < 1).optional(),
})

const shares = keyed({ shares: fileName, line: nameOrNames, value: columnName })
const target = choose((value): z.ZodType<'units' | 'equal' | 'precision' | z.infer<typeof shares | typeof column>> => {
  if (!isRecord(value)) return oneOf(['units', 'equal', 'precision'])
  const forms = ['column', 'shares'].filter((key) => Object.hasOwn(value, key))
  if (forms.length > 1) return refusal('mixes column and shares', 'keep one of them')
  const near = forms[0] ?? Object.keys(value).map((key) => nearest(key, ['column', ...Object.keys(shares.shape)]))[0]
  if (near === undefined) return refusal('must say where the shares are', 'write {column} or {shares, line, value}')
  return near === 'column' ? column : shares
})
export const pooling = keyed({
  fixed_effects: trueOrFalse.optional(),
  target: target.optional(),
  slope: columnName.optional(),
})

export const disclosure = keyed({
  coordinates: trueOrFalse.optional(),
  smallest_cell: numberWhere(
    'must be a whole number, 1 or more',
    'write 10, or 1 to blank nothing',
    (value) => Number.isSafeInteger(value) && value >= 1,
  ).optional(),
})

const share = numberWhere('must lie between 0 and 1', 'write 0.5 for half', (value) => value > 0 && value < 1)
const from0To1 = numberWhere('must be 0 or more and below 1', 'write 0.2', (value) => value >= 0 && value < 1)

export const assumptions = keyed({
  units: wholeFrom1,
  sd: positive.optional(),
  r_squared: from0To1.optional(),
  share_treated: share.optional(),
  score: oneOf(['normal', 'uniform']).optional(),
  bandwidth: positive.optional(),
  lines: wholeFrom1.optional(),
  intraclass_correlation: from0To1.optional(),
  cluster_size: wholeFrom1.optional(),
})

export const plan = keyed({
  effect: positive.optional(),
  power: share.optional(),
  assume: assumptions.optional(),
})

/** A study without records: what `plan` needs for a plan from assumptions alone. */
export const planAlone = keyed({
  title: textFor('a title').optional(),
  plan: keyed({ effect: positive.optional(), power: share.optional(), assume: assumptions }),
  estimation: estimation.optional(),
})

export const study = keyed({
  title: textFor('a title').optional(),
  records,
  outcomes: listOf(columnName, 'the outcome columns'),
  line,
  take_up: columnName.optional(),
  covariates: columnNames.optional(),
  predetermined: columnNames.optional(),
  estimation: estimation.optional(),
  pooling: pooling.optional(),
  checks: oneOf(['none', 'standard', 'full']).optional(),
  audit: columnName.optional(),
  away_from_line: keyed({
    low: textFor('a line'),
    high: textFor('a line'),
    bandwidth: positive.optional(),
  }).optional(),
  disclosure: disclosure.optional(),
  variants: z.unknown().optional(),
  plan: plan.optional(),
  seed: numberWhere(
    'must be a whole number, 0 or more',
    'write 1',
    (value) => Number.isSafeInteger(value) && value >= 0,
  ).optional(),
})

export type WrittenStudy = z.infer<typeof study>

/** Parts of a study by name, to say where a misplaced key belongs. */
export const parts: Readonly<Record<string, readonly string[]>> = {
  'a score line': Object.keys(scoreLine.shape),
  'a border': Object.keys(borderLine.shape),
  'a line of ready-made distances': Object.keys(distanceLine.shape),
  records: Object.keys(records.shape),
  estimation: Object.keys(estimation.shape),
  pooling: Object.keys(pooling.shape),
  disclosure: Object.keys(disclosure.shape),
  plan: Object.keys(plan.shape),
  'the top of the study': Object.keys(study.shape),
}

const NAMES =
  /^(title|take_up|audit|away_from_line\.(low|high)|(outcomes|covariates|predetermined)\.\d+|records\.(id|weight|cluster(\.\d+)?|position(\.\d+)?|layer|crs)|line\.(score|distance|name|zone_name|dose|side|zones\.(layer|geometry|crs)|(barriers|overlaps)\.\d+\.(layer|geometry|crs)|(cutoff\.by|compare_by|treated)(\.\d+)?|treated\.property|cutoff\.(column|value|period))|pooling\.(target\.(column|line(\.\d+)?|value)|slope))$/

/** Places that hold a name: a number there is meant as text. */
export function isNamePath(path: Path): boolean {
  return NAMES.test((path[0] === 'variants' ? path.slice(2) : path).join('.'))
}
