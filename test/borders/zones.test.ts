import { readFileSync } from 'node:fs'
import geographic from 'geographiclib-geodesic'
import { describe, expect, it } from 'vitest'
import { readZones } from '../../src/borders/index.js'
import { problemText } from '../../src/problem.js'
import { states } from './usStates.js'

type Point = readonly number[]

const square: Point[] = [
  [0, 0],
  [1, 0],
  [1, 1],
  [0, 1],
  [0, 0],
]
const next: Point[] = square.map(([lon, lat]) => [lon + 1, lat])

const feature = (name: unknown, geometry: unknown) => ({ type: 'Feature', properties: { name }, geometry })
const polygon = (...coordinates: unknown[]) => ({ type: 'Polygon', coordinates })
const multi = (...coordinates: unknown[]) => ({ type: 'MultiPolygon', coordinates })
const file = (...features: unknown[]) => ({ type: 'FeatureCollection', features })
const good = feature('A', polygon(square))
const mercator = square.map(([lon, lat]) => [-7_910_000 + 1000 * lon, 5_215_000 + 1000 * lat])

/** Whole files, and what must be said about each; every line must be there, and no other. */
const badFiles: [name: string, content: unknown, problems: string[]][] = [
  ['a bare polygon', polygon(square), ['z.geojson: not a GeoJSON FeatureCollection: type "Polygon"; write']],
  ['null', null, ['z.geojson: not a GeoJSON FeatureCollection: null;']],
  ['a list', [good], ['z.geojson: not a GeoJSON FeatureCollection: [{"type":"Feature"']],
  ['a dangerous type', { type: 'constructor' }, ['not a GeoJSON FeatureCollection: type "constructor"']],
  ['no features', { type: 'FeatureCollection' }, ['features must be a list of at least one feature: nothing']],
  ['an empty list', file(), ['features must be a list of at least one feature: an empty list']],
  [
    'a feature that is none',
    file(good, 7),
    ["feature 1: the zone's name (name) is missing", 'feature 1: not a Feature: 7'],
  ],
  [
    'no geometry',
    file(good, feature('B', null)),
    ['feature 1: geometry missing: null; give it a Polygon or MultiPolygon'],
  ],
  [
    'a point',
    file(good, feature('B', { type: 'Point', coordinates: [0, 0] })),
    ['feature 1: geometry must be a Polygon or MultiPolygon: "Point"'],
  ],
  [
    'a collection of geometries',
    file(good, feature('B', { type: 'GeometryCollection', geometries: [] })),
    ['feature 1: geometry must be a Polygon or MultiPolygon: "GeometryCollection"'],
  ],
  [
    'names missing',
    file(good, feature('', polygon(next)), feature(null, polygon(next))),
    [
      'feature 1: the zone\'s name (name) is missing or no text: ""; fill it in; properties: name',
      "feature 2: the zone's name (name) is missing or no text: null",
    ],
  ],
  [
    'one name twice',
    file(good, feature('B', polygon(next)), feature('A', polygon(next))),
    ['feature 2: zone name used twice: features 0 and 2: "A"; merge the two into one MultiPolygon, or rename one'],
  ],
  [
    'a name twice as number and text',
    file(feature(1, polygon(square)), feature('1', polygon(next))),
    ['feature 1: zone name used twice: features 0 and 1: "1"'],
  ],
  [
    'an empty polygon',
    file(good, feature('B', polygon())),
    ['feature 1: coordinates: a polygon must be a list of rings: []'],
  ],
  ['an empty ring list', file(good, feature('B', multi())), ['feature 1: coordinates must be a list of polygons: []']],
  ['a ring of null', file(good, feature('B', polygon(null))), ['feature 1: ring 0 must be a list of positions: null']],
  [
    'an empty ring',
    file(good, feature('B', polygon([]))),
    ['feature 1: ring 0: a ring needs at least 4 positions, the last equal to the first: 0'],
  ],
  [
    'no numbers',
    file(
      feature(
        'A',
        polygon([
          [0, 0],
          [1, null],
          ['1', 1],
          [0, 1],
          [0, 0],
        ]),
      ),
    ),
    [
      'feature 0: ring 0, position 1 is not a pair of finite numbers: [1,null], and 1 more; write [longitude, latitude]',
    ],
  ],
  [
    'not a number',
    file(
      feature(
        'A',
        multi(
          [square],
          [
            [
              [2, 0],
              [3, 0],
              [3, Number.NaN],
              [2, 0],
            ],
          ],
        ),
      ),
    ),
    ['feature 0: polygon 1, ring 0, position 2 is not a pair of finite numbers'],
  ],
  [
    'an open ring',
    file(feature('A', polygon(square.slice(0, 4)))),
    ['feature 0: ring 0 is not closed: first (0, 0), last (0, 1); repeat the first position at the end'],
  ],
  [
    'three positions',
    file(
      feature(
        'A',
        polygon([
          [0, 0],
          [1, 1],
          [0, 0],
        ]),
      ),
    ),
    ['feature 0: ring 0: a ring needs at least 4 positions, the last equal to the first: 3'],
  ],
  [
    'one position, repeated',
    file(
      feature(
        'A',
        polygon([
          [1, 1],
          [1, 1],
          [1, 1],
          [1, 1],
        ]),
      ),
    ),
    ['feature 0: ring 0 is one position or two, repeated: (1, 1)'],
  ],
  [
    'a line there and back',
    file(
      feature(
        'A',
        polygon([
          [0, 0],
          [1, 1],
          [2, 2],
          [1, 1],
          [0, 0],
        ]),
      ),
    ),
    ['feature 0: ring 0 encloses no area: (0, 0), (1, 1) and (2, 2)'],
  ],
  [
    'a bow-tie',
    file(
      feature(
        'A',
        polygon([
          [0, 0],
          [2, 2],
          [2, 0],
          [0, 2],
          [0, 0],
        ]),
      ),
    ),
    ['feature 0: a ring crosses itself at (1, 1): the edges from ring 0, position 0 and ring 0, position 2; redraw'],
  ],
  [
    'a hole across its outer ring',
    file(
      feature(
        'A',
        polygon(square, [
          [0.5, 0.5],
          [1.5, 0.5],
          [0.75, 0.75],
          [0.5, 0.5],
        ]),
      ),
    ),
    [
      'feature 0: two rings of a zone cross at (1, 0.5): the edges from ring 0, position 1 and ring 1, position 0',
      'feature 0: two rings of a zone cross at (1, 0.666667)',
    ],
  ],
  [
    'parts that cross',
    file(feature('A', multi([square], [square.map(([lon, lat]) => [lon + 0.5, lat + 0.5])]))),
    [
      'feature 0: two rings of a zone cross at (1, 0.5): the edges from polygon 0, ring 0, position 1 and polygon 1, ring 0, position 0',
      'feature 0: two rings of a zone cross at (0.5, 1)',
    ],
  ],
  [
    'a hole outside',
    file(
      feature(
        'A',
        polygon(
          square,
          next.map(([lon, lat]) => [lon + 1, lat]),
        ),
      ),
    ),
    ['feature 0: ring 1 is a hole outside its polygon: position (2, 0); make it a polygon of its own'],
  ],
  [
    'a part inside another',
    file(feature('A', multi([square], [square.map(([lon, lat]) => [0.25 + lon / 2, 0.25 + lat / 2])]))),
    ['feature 0: polygon 1 lies inside polygon 0 of the same zone: (0.25, 0.25); merge the two'],
  ],
  [
    'Web Mercator numbers',
    file(feature('A', polygon(mercator)), feature('B', polygon(mercator))),
    [
      'feature 0: positions are not degrees; they look like Web Mercator metres (EPSG:3857) or another projection: [-7910000, 5215000] at ring 0, position 0, and 9 more; reproject the file to longitude and latitude, EPSG:4326 (as Web Mercator the position is (-71.056739, 42.359607))',
    ],
  ],
  [
    'feet of a state grid',
    file(feature('A', polygon(square.map(([x, y]) => [8e7 + x, 3e6 + y])))),
    ['feature 0: positions are not degrees; they look projected: [80000000, 3000000]'],
  ],
  [
    'swapped axes',
    file(feature('A', polygon(square.map(([lon, lat]) => [42 + lat, -100 + lon])))),
    [
      'feature 0: latitude beyond 90 degrees; the axes look swapped (latitude first): [42, -100] at ring 0, position 0, and 4 more; write each position as [longitude, latitude]',
    ],
  ],
  [
    'one typing error',
    file(
      feature(
        'A',
        polygon([
          [170, 0],
          [171, 0],
          [171, 911],
          [170, 1],
          [170, 0],
        ]),
      ),
    ),
    [
      'feature 0: longitude beyond 360 or latitude beyond 90 degrees: [171, 911] at ring 0, position 2; correct the position',
    ],
  ],
  [
    'a projected crs',
    { ...file(good), crs: { type: 'name', properties: { name: 'urn:ogc:def:crs:EPSG::3857' } } },
    ['z.geojson: crs: GeoJSON positions are longitude and latitude, WGS 84: "urn:ogc:def:crs:EPSG::3857"; reproject'],
  ],
  [
    'a crs of no name',
    { ...file(good), crs: 'EPSG:4326' },
    ['z.geojson: crs: GeoJSON positions are longitude and latitude, WGS 84: "EPSG:4326"'],
  ],
  [
    'no properties',
    file({ type: 'Feature', id: 'A', geometry: polygon(square) }),
    ['zone_name: no zone has a name in "name": no such property'],
  ],
  [
    'several faults at once',
    file(
      feature('A', polygon(square.slice(1))),
      feature(
        'A',
        polygon([
          [0, 0],
          [2, 2],
          [2, 0],
          [0, 2],
          [0, 0],
        ]),
      ),
      feature('C', null),
    ),
    [
      'feature 1: zone name used twice',
      'feature 2: geometry missing',
      'feature 0: ring 0 is not closed',
      'feature 1: a ring crosses itself at (1, 1)',
    ],
  ],
]

describe('zones that can’t be used', () => {
  it.each(badFiles)('%s', (_, content, wanted) => {
    const read = readZones(content, 'z.geojson', 'name')
    const found = read.ok ? [] : read.problems.map(problemText)
    expect(found).toHaveLength(wanted.length)
    for (const words of wanted)
      expect(
        found.some((text) => text.includes(words)),
        `${words}\nin\n${found.join('\n')}`,
      ).toBe(true)
    for (const text of found) expect(text).toMatch(/^z\.geojson(: feature \d+)?: .+: .+; .+$/)
  })

  it('name the properties that exist where the one asked for does not', () => {
    const read = readZones(file({ ...good, properties: { ward: 'A', code: 7 } }), 'z.geojson', 'zone')
    expect(read.ok ? '' : read.problems.map(problemText).join()).toBe(
      'z.geojson: zone_name: no zone has a name in "zone": no such property; name one of the properties that exist: ward and code',
    )
  })

  it('cost no more than good ones: a scribble of 4,000 edges is named in a second', () => {
    const scribble = Array.from({ length: 4000 }, (_, i) => [Math.sin(i * 2.4) * 5, Math.cos(i * 1.7) * 5])
    const read = readZones(file(feature('A', polygon([...scribble, scribble[0]]))), 'z.geojson', 'name')
    expect(!read.ok && read.problems.length).toBe(6)
  })
})

describe('zones that can be used', () => {
  it('come in the order of the file, wound either way, with heights left out', () => {
    const high = square.map(([lon, lat]) => [lon, lat, 120])
    const read = readZones(
      file(feature('B', polygon([...high].reverse())), feature('A', multi([next]))),
      'z.geojson',
      'name',
    )
    expect(read.ok && read.value.names).toEqual(['B', 'A'])
    expect(read.ok && read.value.polygons[0]).toEqual([[[...square].reverse()]])
    expect(read.ok && read.value.properties).toEqual([{ name: 'B' }, { name: 'A' }])
  })

  it('may be named by id, carry the old crs of WGS 84, touch themselves, and have parts without area', () => {
    const dot = [
      [5, 5],
      [5, 5],
      [5, 5],
      [5, 5],
    ]
    const eight = [
      [0, 0],
      [1, 1],
      [2, 0],
      [2, 2],
      [1, 1],
      [0, 2],
      [0, 0],
    ]
    const content = {
      ...file({ type: 'Feature', id: 12, properties: null, geometry: multi([eight], [dot]) }),
      crs: { type: 'name', properties: { name: 'urn:ogc:def:crs:OGC:1.3:CRS84' } },
    }
    const read = readZones(content, 'z.geojson', undefined)
    expect(read.ok ? read.value.names : read.problems.map(problemText)).toEqual(['12'])
    expect(read.ok && read.value.polygons[0]).toEqual([[eight]])
  })

  it('may jump across the antimeridian, or go round a pole along its edges', () => {
    const jumping = [
      [179, 0],
      [-179, 0],
      [-179, 1],
      [179, 1],
      [179, 0],
    ]
    const pole = [
      [-180, -90],
      [180, -90],
      [180, -70],
      [0, -75],
      [-180, -70],
      [-180, -90],
    ]
    const read = readZones(file(feature('A', polygon(jumping)), feature('B', polygon(pole))), 'z.geojson', 'name')
    expect(read.ok && read.value.polygons[0][0][0].map(([lon]) => lon)).toEqual([179, 181, 181, 179, 179])
    expect(read.ok && read.value.polygons[1][0][0]).toEqual(pole)
  })

  it('are the United States as published', () => {
    expect(readZones(states, 'states.geojson', 'name').ok).toBe(true)
  })

  it('are the districts of Athens, as large as published', () => {
    // areas in the Greek grid (test/fixtures/SOURCES.md); that grid's areas are within 0.1% of the ellipsoid's here
    const published = [7.205019, 4.835935, 5.618766, 4.50597, 4.022963, 3.98682, 7.764333]
    const text = readFileSync(new URL('../fixtures/athens-flats/districts.geojson', import.meta.url), 'utf8')
    const read = readZones(JSON.parse(text), 'districts.geojson', 'district')
    if (!read.ok) throw new Error(read.problems.map(problemText).join())
    read.value.polygons.forEach((zone, i) => {
      const area = geographic.Geodesic.WGS84.Polygon(false)
      for (const [lon, lat] of zone[0][0].slice(1)) area.AddPoint(lat, lon)
      const km2 = Math.abs(area.Compute(false, true).area ?? Number.NaN) / 1e6
      expect(Math.abs(km2 / published[Number(read.value.names[i]) - 1] - 1)).toBeLessThan(0.001)
    })
  })
})
