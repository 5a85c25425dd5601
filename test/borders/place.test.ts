import { readFileSync } from 'node:fs'
import { booleanPointInPolygon } from '@turf/turf'
import type { Feature, Polygon } from 'geojson'
import { describe, expect, it } from 'vitest'
import { type Border, placeOnBorder, prepareBorder, readZones } from '../../src/borders/index.js'
import { bruteForceMetres, edgesOf } from './distanceBruteForce.js'
import { borderOf, box, closed, metresAround, seeded, zone } from './makeZones.js'
import { states } from './usStates.js'

const at = metresAround(12, 56)

function place(border: Border, points: readonly (readonly number[])[], reachMetres?: number, metresPerUnit = 1) {
  const [lon, lat] = [0, 1].map((k) => Float64Array.from(points, (p) => p[k]))
  return placeOnBorder(border, lon, lat, { metresPerUnit, reachMetres })
}

/** Rows of a fixture, as text by column. */
function rows(name: string): Record<string, string>[] {
  const text = readFileSync(new URL(`../fixtures/${name}`, import.meta.url), 'utf8')
  const [header, ...lines] = text
    .trim()
    .split(/\r?\n/)
    .map((line) => line.split(','))
  return lines.map((line) => Object.fromEntries(header.map((column, i) => [column, line[i]])))
}

describe('units on a border', () => {
  const features = [zone('T', box(at, 0, 0, 5000, 4000)), zone('U', box(at, 4998, 0, 9000, 4000))]
  const border = borderOf(features, ['T'], { snapMetres: 3 })

  it('get a signed distance, a line and a foot, or one reason', () => {
    const points = [
      at(4900, 1500), // placed, treated
      at(5200, 500), // placed, untreated
      [Number.NaN, 56],
      [12, Number.NaN],
      at(5000, 1700), // on the border
      at(-50, 1000), // outside
      at(4999, 1000), // in the overlap
      at(3000, 500), // too far
      [12, 95],
    ]
    const { placement, ground, setAside } = place(border, points, 1500)
    expect([...placement.unit]).toEqual([0, 1])
    expect([...placement.treated]).toEqual([1, 0])
    expect(placement.x[0]).toBeCloseTo(100, 1)
    expect(placement.x[1]).toBeCloseTo(-200, 1)
    expect([...placement.line].map((line) => placement.lines[line].id)).toEqual(['U | T, piece 2', 'U | T, piece 1'])
    expect(placement.lines).toHaveLength(4)
    expect(placement.lines[1]).toMatchObject({ label: 'U | T, piece 2', zones: ['U', 'T'], piece: 2 })
    expect(placement.lines[1].lengthMetres).toBeCloseTo(1000, 0)
    expect(Object.fromEntries(setAside)).toEqual({
      'position missing': 2,
      'exactly on the border': 1,
      'in no zone': 1,
      'in more than one zone': 1,
      'beyond reach': 1,
      'position out of range': 1,
    })
    expect([...ground.zone]).toEqual([0, 1, -1, -1, expect.any(Number), -1, -2, 0, -1])
    expect([...ground.piece]).toEqual([1, 0, -1, -1, 1, expect.any(Number), 0, 0, -2])
    const foot = at(5000, 1500)
    expect(Math.abs(ground.footLon[0] - foot[0]) + Math.abs(ground.footLat[0] - foot[1])).toBeLessThan(1e-6)
    expect(ground.positionMetres[0]).toBeCloseTo(1500, 0)
    expect(ground.positionMetres[7]).toBeCloseTo(500, 0)
    expect(Number.isNaN(ground.positionMetres[8])).toBe(true)
  })

  it('are measured in the unit of the study', () => {
    const [metres, kilometres] = [1, 1000].map((unit) => place(border, [at(4321, 500)], undefined, unit).placement.x[0])
    expect(kilometres).toBeCloseTo(metres / 1000, 12)
  })

  it('take their side from the zone, not from the nearest segment', () => {
    // a spit of T reaches past the border: its tip is nearest to units of U on three sides
    const spit = [at(5000, 0), at(5000, 1990), at(6000, 1995), at(6000, 2005), at(5000, 2010), at(5000, 4000)]
    const own = zone('T', closed([at(0, 0), ...spit, at(0, 4000)]))
    const other = zone('U', closed([at(9000, 4000), ...[...spit].reverse(), at(9000, 0)]))
    const around = place(borderOf([own, other], ['T']), [
      at(6100, 2000),
      at(5990, 2000),
      at(5500, 2050),
      at(5500, 1950),
      at(4999, 2000),
    ])
    expect([...around.placement.treated]).toEqual([0, 1, 0, 0, 1])
    expect(around.placement.x.map(Math.sign)).toEqual(Float64Array.of(-1, 1, -1, -1, 1))
  })

  it('throw where the caller is wrong', () => {
    expect(() => placeOnBorder(border, new Float64Array(2), new Float64Array(3), { metresPerUnit: 1 })).toThrow(
      RangeError,
    )
    expect(() => place(border, [], undefined, Number.NaN)).toThrow(RangeError)
  })
})

describe('where three zones meet', () => {
  // T has a sharp corner on the line between A and B: a whole wedge of units has its foot on the junction
  const own = zone('T', closed([at(0, 0), at(3000, 2000), at(0, 4000)]))
  const below = zone('A', closed([at(0, 0), at(9000, 0), at(9000, 2000), at(3000, 2000)]))
  const above = zone('B', closed([at(3000, 2000), at(9000, 2000), at(9000, 4000), at(0, 4000)]))
  const border = borderOf([above, own, below], ['T'], { pieceMetres: 1e6 })
  const random = seeded(5)
  const points = Array.from({ length: 400 }, () => at(3500 + 1000 * random(), 1800 + 400 * random()))

  it('a unit belongs to a border of its own zone', () => {
    const { placement, ground } = place(border, points)
    expect(placement.unit).toHaveLength(400)
    for (let i = 0; i < 400; i++) {
      const zoneName = border.zones.names[ground.zone[i]]
      expect(placement.lines[placement.line[i]].zones?.[0]).toBe(zoneName)
      const [ends] = border.pieces.filter((piece) => piece.zones[0] === zoneName)
      expect(ground.positionMetres[i] === 0 || Math.abs(ground.positionMetres[i] - ends.lengthMetres) < 1e-6).toBe(true)
    }
  })

  it('and the answer does not depend on the order of rows', () => {
    const order = points.map((_, i) => (i * 147) % 400)
    const straight = place(border, points)
    const shuffled = place(
      border,
      order.map((i) => points[i]),
    )
    for (const [to, from] of order.entries()) {
      expect(shuffled.placement.x[to]).toBe(straight.placement.x[from])
      expect(shuffled.placement.line[to]).toBe(straight.placement.line[from])
    }
  })
})

describe('United States counties of 1980', () => {
  const treated = ['Maine', 'Minnesota', 'North Dakota', 'Oregon', 'Wisconsin']
  const read = readZones(states, 'states.geojson', 'name')
  if (!read.ok) throw new Error('states must be readable')
  const made = prepareBorder(read.value, { treated, snapMetres: 10, pieceMetres: 50_000 })
  if (!made.ok) throw new Error(made.problems[0].what)
  const border = made.value
  const counties = rows('turnout-1980/counties.csv').map(({ lon, lat }) => [Number(lon), Number(lat)])
  const { placement, setAside } = place(border, counties, undefined, 1000)

  /** Edges that a treated and an untreated state have in common, by their vertices: nothing of ours. */
  function commonEdges() {
    const seen = new Map<string, { isTreated: boolean; edge: [number, number, number, number] }>()
    const common: [number, number, number, number][] = []
    for (const { properties, geometry } of states.features) {
      const isTreated = treated.includes(properties?.name)
      if (geometry.type !== 'Polygon' && geometry.type !== 'MultiPolygon') continue
      const polygons = geometry.type === 'Polygon' ? [geometry.coordinates] : geometry.coordinates
      for (const ring of polygons.flat()) {
        for (let i = 0; i + 1 < ring.length; i++) {
          const [a, b] = [ring[i], ring[i + 1]].sort((p, q) => p[0] - q[0] || p[1] - q[1])
          const key = `${a} ${b}`
          const before = seen.get(key)
          if (before && before.isTreated !== isTreated) common.push([a[0], a[1], b[0], b[1]])
          seen.set(key, { isTreated, edge: [a[0], a[1], b[0], b[1]] })
        }
      }
    }
    return edgesOf(common)
  }

  it('are placed, nearly all of them', () => {
    // centres of counties that reach into a lake or the sea, beyond the generalised shore
    expect(Object.fromEntries(setAside)).toEqual({ 'in no zone': 39 })
    expect(placement.unit.length).toBe(3107 - 39)
    const placed = new Set(placement.unit)
    const isAnywhere = (point: number[]) =>
      states.features.some((state) => booleanPointInPolygon(point, state as Feature<Polygon>))
    expect(counties.some((county, i) => !placed.has(i) && isAnywhere(county))).toBe(false)
    const north = placement.lines.filter((line) => line.zones?.[1] === 'Minnesota').map((line) => line.zones?.[0])
    expect([...new Set(north)]).toEqual(['Iowa', 'South Dakota'])
  })

  it('lie as far from the border as brute force with geographiclib says', () => {
    const edges = commonEdges()
    let worst = 0
    for (let e = 0; e < placement.unit.length; e += 29) {
      const [lon, lat] = counties[placement.unit[e]]
      const metres = Math.abs(placement.x[e]) * 1000
      worst = Math.max(worst, Math.abs(metres - bruteForceMetres(edges, lon, lat, 4)) / Math.max(0.001, 1e-6 * metres))
    }
    expect(worst).toBeLessThan(1)
  })

  it('are on the side of the state they lie in', () => {
    const inTreated = states.features.filter(({ properties }) =>
      treated.includes(properties?.name),
    ) as Feature<Polygon>[]
    for (let e = 0; e < placement.unit.length; e += 7) {
      const isInside = inTreated.some((state) => booleanPointInPolygon(counties[placement.unit[e]], state))
      expect(placement.treated[e]).toBe(isInside ? 1 : 0)
      expect(Math.sign(placement.x[e])).toBe(isInside ? 1 : -1)
    }
  })
})

describe('flats of Athens', () => {
  const districts = JSON.parse(
    readFileSync(new URL('../fixtures/athens-flats/districts.geojson', import.meta.url), 'utf8'),
  )
  const read = readZones(districts, 'districts.geojson', 'district')
  if (!read.ok) throw new Error('districts must be readable')
  const made = prepareBorder(read.value, { treated: ['1', '3'], snapMetres: 2, pieceMetres: 500 })
  if (!made.ok) throw new Error(made.problems[0].what)
  const flats = rows('athens-flats/flats.csv')
  const { placement, ground, setAside } = place(
    made.value,
    flats.map(({ lon, lat }) => [Number(lon), Number(lat)]),
  )

  it('stand in the district of their record', () => {
    expect(placement.unit).toHaveLength(1000)
    expect(setAside.size).toBe(0)
    expect(flats.map((_, i) => read.value.names[ground.zone[i]])).toEqual(flats.map((flat) => flat.district))
  })
  it('face districts 2, 4, 6 and 7 across the borders of districts 1 and 3', () => {
    expect([...new Set(placement.lines.map((line) => line.zones?.join(' | ')))]).toEqual([
      '2 | 1',
      '4 | 1',
      '4 | 3',
      '6 | 1',
      '7 | 1',
    ])
  })
})
