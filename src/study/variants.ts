/** Variants: the same study with some of its keys written otherwise. */
import type { Problem } from '../problem.js'
import { isRecord } from './leaf.js'
import { lineForm } from './schema.js'
import { type Path, pathText, type Source } from './source.js'

/** The data of a study with a variant's keys in place of its own. */
export interface VariantSource {
  readonly name: string
  /** As written. */
  readonly overrides: Readonly<Record<string, unknown>>
  readonly source: Source
  /** Multiplies the bandwidth that the study itself would have; absent: 1. */
  readonly scale?: number
}

/** Keys that say what the study is; a variant has them from the study. */
const own = ['title', 'outcomes', 'variants', 'disclosure', 'checks', 'plan']
/** Parts whose keys are replaced one by one; `null` takes a key out. */
const parts = ['records', 'line', 'estimation', 'pooling']

/** What `variants` holds, each as a whole study; problems of its form are added to `problems`. */
export function variantSources(source: Source, file: string, problems: Problem[]): VariantSource[] {
  const data = source.data as Readonly<Record<string, unknown>>
  if (data.variants === undefined) return []
  const say = (path: Path, must: string, found: string, todo: string) =>
    problems.push({ file, line: source.lineOf(path), what: `${pathText(path)}${must}`, found, todo })
  if (!isRecord(data.variants)) {
    const todo = 'write a name for each variant, and under it the keys that differ'
    say(['variants'], ': must hold keys of its own', `got ${shown(data.variants)}`, todo)
    return []
  }
  const read: VariantSource[] = []
  for (const [name, overrides] of Object.entries(data.variants)) {
    const at = ['variants', name]
    if (!isRecord(overrides) || Object.keys(overrides).length === 0) {
      const todo = 'write the keys that differ: {estimation: {order: 2}}'
      say(at, ': must hold keys of its own', `got ${shown(overrides)}`, todo)
      continue
    }
    const held = Object.keys(overrides).filter((key) => own.includes(key))
    for (const key of held) say([...at, key], ": a variant has the study's own", 'it is written here', 'leave it out')
    const scale = scaleOf(overrides)
    if (scale === undefined || isPositive(scale)) {
      if (held.length === 0) read.push(variantSource(source, name, overrides, scale))
      continue
    }
    const path = [...at, 'estimation', 'bandwidth', 'scale']
    say(path, ': must be a number above 0', `got ${shown(scale)}`, 'write 0.5 for half the bandwidth')
  }
  return read
}

function variantSource(
  source: Source,
  name: string,
  overrides: Readonly<Record<string, unknown>>,
  scale: number | undefined,
): VariantSource {
  const { variants: _, ...base } = source.data as Record<string, unknown>
  const merged: Record<string, unknown> = { ...base }
  for (const [key, value] of Object.entries(overrides)) {
    if (value === null) delete merged[key]
    else merged[key] = parts.includes(key) && isRecord(value) ? mergedPart(key, base[key], value, scale) : value
  }
  const lineOf = (path: Path) => {
    const [key, next] = path
    const part = overrides[key]
    const isOwn = isRecord(part) && next !== undefined ? Object.hasOwn(part, next) : Object.hasOwn(overrides, key ?? '')
    return source.lineOf(['variants', name, ...(isOwn ? path : [])])
  }
  return { name, overrides, source: { data: merged, lineOf }, ...(scale === undefined ? {} : { scale }) }
}

/** A line of another form takes the place of the study's whole line. */
function mergedPart(key: string, base: unknown, value: Readonly<Record<string, unknown>>, scale: number | undefined) {
  const form = key === 'line' ? lineForm(value) : undefined
  const namesForm = form !== undefined && Object.hasOwn(value, form)
  const merged: Record<string, unknown> = isRecord(base) && !(namesForm && form !== lineForm(base)) ? { ...base } : {}
  for (const [name, item] of Object.entries(value)) {
    if (item === null) delete merged[name]
    else if (!(key === 'estimation' && name === 'bandwidth' && scale !== undefined)) merged[name] = item
  }
  return merged
}

/** The number under `estimation.bandwidth.scale`, whatever it is; undefined where that is not written. */
function scaleOf({ estimation }: Readonly<Record<string, unknown>>): unknown {
  const bandwidth = isRecord(estimation) ? estimation.bandwidth : undefined
  return isRecord(bandwidth) && Object.keys(bandwidth).join() === 'scale' ? bandwidth.scale : undefined
}

function isPositive(value: unknown): value is number {
  return typeof value === 'number' && value > 0 && value < Number.POSITIVE_INFINITY
}

function shown(value: unknown): string {
  return value === null ? 'nothing' : JSON.stringify(value)
}
