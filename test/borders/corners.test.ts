import { describe, expect, it } from 'vitest'
import { eligible, geodesicMetres, measureUnits, metresToCorner, runnerUps } from '../../src/borders/index.js'
import { borderOf, box, columns, metresAround, type Point, seeded, type ZoneFeature, zone } from './makeZones.js'

const at = metresAround(24, 61)
/** T in the west; A south-east and B north-east of it: three zones meet at (5000, 2000). */
const junction = [
  zone('T', box(at, 0, 0, 5000, 4000)),
  zone('A', box(at, 5000, 0, 9000, 2000)),
  zone('B', box(at, 5000, 2000, 9000, 4000)),
]

/** Every order of the zones. */
const orders = [
  [0, 1, 2],
  [0, 2, 1],
  [1, 0, 2],
  [1, 2, 0],
  [2, 0, 1],
  [2, 1, 0],
].map((order) => order.map((i) => junction[i]))

function metresFrom([lon, lat]: Point, corner: { lon: number; lat: number }): number {
  return geodesicMetres(lon, lat, corner.lon, corner.lat)
}

describe('corners', () => {
  it.each([
    ['one treated zone and two others', ['T']],
    ['two treated zones and one other', ['A', 'B']],
    ['a treated zone between', ['A']],
  ])('are where three zones meet: %s', (_, treated) => {
    const { corners } = borderOf(junction, treated)
    expect(corners).toHaveLength(1)
    expect(corners[0].zones).toEqual(['A', 'B', 'T'])
    expect(metresFrom(at(5000, 2000), corners[0])).toBeLessThan(0.01)
  })

  it('are found where the zones were drawn apart', () => {
    const apart = [
      zone('T', box(at, 0, 0, 4990, 4000)),
      zone('A', box(at, 5000, 0, 9000, 1995)),
      zone('B', box(at, 5005, 2005, 9000, 4000)),
    ]
    const { corners } = borderOf(apart, ['T'], { snapMetres: 20 })
    expect(corners).toHaveLength(1)
    expect(metresFrom(at(4990, 2000), corners[0])).toBeLessThan(20)
  })

  it('are no coasts, unless the land outside is a zone', () => {
    const pair = junction.slice(0, 1).concat(zone('U', box(at, 5000, 0, 9000, 4000)))
    expect(borderOf(pair, ['T']).corners).toEqual([])
    const { corners } = borderOf(pair, ['T'], { outside: 'untreated' })
    expect(corners.map(({ zones }) => zones)).toEqual([
      ['T', 'U', 'outside'],
      ['T', 'U', 'outside'],
    ])
    for (const [i, y] of [0, 4000].entries()) expect(metresFrom(at(5000, y), corners[i])).toBeLessThan(0.01)
  })

  it('are one where four zones meet', () => {
    const four = [...junction.slice(1), zone('C', box(at, 0, 0, 5000, 2000)), zone('D', box(at, 0, 2000, 5000, 4000))]
    expect(borderOf(four, ['A', 'D']).corners.map(({ zones }) => zones)).toEqual([['A', 'B', 'C', 'D']])
  })
})

describe('units at a junction', () => {
  const random = seeded(11)
  const points = [
    ...Array.from({ length: 500 }, () => at(5000 + 1500 * (random() - 0.5), 2000 + 1500 * (random() - 0.5))),
    // feet exactly at the corner or beside it: on the line between A and B, and in T right across from it
    at(5300, 2000),
    at(4700, 2000),
    at(5000.2, 2000),
  ]
  const rules = { metresPerUnit: 1, cornerMetres: 150 }

  /** What is said of each unit, in words that know no order of zones or rows. */
  function said(zones: ZoneFeature[], rows: readonly number[]) {
    const border = borderOf(zones, ['T'])
    const [x, y] = columns(rows.map((row) => points[row]))
    const measured = measureUnits(border, x, y)
    const { placement, reason, waterfall } = eligible(border, measured, rules)
    const second = runnerUps(border, measured, x, y)
    const toCorner = metresToCorner(border, measured)
    const units = rows.map((row, i) => ({
      row,
      zone: border.names[measured.zone[i]],
      piece: border.pieces[measured.piece[i]].label,
      metres: measured.distanceMetres[i],
      position: measured.positionMetres[i],
      second: border.pieces[second.piece[i]].label,
      secondMetres: second.distanceMetres[i],
      toCorner: toCorner[i],
      reason: reason.labels[reason.codes[i]],
    }))
    return { units: units.sort((a, b) => a.row - b.row), waterfall, placed: placement.unit.length }
  }
  const straight = points.map((_, i) => i)
  const shuffled = points.map((_, i) => (i * 211) % points.length)
  const given = said(junction, straight)

  it.each(orders.map((zones) => [zones.map(({ properties }) => properties?.name).join(), zones] as const))(
    'get the same answer under any order of rows and zones: %s',
    (_, zones) => {
      expect(said(zones, shuffled)).toEqual(given)
    },
  )

  it('know their distance to the corner along the ground, and are set aside within the radius', () => {
    const { corners } = borderOf(junction, ['T'])
    for (const { row, metres, toCorner, reason } of given.units) {
      const direct = metresFrom(points[row] as Point, corners[0])
      // the border is straight here: foot, unit and corner make a right angle
      if (row < 500) expect(Math.abs(Math.hypot(metres, toCorner) - direct)).toBeLessThan(0.01 + 1e-5 * direct)
      if (metres > 0.001) expect(reason).toBe(toCorner < 150 ? 'near a corner where three zones meet' : undefined)
    }
    const [all, left] = given.waterfall
    expect(left).toMatchObject({ rule: 'corners', pieces: all.pieces, units: given.placed })
    expect(all.units - left.units).toBe(given.units.filter(({ reason }) => reason?.startsWith('near a corner')).length)
  })

  it('know the runner-up: the nearest piece of the other pair, by its end at the corner', () => {
    const { corners } = borderOf(junction, ['T'])
    for (const { row, piece, second, secondMetres } of given.units) {
      expect(second.split(',')[0]).toBe(piece.startsWith('A') ? 'B | T' : 'A | T')
      expect(Math.abs(secondMetres - metresFrom(points[row] as Point, corners[0]))).toBeLessThan(0.001)
    }
  })
})

describe('runner-ups on a board of zones', () => {
  // 6 by 5 squares of 1 km with jagged sides; every second one treated: some 49 pairs
  const random = seeded(29)
  const shift = new Map<string, Point>()
  const node = (i: number, j: number): Point => {
    const key = `${i} ${j}`
    if (!shift.has(key)) shift.set(key, at(1000 * i + 300 * (random() - 0.5), 1000 * j + 300 * (random() - 0.5)))
    return shift.get(key) as Point
  }
  const zones: ZoneFeature[] = []
  for (let i = 0; i < 6; i++)
    for (let j = 0; j < 5; j++)
      zones.push(
        zone(`${(i + j) % 2 ? 'T' : 'U'}${i}${j}`, [
          node(i, j),
          node(i + 1, j),
          node(i + 1, j + 1),
          node(i, j + 1),
          node(i, j),
        ]),
      )
  const treated = zones.map(({ properties }) => properties?.name as string).filter((name) => name.startsWith('T'))
  const border = borderOf(zones, treated, { pieceMetres: 400 })
  const [lon, lat] = columns(Array.from({ length: 300 }, () => at(6000 * random(), 5000 * random())))
  const measured = measureUnits(border, lon, lat)

  it('are those of trying every other pair by itself', () => {
    const found = runnerUps(border, measured, lon, lat)
    const pairs = [...new Set(border.pieces.map((piece) => piece.zones.join(' | ')))]
    expect(pairs.length).toBe(49)
    const distances = pairs.map((pair) => {
      const [untreated, own] = pair.split(' | ')
      const two = zones.filter(({ properties }) => [untreated, own].includes(properties?.name))
      return measureUnits(borderOf(two, [own], { pieceMetres: 400 }), lon, lat).distanceMetres
    })
    for (let i = 0; i < lon.length; i++) {
      const first = pairs.indexOf(border.pieces[measured.piece[i]].zones.join(' | '))
      const others = distances.map((metres, p) => (p === first ? Infinity : metres[i]))
      expect(Math.abs(Math.min(...others) - found.distanceMetres[i])).toBeLessThan(1e-4)
      const pair = border.pieces[found.piece[i]].zones.join(' | ')
      expect(pairs.indexOf(pair)).not.toBe(first)
      expect(Math.abs(others[pairs.indexOf(pair)] - found.distanceMetres[i])).toBeLessThan(1e-4)
    }
    const few = Int32Array.of(250, 3)
    const asked = runnerUps(border, measured, lon, lat, few)
    expect([...asked.piece]).toEqual([found.piece[250], found.piece[3]])
  })

  it('are none where there is one pair', () => {
    const pair = borderOf(junction.slice(0, 2), ['T'])
    const [x, y] = columns([at(4900, 1000), [Number.NaN, 0]])
    const second = runnerUps(pair, measureUnits(pair, x, y), x, y)
    expect([...second.piece]).toEqual([-1, -1])
    expect(second.distanceMetres.every(Number.isNaN)).toBe(true)
  })
})
