/** Reads zones from a GeoJSON FeatureCollection, or says everything that is wrong with it. */
import { valid as structureOf } from 'geojson-validation'
import type { Checked, Problem } from '../problem.js'
import { featuresOf, geometryOf, isObject, type JsonObject, listed, type MultiPolygonCoords, shown } from './geojson.js'
import { emptyExtent, rangeProblem } from './positions.js'
import { readPolygons, ringsWithArea, sayer, shapeProblems } from './zoneProblems.js'

/** Zones in the order of the file. The lists run parallel. */
export interface Zones {
  /** The file as the user named it. */
  readonly file: string
  readonly names: readonly string[]
  /** WGS 84 degrees; rings that cross the antimeridian without a cut run on past 180. */
  readonly polygons: readonly MultiPolygonCoords[]
  readonly properties: readonly Readonly<Record<string, unknown>>[]
}

/**
 * Checks and reads zones: Polygon or MultiPolygon features, each with a name of its own in `nameProperty`
 * (absent: the property `name`, else the feature's id). Ring winding is accepted both ways and never used.
 * Overlaps between zones are judged later, when the tolerance is known (`prepareBorder`).
 */
export function readZones(content: unknown, file: string, nameProperty: string | undefined): Checked<Zones> {
  const problems: Problem[] = []
  const features = featuresOf(content, file, problems)
  if (!features) return { ok: false, problems }
  const names = readNames(features, file, nameProperty, problems)
  const extent = emptyExtent()
  const polygons = features.map((feature, i) => {
    const geometry = geometryOf(feature, i, file, ['Polygon', 'MultiPolygon'], problems)
    if (!geometry) return undefined
    return readPolygons(geometry, i, extent, sayer(file, i, problems))
  })
  const outOfRange = rangeProblem(extent, file)
  if (outOfRange) problems.push(outOfRange)
  else
    polygons.forEach((zone, i) => {
      const isMulti = isObject(features[i]) && isObject(features[i].geometry) && features[i].geometry.type !== 'Polygon'
      if (zone) shapeProblems(zone, isMulti, sayer(file, i, problems))
    })
  if (problems.length === 0) secondOpinion(features, file, problems)
  if (problems.length > 0) return { ok: false, problems }
  const properties = features.map((feature) => propertiesOf(feature) ?? {})
  return {
    ok: true,
    value: { file, names, polygons: (polygons as MultiPolygonCoords[]).map(ringsWithArea), properties },
  }
}

function propertiesOf(feature: unknown): JsonObject | undefined {
  return isObject(feature) && isObject(feature.properties) ? feature.properties : undefined
}

/** One name per feature; problems for names missing or used twice. */
function readNames(
  features: readonly unknown[],
  file: string,
  nameProperty: string | undefined,
  problems: Problem[],
): string[] {
  const { property, read } = nameReader(features, nameProperty)
  const existing = listed(propertyNames(features))
  if (features.every((feature) => nameText(read(feature)) === undefined)) {
    const todo = `name one of the properties that exist: ${existing}`
    problems.push({
      file,
      what: `zone_name: no zone has a name in ${shown(property)}`,
      found: 'no such property',
      todo,
    })
    return features.map(() => '')
  }
  const firstOf = new Map<string, number>()
  return features.map((feature, i) => {
    const name = nameText(read(feature))
    if (name === undefined) {
      const what = `the zone's name (${property}) is missing or no text`
      problems.push({
        file,
        feature: i,
        what,
        found: shown(read(feature)),
        todo: `fill it in; properties: ${existing}`,
      })
      return ''
    }
    const before = firstOf.get(name)
    if (before === undefined) firstOf.set(name, i)
    else {
      const what = `zone name used twice: features ${before} and ${i}`
      const todo = 'merge the two into one MultiPolygon, or rename one'
      problems.push({ file, feature: i, what, found: shown(name), todo })
    }
    return name
  })
}

function nameReader(features: readonly unknown[], nameProperty: string | undefined) {
  const fromProperty = (property: string) => (feature: unknown) => propertiesOf(feature)?.[property]
  if (nameProperty !== undefined) return { property: nameProperty, read: fromProperty(nameProperty) }
  const hasNames = features.some((feature) => propertiesOf(feature)?.name !== undefined)
  const hasIds = features.some((feature) => isObject(feature) && feature.id !== undefined)
  if (hasNames || !hasIds) return { property: 'name', read: fromProperty('name') }
  return { property: 'id', read: (feature: unknown) => (isObject(feature) ? feature.id : undefined) }
}

function nameText(value: unknown): string | undefined {
  if (typeof value === 'number' && Number.isFinite(value)) return String(value)
  if (typeof value !== 'string' || value.trim() === '') return undefined
  return value.trim()
}

export function propertyNames(features: readonly unknown[]): string[] {
  const names = new Set<string>()
  for (const feature of features) for (const name of Object.keys(propertiesOf(feature) ?? {})) names.add(name)
  return [...names]
}

/**
 * geojson-validation on every feature that our own pass let through. It knows structure, ring closure and length only,
 * writes places as prose and can throw on what it does not expect, so it runs last and its words are passed on.
 */
function secondOpinion(features: readonly unknown[], file: string, problems: Problem[]): void {
  features.forEach((feature, i) => {
    let messages: string[]
    try {
      messages = structureOf(feature, true)
    } catch (fault) {
      messages = [String(fault)]
    }
    if (messages.length === 0) return
    const found = messages.slice(0, 3).join('; ')
    problems.push({ file, feature: i, what: 'not a valid GeoJSON feature', found, todo: 'correct the feature' })
  })
}
