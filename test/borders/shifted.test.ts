import { booleanPointInPolygon, buffer } from '@turf/turf'
import { describe, expect, it } from 'vitest'
import {
  type BorderSide,
  eligible,
  localMetres,
  measureUnits,
  nearestEdges,
  shiftedBorder,
} from '../../src/borders/index.js'
import { problemText } from '../../src/problem.js'
import {
  borderOf,
  box,
  closed,
  columns,
  lengths,
  metresAround,
  type Point,
  seeded,
  withProperties,
  type ZoneFeature,
  zone,
} from './makeZones.js'

const at = metresAround(8, 50)
const km = 1000

function shiftedOf(features: ZoneFeature[], treated: string[], side: BorderSide, metres: number, more: object = {}) {
  const border = borderOf(features, treated, more)
  const made = shiftedBorder(border, side, metres, 1000)
  if (!made.ok) throw new Error(made.problems.map(problemText).join('\n'))
  return { real: border, ...made.value }
}

/** Signed metres of points from a shifted curve, positive on the side that counts as treated; and their zones. */
function placed(shifted: ReturnType<typeof shiftedOf>, points: Point[]) {
  const [lon, lat] = columns(points)
  const measured = measureUnits(shifted.border, lon, lat)
  const { placement } = eligible(shifted.border, measured, { metresPerUnit: 1 })
  return {
    x: [...placement.x],
    zones: Array.from(measured.zone, (index) => shifted.border.names[index]),
    realMetres: [...measureUnits(shifted.real, lon, lat).distanceMetres],
  }
}

const total = (shifted: ReturnType<typeof shiftedOf>) =>
  Object.values(lengths(shifted.border)).reduce((sum, metres) => sum + metres, 0)

describe('a line shifted from a straight border', () => {
  const halves = [zone('West', box(at, -10 * km, 0, 0, 20 * km)), zone('East', box(at, 0, 0, 10 * km, 20 * km))]

  for (const side of ['untreated', 'treated'] as const) {
    for (const metres of [50, 1000, 8000]) {
      it(`runs ${metres} m inside ${side} land`, () => {
        const shifted = shiftedOf(halves, ['East'], side, metres)
        const { edges } = shifted.border
        const { distanceMetres } = nearestEdges(shifted.real.tree, edges.lon0, edges.lat0)
        for (const distance of distanceMetres) expect(Math.abs(distance / metres - 1)).toBeLessThan(0.001)
        expect(shifted.errorMetres).toBeLessThan(0.001 * metres)
        expect(Math.abs(total(shifted) / (20 * km) - 1)).toBeLessThan(0.002)
        const sign = side === 'treated' ? 1 : -1
        expect([...edges.lon0].every((lon) => sign * (lon - 8) > 0)).toBe(true)
      })
    }
  }

  it('counts the land nearer to treated land as treated', () => {
    const points = [at(-700, 10 * km), at(-1300, 10 * km)]
    const west = placed(shiftedOf(halves, ['East'], 'untreated', 1000), points)
    expect(west.zones).toEqual(['near', 'far'])
    expect(west.x.map((x) => Math.round(x / 10) * 10)).toEqual([300, -300])
    const east = placed(shiftedOf(halves, ['East'], 'treated', 1000), [at(700, 10 * km), at(1300, 10 * km)])
    expect(east.zones).toEqual(['near', 'far'])
    expect(east.x.map((x) => Math.round(x / 10) * 10)).toEqual([-300, 300])
  })

  it('is straight along a parallel of 300 km, too', () => {
    // one edge along 60° N: straight in degrees, bent on the ground; sections and groups of them joined
    const north = zone(
      'North',
      closed([
        [0, 60],
        [5.5, 60],
        [5.5, 61],
        [0, 61],
      ]),
    )
    const south = zone(
      'South',
      closed([
        [0, 59],
        [5.5, 59],
        [5.5, 60],
        [0, 60],
      ]),
    )
    const shifted = shiftedOf([north, south], ['North'], 'untreated', 10 * km)
    expect(shifted.errorMetres).toBeLessThan(10)
    const { edges } = shifted.border
    expect(Math.max(...edges.lat0) - Math.min(...edges.lat0)).toBeLessThan(0.0003)
    expect(shifted.border.pieces.length).toBeGreaterThan(250)
  })

  it('crosses the antimeridian', () => {
    const [west, east] = [at(0, 0), at(0, 0)].map(() => metresAround(180, -17))
    const halvesThere = [
      zone('North', box(west, -10 * km, 0, 10 * km, 10 * km)),
      zone('South', box(east, -10 * km, -10 * km, 10 * km, 0)),
    ]
    const shifted = shiftedOf(halvesThere, ['North'], 'untreated', 2000)
    expect(shifted.errorMetres).toBeLessThan(2)
    expect(Math.abs(total(shifted) / (20 * km) - 1)).toBeLessThan(0.002)
  })
})

describe('a line shifted from a corner', () => {
  // the north-east quarter is treated
  const quarter = closed([at(0, 0), at(5 * km, 0), at(5 * km, 5 * km), at(0, 5 * km)])
  const rest = closed([
    at(-5 * km, -5 * km),
    at(5 * km, -5 * km),
    at(5 * km, 0),
    at(0, 0),
    at(0, 5 * km),
    at(-5 * km, 5 * km),
  ])
  const features = [zone('Quarter', quarter), zone('Rest', rest)]

  it('is round outside: two straight lines and a quarter of a circle', () => {
    const shifted = shiftedOf(features, ['Quarter'], 'untreated', 1000)
    expect(Math.abs(total(shifted) / (10 * km + (Math.PI / 2) * 1000) - 1)).toBeLessThan(0.002)
    expect(shifted.errorMetres).toBeLessThan(1)
    const { x } = placed(shifted, [at(-300, -400), at(-600, -800.0), at(-900, -1200)])
    // on the ray of slope 4/3 from the corner: 500, 1,000 and 1,500 m from it
    expect(Math.abs(x[0] - 500)).toBeLessThan(1)
    expect(Math.abs(x[1])).toBeLessThan(1)
    expect(Math.abs(x[2] + 500)).toBeLessThan(1)
  })

  it('holds the same land as a buffer drawn by turf', () => {
    // turf buffers on a sphere, up to 0.3 % off here (the ellipsoid's radii of curvature at 50° against its mean radius)
    const shifted = shiftedOf(features, ['Quarter'], 'untreated', 1000)
    const line = { type: 'LineString', coordinates: [at(0, 5 * km), at(0, 0), at(5 * km, 0)] } as const
    const within = buffer({ ...line, coordinates: [...line.coordinates] }, 1000, { units: 'meters', steps: 64 })
    if (!within) throw new Error('no buffer')
    const random = seeded(11)
    const points = Array.from({ length: 2000 }, () => at(-2000 + 6000 * random(), -2000 + 6000 * random()))
    const { zones, realMetres } = placed(shifted, points)
    const clear = points.map((_, i) => i).filter((i) => Math.abs(realMetres[i] - 1000) > 5)
    expect(clear.length).toBeGreaterThan(1900)
    for (const i of clear) expect(zones[i]).toBe(booleanPointInPolygon(points[i], within) ? 'near' : 'far')
  })

  it('is sharp inside, so that its distance is not what is left of the distance to the border', () => {
    const shifted = shiftedOf(features, ['Quarter'], 'treated', 1000)
    expect(Math.abs(total(shifted) / (8 * km) - 1)).toBeLessThan(0.002)
    const { x, realMetres } = placed(shifted, [at(1500, 1500), at(500, 500)])
    expect(Math.abs(x[0] - 500)).toBeLessThan(2)
    expect(Math.abs(realMetres[1] - 500)).toBeLessThan(1)
    expect(Math.abs(x[1] + 500 * Math.SQRT2)).toBeLessThan(2)
  })
})

describe('a line shifted where the border comes back', () => {
  // a treated U, open to the north: inside it untreated land 800 m wide and 4 km deep
  const u = closed([
    at(-1400, 0),
    at(1400, 0),
    at(1400, 5000),
    at(400, 5000),
    at(400, 1000),
    at(-400, 1000),
    at(-400, 5000),
    at(-1400, 5000),
  ])
  const around: Point[] = box(at, -8000, -8000, 8000, 12_000)
  const outer = zone('Around', around, u)
  const features = [zone('U', u), outer]

  it('has no part between the arms, and is far away from there', () => {
    const shifted = shiftedOf(features, ['U'], 'untreated', 600)
    const deep = at(0, 2000)
    const { x, zones, realMetres } = placed(shifted, [deep, at(0, 5700), at(-2200, 2000)])
    expect(zones).toEqual(['near', 'far', 'far'])
    // 400 m from the border, so that 600 - 400 would say 200 m; the nearest of the curve lies beyond an arm, at
    // x = ±(1400 + 600)
    expect(Math.abs(realMetres[0] - 400)).toBeLessThan(1)
    expect(Math.abs(x[0] - 2000)).toBeLessThan(2)
    // north of the mouth, 700 m beyond the tips at (±400, 5000): the curve is round about the tips
    expect(Math.abs(realMetres[1] - Math.hypot(400, 700))).toBeLessThan(1)
    expect(Math.abs(x[1] + (Math.hypot(400, 700) - 600))).toBeLessThan(2)
    expect(Math.abs(x[2] + 200)).toBeLessThan(1)
  })

  it('has every piece 600 m from the border, measured', () => {
    const shifted = shiftedOf(features, ['U'], 'untreated', 600)
    expect(shifted.errorMetres).toBeLessThan(0.6)
  })

  it('is refused where no land lies so far from every border', () => {
    const strips = [
      zone('West', box(at, 0, 0, 3000, 9000)),
      zone('Middle', box(at, 3000, 0, 6000, 9000)),
      zone('East', box(at, 6000, 0, 9000, 9000)),
    ]
    const border = borderOf(strips, ['West', 'East'])
    expect(shiftedBorder(border, 'untreated', 1400, 1000).ok).toBe(true)
    const refused = shiftedBorder(border, 'untreated', 1600, 1000)
    expect(refused.ok ? '' : problemText(refused.problems[0])).toBe(
      'zones.geojson: a line 1600 m into untreated land: there is no such land; take a shorter distance',
    )
  })
})

describe('a line shifted on real ground', () => {
  it('goes round islands and stops at holes and at land of the other kind', () => {
    const hole = box(at, -4000, 2000, -2000, 4000)
    const west = zone('West', box(at, -10_000, 0, 0, 10_000), hole, box(at, -8000, 7000, -7000, 8000))
    const features = [
      west,
      zone('East', box(at, 0, 0, 10_000, 10_000)),
      zone('Island', box(at, -8000, 7000, -7000, 8000)),
    ]
    const shifted = shiftedOf(features, ['East', 'Island'], 'untreated', 2500)
    const { edges } = shifted.border
    const locals = localMetres(8, 50, edges.lon0, edges.lat0)
    const inHole = locals.eastMetres.filter((x, i) => {
      const y = locals.northMetres[i]
      return x > -3950 && x < -2050 && y > 2050 && y < 3950
    })
    expect(inHole.length).toBe(0)
    expect(Math.max(...locals.northMetres)).toBeLessThan(10_050)
    expect(Math.min(...locals.eastMetres)).toBeGreaterThan(-10_050)
    // the long line of 10 km less 2 km in the hole; round the island: the bottom of 1,000 m, the east side of 1,000 m, the
    // south-east quarter, and of the south-west one what is east of x = −10,000 (asin 0.8), of the north-east one what is
    // south of y = 10,000 (asin 0.8); of the north-west one what keeps in the corner of both
    const island = 2000 + 2500 * (Math.PI / 2 + 2 * Math.asin(0.8) + Math.PI / 2 - 2 * Math.asin(0.6))
    expect(Math.abs(total(shifted) / (8000 + island) - 1)).toBeLessThan(0.003)
  })

  it('holds the land that is nearer than the distance, among islands at random', () => {
    const random = seeded(21)
    const islands = Array.from({ length: 40 }, (_, i) => {
      const [x, y] = [(i % 8) * 1500 + 600 * random(), Math.floor(i / 8) * 1500 + 600 * random()]
      return box(at, x, y, x + 200 + 500 * random(), y + 200 + 500 * random())
    })
    const sea = zone('Sea', box(at, -3000, -3000, 15_000, 11_000), ...islands)
    const land = islands.map((ring, i) => zone(`Island ${i}`, ring))
    const names = land.map(({ properties }) => String(properties?.name))
    for (const metres of [250, 420, 480, 520]) {
      const shifted = shiftedOf([sea, ...land], names, 'untreated', metres)
      // where curves about two islands all but touch, the grid's squares are too coarse for what lies between
      expect(shifted.errorMetres).toBeLessThan(0.05 * metres)
      const points = Array.from({ length: 20_000 }, () => at(14_000 * random() - 1000, 9000 * random() - 1000))
      const { zones, realMetres } = placed(shifted, points)
      const wrong = points.filter(
        (_, i) => Math.abs(realMetres[i] - metres) > 0.02 * metres && (zones[i] === 'near') !== realMetres[i] < metres,
      )
      expect(wrong).toEqual([])
    }
  })

  it('takes the land outside for untreated where the study does', () => {
    const only = [zone('Town', box(at, 0, 0, 4000, 4000))]
    const shifted = shiftedOf(only, ['Town'], 'untreated', 500, { outside: 'untreated' })
    expect(Math.abs(total(shifted) / (16_000 + 2 * Math.PI * 500) - 1)).toBeLessThan(0.002)
    const inside = shiftedOf(only, ['Town'], 'treated', 500, { outside: 'untreated' })
    expect(Math.abs(total(inside) / 12_000 - 1)).toBeLessThan(0.002)
  })

  it('is the same whatever the order of zones', () => {
    const random = seeded(3)
    const columnsOf = [...'ABCD'].map((name, c) => zone(name, box(at, c * 2000, 0, (c + 1) * 2000, 6000)))
    const one = shiftedOf(columnsOf, ['B', 'D'], 'untreated', 700)
    const two = shiftedOf([...columnsOf].reverse(), ['D', 'B'], 'untreated', 700)
    expect(two.border.pieces).toEqual(one.border.pieces)
    const points = Array.from({ length: 100 }, () => at(8000 * random(), 6000 * random()))
    expect(placed(two, points).x).toEqual(placed(one, points).x)
  })

  it('is refused between doses, and for distances that are none', () => {
    const levied = ['A', 'B'].map((name, i) =>
      withProperties(zone(name, box(at, i * 2000, 0, (i + 1) * 2000, 2000)), { levy: i }),
    )
    const border = borderOf(levied, undefined, { dose: 'levy' })
    expect(shiftedBorder(border, 'treated', 500, 1000).ok).toBe(false)
    for (const metres of [0, -1, Number.NaN, Infinity])
      expect(() => shiftedBorder(border, 'treated', metres, 1000)).toThrow(RangeError)
  })
})
