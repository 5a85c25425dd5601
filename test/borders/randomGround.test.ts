import { area } from '@turf/turf'
import { describe, expect, it } from 'vitest'
import { eligible, measureUnits, prepareBorder, randomGround, readZones } from '../../src/borders/index.js'
import { seededRandom } from '../../src/math/index.js'

/** Squares of half a degree side by side at 60 N, where a degree of longitude is half as long as one of latitude. */
const square = (name: string, west: number) => ({
  type: 'Feature',
  properties: { name },
  geometry: {
    type: 'Polygon',
    coordinates: [
      [
        [west, 60],
        [west + 0.5, 60],
        [west + 0.5, 60.5],
        [west, 60.5],
        [west, 60],
      ],
    ],
  },
})

function borderOf(...features: object[]) {
  const zones = readZones({ type: 'FeatureCollection', features }, 'zones.geojson', 'name')
  const border = zones.ok ? prepareBorder(zones.value, { treated: ['East'], snapMetres: 2, pieceMetres: 7000 }) : zones
  if (!border.ok) throw new Error(border.problems[0].what)
  return border.value
}

const nothing = { metresPerUnit: 1 }

describe('random points on the ground', () => {
  const border = borderOf(square('West', 10), square('East', 10.5))
  const { pieces } = eligible(border, measureUnits(border, new Float64Array(0), new Float64Array(0)), nothing)
  const points = randomGround(border, pieces, nothing, 5000, 200_000, seededRandom(1))

  it('lie as dense as said: their number is that of the land within the radius', () => {
    const within = 5000 / 27_900 // of a square's width there, 0.5 degrees of about 55.8 km
    const squareKm = area(square('East', 10.5) as GeoJSON.Feature) / 1e6
    for (const side of [0, 1]) {
      const count = points.treated.filter((treated) => treated === side).length
      const found = count / points.perSquareKm
      expect(Math.abs(found / (squareKm * within) - 1)).toBeLessThan(0.02)
    }
  })

  it('are uniform in the distance from a straight border', () => {
    const tenths = new Array(10).fill(0)
    for (const x of points.x) tenths[Math.min(9, Math.floor(Math.abs(x) / 500))]++
    const mean = points.x.length / 10
    const chiSquare = tenths.reduce((sum, count) => sum + (count - mean) ** 2 / mean, 0)
    expect(chiSquare).toBeLessThan(27.9) // 99.9% of chi-square on 9 degrees of freedom
  })

  it('serve every piece by its own length', () => {
    const counts = pieces.map((_, p) => points.line.filter((line) => line === p).length)
    const length = pieces.reduce((sum, piece) => sum + piece.lengthMetres, 0)
    counts.forEach((count, p) => {
      expect(Math.abs(count / points.x.length / (pieces[p].lengthMetres / length) - 1)).toBeLessThan(0.06)
    })
  })

  it('are the same for the same seed', () => {
    const few = () => randomGround(border, pieces, nothing, 5000, 5000, seededRandom(1))
    expect(few()).toEqual(few())
  })
})
