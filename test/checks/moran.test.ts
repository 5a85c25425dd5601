/** Moran's I against its definition over all pairs (Moran 1950; Cliff & Ord 1981), distances from geographiclib. */
import geodesic from 'geographiclib-geodesic'
import { describe, expect, it } from 'vitest'
import { type Moran, moran } from '../../src/checks/moran.js'
import { seededRandom } from '../../src/math/index.js'

const random = seededRandom(3)
const count = 120
const lon = Float64Array.from({ length: count }, () => 8 + 0.02 * random.next())
const lat = Float64Array.from({ length: count }, () => 47 + 0.02 * random.next())
const smooth = Float64Array.from(
  lon,
  (value, i) => Math.sin(400 * value) + Math.cos(300 * lat[i]) + 0.5 * random.normal(),
)
const white = Float64Array.from(lon, () => random.normal())

const metres = Array.from({ length: count }, (_, i) =>
  Array.from(
    { length: count },
    (_, j) => geodesic.Geodesic.WGS84.Inverse(lat[i], lon[i], lat[j], lon[j]).s12 as number,
  ),
)

function definition(values: Float64Array, weight: (i: number, j: number) => number): number {
  const mean = values.reduce((sum, value) => sum + value, 0) / count
  let [cross, total, squares] = [0, 0, 0]
  for (let i = 0; i < count; i++) {
    squares += (values[i] - mean) ** 2
    for (let j = 0; j < count; j++) {
      if (i === j) continue
      total += weight(i, j)
      cross += weight(i, j) * (values[i] - mean) * (values[j] - mean)
    }
  }
  return ((count / total) * cross) / squares
}

const within = (i: number, j: number) => Math.max(0, 1 - metres[i][j] / 400)
const isAmongNearest = (i: number, j: number) => {
  const others = metres[i].filter((_, k) => k !== i).sort((a, b) => a - b)
  return metres[i][j] <= others[7] ? 1 : 0
}

function made(values: Float64Array, neighbourhood: Parameters<typeof moran>[3]): Moran {
  const found = moran(values, lon, lat, neighbourhood)
  if (!found.ok) throw new Error(found.reason)
  return found
}

describe("Moran's I", () => {
  it.each([
    ['smooth', smooth],
    ['white', white],
  ])('is its definition, %s residuals', (_, values) => {
    expect(made(values, { withinMetres: 400 }).i).toBeCloseTo(definition(values, within), 10)
    expect(made(values, { nearest: 8 }).i).toBeCloseTo(definition(values, isAmongNearest), 10)
    expect(made(values, { nearest: 8 }).expected).toBe(-1 / (count - 1))
  })

  it('sees smooth noise and no more than chance in white noise', () => {
    expect(made(smooth, { nearest: 8 }).p).toBeLessThan(1e-6)
    expect(made(white, { nearest: 8 }).p).toBeGreaterThan(0.01)
  })

  it('has the mean and variance of the values shuffled over the places', () => {
    const shuffle = seededRandom(11)
    const draws = 2000
    const { expected, variance } = made(smooth, { withinMetres: 400 })
    let [sum, squares] = [0, 0]
    for (let draw = 0; draw < draws; draw++) {
      const values = smooth.slice()
      for (let i = count - 1; i > 0; i--) {
        const j = shuffle.integer(i + 1)
        const kept = values[i]
        values[i] = values[j]
        values[j] = kept
      }
      const { i } = made(values, { withinMetres: 400 })
      sum += i
      squares += i * i
    }
    const mean = sum / draws
    expect(Math.abs(mean - expected)).toBeLessThan(4 * Math.sqrt(variance / draws))
    expect(Math.abs((squares / draws - mean * mean) / variance - 1)).toBeLessThan(0.12)
  })

  it('gives a reason where it says nothing', () => {
    const few = moran(Float64Array.of(1, 2), Float64Array.of(1, 2), Float64Array.of(1, 2), { nearest: 1 })
    expect(few).toMatchObject({ ok: false })
    expect(
      moran(
        lon.map(() => 2),
        lon,
        lat,
        { nearest: 8 },
      ),
    ).toMatchObject({ ok: false })
    expect(moran(white, lon, lat, { withinMetres: 0.001 })).toMatchObject({ ok: false })
  })
})
