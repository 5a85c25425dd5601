/** Moran's I against its definition over all pairs (Moran 1950; Cliff & Ord 1981), distances from geographiclib. */
import geodesic from 'geographiclib-geodesic'
import { describe, expect, it } from 'vitest'
import { type Moran, moran } from '../../src/checks/moran.js'
import { moranNearLine, residualsNearLine } from '../../src/checks/moranNearLine.js'
import { buildSample, jumpAt } from '../../src/jump/index.js'
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

/** Each row of weights divided by its sum. */
function definition(values: Float64Array, weight: (i: number, j: number) => number): number {
  const mean = values.reduce((sum, value) => sum + value, 0) / count
  let [cross, total, squares] = [0, 0, 0]
  for (let i = 0; i < count; i++) {
    squares += (values[i] - mean) ** 2
    const row = Array.from({ length: count }, (_, j) => (i === j ? 0 : weight(i, j)))
    const sum = row.reduce((all, value) => all + value, 0)
    if (sum === 0) continue
    total++
    for (let j = 0; j < count; j++) cross += (row[j] / sum) * (values[i] - mean) * (values[j] - mean)
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

  it('has exactly the mean and variance over all orders of few values', () => {
    const east = Float64Array.of(0, 0, 0, 1, 2, 4, 9)
    const north = Float64Array.of(0, 0, 0, 1, 0, 1, 9)
    const values = [0.3, -1.2, 2.5, 0.1, 0.9, -0.4, 3]
    const at = (ground: Float64Array, start: number) => ground.map((value) => start + value / 1000)
    for (const neighbourhood of [{ withinMetres: 260 }, { nearest: 2 }] as const) {
      const seen: Moran[] = []
      for (const order of ordersOf(values)) {
        const found = moran(Float64Array.from(order), at(east, 8), at(north, 47), neighbourhood)
        if (found.ok) seen.push(found)
      }
      expect(seen).toHaveLength(5040)
      const mean = seen.reduce((sum, { i }) => sum + i, 0) / 5040
      const spread = seen.reduce((sum, { i }) => sum + (i - mean) ** 2, 0) / 5040
      expect(mean).toBeCloseTo(seen[0].expected, 12)
      expect(mean).toBeCloseTo(-1 / 6, 12)
      expect(spread / seen[0].variance).toBeCloseTo(1, 10)
    }
  })

  it('near a line is that of the residuals of its fit, whatever the order of rows', () => {
    const x = lat.map((value) => 100 * (value - 47.01))
    const again = (order: readonly number[]) => {
      const pick = (values: Float64Array) => Float64Array.from(order, (i) => values[i])
      const own = pick(x)
      const sample = buildSample({
        x: own,
        treated: Uint8Array.from(own, (value) => (value > 0 ? 1 : 0)),
        unit: Int32Array.from(order.keys()),
        y: pick(smooth),
      })
      const bothSides = { untreated: 0.8, treated: 0.8 }
      const made = jumpAt(
        sample,
        { h: bothSides, b: bothSides },
        { order: 0, kernel: 'uniform', variance: 'hc2', reference: 't', level: 0.95 },
      )
      if (!made.ok) throw new Error(made.reason)
      const near = residualsNearLine(sample, made.jump)
      return { near, found: moranNearLine(sample, made.jump, pick(lon), pick(lat), { withinMetres: 400 }) }
    }
    const forwards = [...x.keys()]
    const { near, found } = again(forwards)
    // order 0, uniform kernel: residuals are from the mean of each side
    const inside = forwards.filter((i) => Math.abs(x[i]) <= 0.8)
    const side = (sign: number) => inside.filter((i) => Math.sign(x[i]) === sign)
    const mean = (rows: number[]) => rows.reduce((sum, i) => sum + smooth[i], 0) / rows.length
    const known = new Map([-1, 1].flatMap((sign) => side(sign).map((i) => [i, smooth[i] - mean(side(sign))] as const)))
    expect(near.unit).toHaveLength(known.size)
    near.unit.forEach((row, k) => {
      expect(near.residual[k]).toBeCloseTo(known.get(row) as number, 12)
    })
    expect(found).toMatchObject({ ok: true, units: known.size })
    expect(again([...forwards].reverse()).found).toEqual(found)
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

function ordersOf(values: readonly number[]): number[][] {
  if (values.length < 2) return [[...values]]
  return values.flatMap((value, i) => ordersOf(values.filter((_, k) => k !== i)).map((rest) => [value, ...rest]))
}
