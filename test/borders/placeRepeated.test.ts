import { describe, expect, it } from 'vitest'
import { beyondCap, centroidSuspicion, repeatedPoints } from '../../src/borders/index.js'
import { seededRandom } from '../../src/math/index.js'
import { columns, metresAround, seeded } from './makeZones.js'

const at = metresAround(30, 10)
/** A grid of 20 x 20 points 500 m apart. */
const grid = Array.from({ length: 400 }, (_, i) => at(500 * (i % 20), 500 * Math.floor(i / 20)))

describe('repeated coordinates', () => {
  // 5 units at one point, 3 at each of two, 1 at each of the others; two without a position
  const points = [
    ...grid,
    ...Array.from({ length: 4 }, () => grid[7]),
    ...Array.from({ length: 2 }, () => grid[8]),
    ...Array.from({ length: 2 }, () => [grid[0][0] - 360, grid[0][1]]),
    [Number.NaN, 10],
    [30, 91],
  ]
  const found = repeatedPoints(...columns(points))

  it('are counted, most first, without a coordinate', () => {
    expect(found).toMatchObject({
      units: 408,
      distinct: 400,
      most: [
        { units: 5, points: 1 },
        { units: 3, points: 2 },
      ],
    })
    expect(found.repeatedShare).toBeCloseTo(11 / 408, 12)
    expect(Math.abs(found.spacingMetres - 500)).toBeLessThan(2)
    expect([...found.point.slice(-2)]).toEqual([-1, -1])
    expect(new Set(found.point.slice(400, 404))).toEqual(new Set([found.point[7]]))
    expect(found.point[406]).toBe(found.point[0])
  })

  it('number the points by place, whatever the order of rows', () => {
    const order = points.map((_, i) => (i * 17) % points.length)
    const shuffled = repeatedPoints(...columns(order.map((i) => points[i])))
    expect([...shuffled.point]).toEqual(order.map((i) => found.point[i]))
    expect({ ...shuffled, point: 0 }).toEqual({ ...found, point: 0 })
  })

  it('are kept up to a cap, by a seeded draw that knows ids and not rows', () => {
    const ids = points.map((_, i) => i)
    const beyond = beyondCap(found, 2, seededRandom(4), ids)
    const kept = new Map<number, number>()
    found.point.forEach((point, i) => {
      if (point >= 0 && !beyond[i]) kept.set(point, (kept.get(point) ?? 0) + 1)
    })
    expect([...kept.values()].filter((count) => count === 2)).toHaveLength(3)
    expect(Math.max(...kept.values())).toBe(2)
    expect(beyond.reduce((a, b) => a + b, 0)).toBe(5)
    const order = points.map((_, i) => (i * 17) % points.length)
    const shuffled = repeatedPoints(...columns(order.map((i) => points[i])))
    expect([...beyondCap(shuffled, 2, seededRandom(4), order)]).toEqual(order.map((i) => beyond[i]))
    expect(() => beyondCap(found, 0, seededRandom(4))).toThrow(RangeError)
  })

  it('give every unit of a point the same chance', () => {
    const same = { point: new Int32Array(6), distinct: 1 }
    const random = seededRandom(9)
    const kept = new Float64Array(6)
    for (let draw = 0; draw < 6000; draw++) {
      beyondCap(same, 2, random).forEach((isBeyond, i) => {
        kept[i] += 1 - isBeyond
      })
    }
    // 2,000 each, standard deviation 36.5
    for (const count of kept) expect(Math.abs(count - 2000)).toBeLessThan(160)
  })
})

describe('centroids', () => {
  const random = seeded(1)
  const centroids = Array.from({ length: 3000 }, () => grid[Math.floor(400 * random())])
  const homes = Array.from({ length: 3000 }, () => at(9500 * random(), 9500 * random()))

  it('are suspected where nearly all positions are shared and lie farther apart than the bandwidth', () => {
    const points = repeatedPoints(...columns(centroids))
    const words = centroidSuspicion(points, 300)
    expect(words).toMatch(
      /^99% of 3000 units share their position with others \(\d+ distinct positions\), and positions lie 500 m apart in the middle case, more than the bandwidth of 300 m: they look like centres of areas/,
    )
    expect(centroidSuspicion(points, 600)).toBeUndefined()
    expect(centroidSuspicion(repeatedPoints(...columns(homes)), 1)).toBeUndefined()
    expect(centroidSuspicion(repeatedPoints(new Float64Array(0), new Float64Array(0)), 1)).toBeUndefined()
  })
})
