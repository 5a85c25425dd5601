/** GeoJSON and TopoJSON. What is neither is handed on as it is: whoever wants zones of it says what is wrong. */
import type { Feature } from 'geojson'
import { feature } from 'topojson-client'
import type { Checked, Problem } from '../problem.js'
import type { RawLayer } from './raw.js'
import { names } from './source.js'
import { readJsonFile } from './textFile.js'

/** A JavaScript string holds 2^29 - 24 characters. */
const mostBytes = 500_000_000

type Loose = Readonly<Record<string, unknown>>

export interface JsonRequest {
  readonly shownAs: string
  readonly askedBy: string
  readonly layer?: string
}

export async function jsonLayer(path: string, request: JsonRequest): Promise<Checked<RawLayer>> {
  const read = await readJsonFile(path, { ...request, mostBytes })
  if (!read.ok) return read
  const { content, sha256 } = read.value
  if (isObject(content) && content.type === 'Topology') return topology(content, sha256, request)
  return {
    ok: true,
    value: {
      format: 'GeoJSON',
      features: featuresOf(content),
      crs: crsOf(content),
      without: 'no crs',
      sha256,
      content,
    },
  }
}

function isObject(value: unknown): value is Loose {
  return typeof value === 'object' && value !== null && !Array.isArray(value)
}

function featuresOf(content: unknown): Feature[] {
  if (!isObject(content)) return []
  if (content.type === 'FeatureCollection') return Array.isArray(content.features) ? content.features : []
  if (content.type === 'Feature') return [content as unknown as Feature]
  return [{ type: 'Feature', properties: {}, geometry: content as unknown as Feature['geometry'] }]
}

/** The member of the 2008 format: `{"type": "name", "properties": {"name": "urn:ogc:def:crs:EPSG::5070"}}`. */
function crsOf(content: unknown): RawLayer['crs'] {
  const crs = isObject(content) && isObject(content.crs) ? content.crs : undefined
  const named = crs && isObject(crs.properties) ? crs.properties.name : undefined
  return typeof named === 'string' ? { text: named, where: 'its crs member' } : undefined
}

function topology(content: Loose, sha256: string, { shownAs, askedBy, layer }: JsonRequest): Checked<RawLayer> {
  const objects = isObject(content.objects) ? content.objects : {}
  const all = Object.keys(objects)
  const wanted = layer ?? (all.length === 1 ? all[0] : undefined)
  const refuse = (what: string, found: string, todo: string): Checked<never> => {
    const problem: Problem = { file: shownAs, what: `${askedBy}: ${what}`, found, todo }
    return { ok: false, problems: [problem] }
  }
  if (wanted === undefined || !all.includes(wanted))
    return refuse('layer', layer ?? 'not named', `name the one to read: ${names(all)}`)
  try {
    const made = feature(content as never, objects[wanted] as never) as unknown as Loose
    const features = made.type === 'FeatureCollection' ? (made.features as Feature[]) : [made as unknown as Feature]
    const crs = crsOf(content)
    return { ok: true, value: { format: 'TopoJSON', features, crs, without: 'no crs', sha256 } }
  } catch (error) {
    return refuse('the topology is broken', (error as Error).message, 'write it again')
  }
}
