/** United States from us-atlas (Census Bureau, public domain), for tests. */
import { readFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import type { FeatureCollection, MultiLineString } from 'geojson'
import { feature, mesh } from 'topojson-client'
import type { GeometryCollection, Topology } from 'topojson-specification'

const file = createRequire(import.meta.url).resolve('us-atlas/states-10m.json')
const atlas = JSON.parse(readFileSync(file, 'utf8')) as Topology<{ states: GeometryCollection<{ name: string }> }>

export const states = feature(atlas, atlas.objects.states) as FeatureCollection

/** The border of two states by shared arcs: the route of topojson, nothing of ours. */
export function sharedArcs(a: string, b: string): MultiLineString {
  return mesh(atlas, atlas.objects.states, (p, q) => {
    const names = [p, q].map((state) => (state as unknown as { properties: { name: string } }).properties.name)
    return names[0] !== names[1] && names.includes(a) && names.includes(b)
  }) as MultiLineString
}
