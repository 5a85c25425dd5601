import { describe, expect, it } from 'vitest'
import { eligible, measureUnits } from '../../src/borders/index.js'
import {
  borderOf,
  box,
  closed,
  columns,
  lengths,
  metresAround,
  multiZone,
  type Point,
  problemsOf,
  type ZoneFeature,
  zone,
} from './makeZones.js'

const at = metresAround(-9, 38)
const outside = { outside: 'untreated' as const }

/** Metres of border with the land outside, and with zones. */
function metresWith(features: ZoneFeature[], treated: string[], snapMetres = 2): Record<string, number> {
  return lengths(borderOf(features, treated, { ...outside, snapMetres }))
}

function near(found: number, wanted: number): void {
  expect(Math.abs(found / wanted - 1)).toBeLessThan(0.001)
}

describe('the land outside as a zone', () => {
  const own = zone('T', box(at, 0, 0, 4000, 3000))

  it('borders all of an island, as one closed border', () => {
    const border = borderOf([own], ['T'], { ...outside, pieceMetres: 1e6 })
    expect(border.names).toEqual(['T', 'outside'])
    expect(border.pieces.map(({ label }) => label)).toEqual(['outside | T, piece 1'])
    near(border.pieces[0].lengthMetres, 14_000)
    expect(border.pieces[0].straightness).toBe(0)
  })

  it('borders what no other zone shares, to the very point where the shared border ends', () => {
    const found = metresWith([own, zone('U', box(at, 4000, 0, 9000, 3000))], ['T'], 50)
    expect(Object.keys(found)).toEqual(['U | T', 'outside | T'])
    near(found['U | T'], 3000)
    near(found['outside | T'], 11_000)
  })

  it('takes nothing of the border of two treated zones', () => {
    const found = metresWith([own, zone('T2', box(at, 4000, 0, 9000, 3000))], ['T', 'T2'])
    expect(Object.keys(found)).toEqual(['outside | T', 'outside | T2'])
    near(found['outside | T'], 11_000)
    near(found['outside | T2'], 13_000)
  })

  it('does not reach inland where zones were drawn apart', () => {
    const apart = [own, zone('A', box(at, 4010, 0, 9000, 1495)), zone('B', box(at, 4005, 1500, 9000, 3000))]
    const found = metresWith(apart, ['T'], 20)
    near(found['outside | T'], 11_000)
    expect(Math.abs(found['A | T'] + found['B | T'] - 3000)).toBeLessThan(25)
  })

  it('begins and ends where a border drawn apart does, in the middle of an edge', () => {
    const zones = [own, zone('U', box(at, 4010, 1000, 9000, 2000))]
    const [shared, coast] = borderOf(zones, ['T'], { ...outside, snapMetres: 50, pieceMetres: 1e6 }).pieces
    expect(Math.abs(shared.lengthMetres - 1000)).toBeLessThan(1)
    expect(Math.abs(coast.lengthMetres / 13_000 - 1)).toBeLessThan(2e-4)
    const ends = ({ coordinates }: typeof shared) => [coordinates[0], coordinates[coordinates.length - 1]]
    const [south, north] = ends(shared).sort((p, q) => p[1] - q[1])
    ends(coast)
      .sort((p, q) => p[1] - q[1])
      .forEach(([lon, lat], i) => {
        expect(Math.abs(lon - [south, north][i][0]) + Math.abs(lat - [south, north][i][1])).toBeLessThan(1e-9)
      })
  })

  it('is none where a third zone only comes near at a corner', () => {
    const wedge = zone('C', closed([at(4005, 1480), at(9000, 1480), at(9000, 1510), at(4005, 1510)]))
    const zones = [own, zone('A', box(at, 4000, 0, 9000, 1480)), wedge, zone('B', box(at, 4000, 1510, 9000, 3000))]
    const border = borderOf(zones, ['T'], { ...outside, snapMetres: 20, pieceMetres: 1e6 })
    expect(border.pieces.map(({ label }) => label)).toEqual([
      'A | T, piece 1',
      'B | T, piece 1',
      'outside | T, piece 1',
    ])
    near(border.pieces[2].lengthMetres, 11_000)
    expect(border.corners.map(({ zones: met }) => met.join())).toContain('A,B,T')
  })

  it('reaches the shared border though a vertex lies within the tolerance of it', () => {
    // the south-western corner is drawn as a step of 5 by 10 m, within the tolerance of U
    const stepped = zone('T', closed([at(0, 0), at(4000, 0), at(4000, 3000), at(0, 3000), at(-5, 10)]))
    const border = borderOf([stepped, zone('U', box(at, 0, -3000, 4000, 0))], ['T'], {
      ...outside,
      snapMetres: 20,
      pieceMetres: 1e6,
    })
    const [shared, coast] = border.pieces
    expect(coast.coordinates[0]).toEqual(shared.coordinates[0])
    expect(coast.coordinates.at(-1)).toEqual(shared.coordinates.at(-1))
  })

  it('fills holes that no zone fills', () => {
    const lake = box(at, 1000, 1000, 1500, 1500)
    const island = box(at, 2000, 1000, 2500, 2000)
    const holed = zone('T', box(at, 0, 0, 4000, 3000), lake, island)
    const found = metresWith([holed, zone('U', island)], ['T'])
    near(found['U | T'], 3000)
    near(found['outside | T'], 14_000 + 2000)
  })

  it('is no border at the seam of a zone cut at the antimeridian', () => {
    const cut = multiZone(
      'T',
      [
        closed([
          [179.9, 10],
          [180, 10],
          [180, 10.1],
          [179.9, 10.1],
        ]),
      ],
      [
        closed([
          [-180, 10],
          [-179.9, 10],
          [-179.9, 10.1],
          [-180, 10.1],
        ]),
      ],
    )
    const whole = zone(
      'T',
      closed([
        [179.9, 10],
        [180.1, 10],
        [180.1, 10.1],
        [179.9, 10.1],
      ]),
    )
    near(metresWith([cut], ['T'])['outside | T'], metresWith([whole], ['T'])['outside | T'])
  })

  it('holds the units that are in no zone', () => {
    const border = borderOf([own, zone('U', box(at, 4000, 0, 9000, 3000))], ['T'], outside)
    const points: (Point | number[])[] = [
      at(-200, 1500),
      at(300, 1500),
      at(4200, 1500),
      at(2000, 3400),
      [Number.NaN, 3],
      [8, 99],
    ]
    const measured = measureUnits(border, ...columns(points))
    const { placement, setAside, ground } = eligible(border, measured, { metresPerUnit: 1 })
    expect(Array.from(placement.x, Math.round)).toEqual([-200, 300, -200, -400])
    expect([...ground.zone].map((z) => border.names[z])).toEqual(['outside', 'T', 'U', 'outside', undefined, undefined])
    expect(Array.from(placement.line, (line) => placement.lines[line].zones?.[0])).toEqual([
      'outside',
      'outside',
      'U',
      'outside',
    ])
    expect(Object.fromEntries(setAside)).toEqual({ 'position missing': 1, 'position out of range': 1 })
  })

  it('changes nothing by the order of zones or rings', () => {
    const zones = [own, zone('U', box(at, 4000, 0, 9000, 3000)), zone('T2', box(at, 0, 3000, 4000, 5000))]
    const turned = [...zones].reverse().map((feature) => ({
      ...feature,
      geometry: {
        type: 'Polygon' as const,
        coordinates: (feature.geometry.coordinates as Point[][]).map((ring) => closed([...ring.slice(1)].reverse())),
      },
    }))
    const given = borderOf(zones, ['T', 'T2'], outside)
    const other = borderOf(turned, ['T', 'T2'], outside)
    expect(JSON.stringify(other.pieces)).toBe(JSON.stringify(given.pieces))
    expect(other.corners).toEqual(given.corners)
  })

  it('may not have the name of a zone, and lets every zone be treated', () => {
    expect(problemsOf([own, zone('outside', box(at, 4000, 0, 9000, 3000))], ['T'], outside)).toMatch(
      /outside: untreated takes the name of a zone: a zone named "outside"; rename the zone/,
    )
    expect(problemsOf([own], ['T'])).toMatch(/every zone is treated/)
    expect(problemsOf([own], ['T'], outside)).toBe('')
  })
})
