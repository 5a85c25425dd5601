import { readFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import { booleanPointInPolygon } from '@turf/turf'
import { feature } from 'topojson-client'
import { describe, expect, it } from 'vitest'
import { crossesEast, crossesNorth } from '../../src/borders/zoneCrossing.js'
import { buildZoneGrid, locateInZones } from '../../src/borders/zoneGrid.js'
import { jaggedMap, scatteredPoints, seededUniform } from '../bench/distance.js'

type Position = readonly number[]
type MultiPolygon = readonly (readonly (readonly Position[])[])[]

function located(zones: readonly MultiPolygon[], points: readonly (readonly [number, number])[]): number[] {
  const lon = Float64Array.from(points, ([x]) => x)
  const lat = Float64Array.from(points, ([, y]) => y)
  return [...locateInZones(buildZoneGrid(zones), lon, lat)]
}

/** Even-odd over all rings, plain arithmetic: sure unless the point is within rounding of an edge. */
function holds(zone: MultiPolygon, x: number, y: number): boolean {
  let isInside = false
  for (const rings of zone)
    for (const ring of rings)
      for (let k = 1; k < ring.length; k++) {
        const [x0, y0] = ring[k - 1]
        const [x1, y1] = ring[k]
        if (y0 > y !== y1 > y && x < x0 + ((y - y0) / (y1 - y0)) * (x1 - x0)) isInside = !isInside
      }
  return isInside
}

function slowlyLocated(zones: readonly MultiPolygon[], x: number, y: number): number {
  const inside = zones.flatMap((zone, k) => (holds(zone, x, y) ? [k] : []))
  return inside.length === 0 ? -1 : inside.length === 1 ? inside[0] : -2
}

const box = (west: number, south: number, east: number, north: number): Position[] => [
  [west, south],
  [east, south],
  [east, north],
  [west, north],
  [west, south],
]

/** States and counties of us-atlas (a development package; US Census Bureau), quantised lon/lat. */
function atlas(file: string, object: string): MultiPolygon[] {
  const path = createRequire(import.meta.url).resolve(`us-atlas/${file}`)
  const topology = JSON.parse(readFileSync(path, 'utf8'))
  const collection = feature(topology, topology.objects[object]) as unknown as {
    features: { geometry: { type: string; coordinates: unknown } }[]
  }
  return collection.features.map(({ geometry: { type, coordinates } }) =>
    type === 'Polygon' ? [coordinates as Position[][]] : (coordinates as MultiPolygon),
  )
}

describe('zone of a point on real maps', () => {
  const states = atlas('states-10m.json', 'states')
  const counties = atlas('counties-10m.json', 'counties')
  const uniform = seededUniform(21)
  const scattered = (count: number, west: number, south: number, east: number, north: number) =>
    Array.from({ length: count }, (): [number, number] => [
      west + (east - west) * uniform(),
      south + (north - south) * uniform(),
    ])

  it('states: agrees with the plain ring test and with turf, islands and holes and all', () => {
    const points = [
      ...scattered(600, -125, 24, -66, 50),
      ...scattered(200, -180, 50, -130, 72),
      ...scattered(100, -161, 18, -154, 23),
    ]
    const zones = located(states, points)
    expect(zones.filter((zone) => zone >= 0).length).toBeGreaterThan(300)
    points.forEach(([x, y], i) => {
      expect(zones[i]).toBe(slowlyLocated(states, x, y))
      if (i % 4 > 0) return
      const byTurf = states.findIndex((zone) =>
        booleanPointInPolygon([x, y], { type: 'MultiPolygon', coordinates: zone as number[][][][] }),
      )
      expect(zones[i]).toBe(byTurf)
    })
  })
  it('counties: agrees with the plain ring test', () => {
    const points = scattered(500, -125, 24, -66, 50)
    const zones = located(counties, points)
    points.forEach(([x, y], i) => {
      expect(zones[i]).toBe(slowlyLocated(counties, x, y))
    })
  })
  it('counties: a point on a vertex inland is in one county, never in two or none', () => {
    // vertices of Kansas counties (an inland state) lie between counties
    const kansas = states.findIndex((zone) => holds(zone, -98.5, 38.5))
    const inland = counties
      .flat(3)
      .filter(([x, y]) => x > -101.9 && x < -95.1 && y > 37.1 && y < 39.9 && holds(states[kansas], x, y))
    expect(inland.length).toBeGreaterThan(500)
    for (const zone of located(counties, inland as unknown as [number, number][]))
      expect(zone).toBeGreaterThanOrEqual(0)
  })
})

describe('zone of a point on a jagged map', () => {
  const map = jaggedMap(12, 4, 5)
  it('agrees with the plain ring test', () => {
    const { lon, lat } = scatteredPoints(map, 2000, 6)
    const zones = locateInZones(buildZoneGrid(map.zones), lon, lat)
    for (let i = 0; i < 2000; i++) expect(zones[i]).toBe(slowlyLocated(map.zones, lon[i], lat[i]))
  })
  it('gives every vertex and every place on an edge between zones to exactly one zone', () => {
    const points: [number, number][] = []
    const { lon0, lat0, lon1, lat1 } = map.edges
    for (let edge = 0; edge < lon0.length; edge++) {
      for (const t of [0, 0.5, 0.3]) {
        const x = lon0[edge] + t * (lon1[edge] - lon0[edge])
        const y = lat0[edge] + t * (lat1[edge] - lat0[edge])
        // off the outer border, which is shared with nobody
        if (x > -107 && x < -83 && y > 32 && y < 48) points.push([x, y])
      }
    }
    expect(points.length).toBeGreaterThan(8000)
    for (const zone of located(map.zones, points)) expect(zone).toBeGreaterThanOrEqual(0)
  })
  it('does not depend on winding or on where a ring begins', () => {
    const { lon, lat } = scatteredPoints(map, 2000, 7)
    const turned = map.zones.map((zone) =>
      zone.map((rings) => rings.map((ring) => [...ring.slice(5), ...ring.slice(1, 6)].reverse())),
    )
    expect(locateInZones(buildZoneGrid(turned), lon, lat)).toEqual(locateInZones(buildZoneGrid(map.zones), lon, lat))
  })
})

describe('zone of a point, by hand', () => {
  it('knows holes, islands in holes and zones of several parts', () => {
    const outer: MultiPolygon = [[box(0, 0, 10, 10), box(2, 2, 8, 8)], [box(4, 4, 6, 6)], [box(20, 0, 21, 1)]]
    const points: [number, number][] = [
      [1, 1],
      [3, 3],
      [5, 5],
      [20.5, 0.5],
      [15, 0.5],
      [1, 5],
      [9, 5],
      [5, 9.9],
      [5, 3],
      [11, 5],
      [-1, 5],
    ]
    expect(located([outer], points)).toEqual([0, -1, 0, 0, -1, 0, 0, 0, -1, -1, -1])
  })
  it('says -2 where zones overlap, also where one has no edge near', () => {
    const zones: MultiPolygon[] = [[[box(0, 0, 10, 10)]], [[box(4, 4, 6, 6)]], [[box(9, 9, 12, 12)]]]
    expect(
      located(zones, [
        [5, 5],
        [1, 1],
        [9.5, 9.5],
        [11, 11],
        [4.01, 5],
        [3.99, 5],
      ]),
    ).toEqual([-2, 0, -2, 2, -2, 0])
  })
  it('halves four squares that meet, their sides and the point in the middle included', () => {
    const zones: MultiPolygon[] = [[[box(0, 0, 1, 1)]], [[box(1, 0, 2, 1)]], [[box(0, 1, 1, 2)]], [[box(1, 1, 2, 2)]]]
    // the zone to the east and the north takes the edge
    expect(
      located(zones, [
        [1, 1],
        [1, 0.5],
        [0.5, 1],
        [1, 0],
        [0, 1],
        [0, 0],
        [2, 1],
        [1, 2],
      ]),
    ).toEqual([3, 1, 2, 1, 2, 0, -1, -1])
  })
  it('gives points on a slanting edge to one of its two zones, whatever the rounding', () => {
    const a: MultiPolygon = [
      [
        [
          [0, 0],
          [1.1, 3.3],
          [-2, 3],
          [0, 0],
        ],
      ],
    ]
    const b: MultiPolygon = [
      [
        [
          [0, 0],
          [3, 0],
          [1.1, 3.3],
          [0, 0],
        ],
      ],
    ]
    const uniform = seededUniform(1)
    const points = Array.from({ length: 20_000 }, (): [number, number] => {
      const t = uniform()
      return [1.1 * t, 3.3 * t]
    })
    for (const zone of located([a, b], points)) expect(zone).toBeGreaterThanOrEqual(0)
  })
  it('knows long edges across many cells', () => {
    const fan: Position[][] = Array.from({ length: 40 }, (_, k) => [
      [0, 0],
      [50, k],
      [50, k + 1],
      [0, 0],
    ])
    const zones = fan.map((ring): MultiPolygon => [[ring]])
    const uniform = seededUniform(2)
    const points = Array.from({ length: 3000 }, (): [number, number] => [50 * uniform(), 40 * uniform()])
    located(zones, points).forEach((zone, i) => {
      const [x, y] = points[i]
      const slot = Math.floor((50 * y) / x)
      expect(zone).toBe(slot < 40 ? slot : -1)
    })
  })
  it('reads zones at 180° split or past it', () => {
    const split: MultiPolygon[] = [[[box(175, 0, 180, 5)], [box(-180, 0, -178, 5)]], [[box(-178, 0, -170, 5)]]]
    const whole: MultiPolygon[] = [[[box(175, 0, 182, 5)]], [[box(182, 0, 190, 5)]]]
    const west: MultiPolygon[] = [[[box(-185, 0, -178, 5)]], [[box(-178, 0, -170, 5)]]]
    const mixed: MultiPolygon[] = [[[box(175, 0, 182, 5)]], [[box(-178, 0, -170, 5)]]]
    const points: [number, number][] = [
      [176, 1],
      [180, 1],
      [-180, 1],
      [-179, 1],
      [-178, 1],
      [-171, 1],
      [181, 1],
      [189, 1],
      [-184, 1],
      [536, 1],
      [0, 1],
      [170, 1],
    ]
    const truth = [0, 0, 0, 0, 1, 1, 0, 1, 0, 0, -1, -1]
    for (const zones of [split, whole, west, mixed]) expect(located(zones, points)).toEqual(truth)
  })
  it('gives the poles to a zone that reaches them', () => {
    const zones: MultiPolygon[] = [[[box(-180, 60, 0, 90)]], [[box(0, 60, 180, 90)]], [[box(-180, -90, 180, -70)]]]
    expect(
      located(zones, [
        [-50, 90],
        [50, 90],
        [12, -90],
        [180, 80],
        [-180, 80],
        [10, -80],
      ]),
    ).toEqual([0, 1, 2, 0, 0, 2])
  })
  it('closes an open ring, passes over doubled vertices, and knows no zone for NaN', () => {
    const open: MultiPolygon = [
      [
        [
          [0, 0],
          [1, 0],
          [1, 0],
          [1, 1],
          [0, 1],
        ],
      ],
    ]
    expect(
      located(
        [open],
        [
          [0.5, 0.5],
          [0.1, 0.9],
          [1.5, 0.5],
          [Number.NaN, 0.5],
          [0.5, Number.NaN],
          [Infinity, 0.5],
        ],
      ),
    ).toEqual([0, 0, -1, -1, -1, -1])
    expect(located([], [[0, 0]])).toEqual([-1])
    expect(located([[]], [[0, 0]])).toEqual([-1])
  })
  it('refuses vertices that are no numbers and arrays of different lengths', () => {
    expect(() =>
      buildZoneGrid([
        [
          [
            [
              [0, 0],
              [1, Number.NaN],
              [1, 1],
              [0, 0],
            ],
          ],
        ],
      ]),
    ).toThrow(RangeError)
    expect(() => locateInZones(buildZoneGrid([]), new Float64Array(2), new Float64Array(1))).toThrow(/2 points/)
  })
})

describe('edges beside a point', () => {
  it('are those beside the point moved by (ε, ε²), for every edge and point of a 5 x 5 lattice', () => {
    // in the lattice no other sign changes within steps as small as these
    const east = 1e-3
    const north = 1e-7
    const lattice = Array.from({ length: 25 }, (_, k): [number, number] => [k % 5, Math.floor(k / 5)])
    for (const [x0, y0] of lattice) {
      for (const [x1, y1] of lattice) {
        if (y1 < y0 || (y1 === y0 && x1 <= x0)) continue
        const edge = {
          x0: Float64Array.of(x0),
          y0: Float64Array.of(y0),
          x1: Float64Array.of(x1),
          y1: Float64Array.of(y1),
        }
        const wrong = lattice.filter(([latticeX, latticeY]) => {
          const [x, y] = [latticeX + east, latticeY + north]
          const isBeside = y0 < y && y < y1 && x < x0 + ((y - y0) / (y1 - y0)) * (x1 - x0)
          const isBelow = Math.min(x0, x1) < x && x < Math.max(x0, x1) && y < y0 + ((x - x0) / (x1 - x0)) * (y1 - y0)
          return (
            crossesEast(edge, 0, latticeX, latticeY) !== isBeside ||
            crossesNorth(edge, 0, latticeX, latticeY) !== isBelow
          )
        })
        expect(wrong).toEqual([])
      }
    }
  })
})
