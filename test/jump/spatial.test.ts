/**
 * The spatial variance against dense matrix algebra: every pair of units, distances from geographiclib (Karney 2013),
 * weights and residuals from weighted least squares by ml-matrix. Conley 1999; METHODS section 4.
 */
import geodesic from 'geographiclib-geodesic'
import { EigenvalueDecomposition, inverse, Matrix } from 'ml-matrix'
import { describe, expect, it } from 'vitest'
import { buildSample, covarianceMatrix, type Entries, jumpAt, spatialPlaces, varianceOf } from '../../src/jump/index.js'
import { negativeVariance } from '../../src/jump/spatial.js'
import { type Random, seededRandom } from '../../src/math/index.js'

const cutoffMetres = 900
const h = 1.1

interface Ground extends Entries {
  readonly lon: Float64Array
  readonly lat: Float64Array
}

/** Units around a place, a few of them at one position; x is in the hundredths of a degree that they lie north. */
function scattered(random: Random, count: number, lon0: number, lat0: number): Ground {
  const at = Array.from({ length: count }, () => [random.next() - 0.5, random.next() - 0.5])
  const places = at.map((place, i) => (i % 9 === 0 && i > 0 ? at[i - 1] : place))
  const lon = Float64Array.from(places, ([east]) => lon0 + 0.03 * east)
  const lat = Float64Array.from(places, ([, north]) => lat0 + 0.03 * north)
  const x = Float64Array.from(lat, (value) => (value - lat0) * 100)
  return {
    lon: lon.map((value) => (value > 180 ? value - 360 : value)),
    lat,
    x,
    treated: Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0)),
    unit: Int32Array.from(x, (_, i) => i),
    y: Float64Array.from(x, (value, i) => Math.sin(40 * lon[i]) + value + 0.3 * random.normal()),
    w: Float64Array.from(x, () => 0.5 + random.next()),
  }
}

/** l_i e_i of the plain estimate: order 1 on each side, triangular kernel. */
function denseInfluence({ x, treated, y, w }: Ground, order: number): Float64Array {
  const psi = new Float64Array(x.length)
  for (const side of [0, 1]) {
    const rows = [...x.keys()].filter((i) => treated[i] === side && Math.abs(x[i]) < h)
    const design = new Matrix(rows.map((i) => Array.from({ length: order + 1 }, (_, j) => x[i] ** j)))
    const kernel = rows.map((i) => (w?.[i] ?? 1) * (1 - Math.abs(x[i]) / h))
    const weighted = Matrix.diag(kernel).mmul(design)
    const solve = inverse(design.transpose().mmul(weighted)).mmul(weighted.transpose())
    const values = Matrix.columnVector(rows.map((i) => y[i]))
    const residuals = Matrix.sub(values, design.mmul(solve.mmul(values)))
    rows.forEach((i, k) => {
      psi[i] = (side ? 1 : -1) * solve.get(0, k) * residuals.get(k, 0)
    })
  }
  return psi
}

function denseSum(a: Float64Array, b: Float64Array, { lon, lat }: Ground): number {
  let sum = 0
  for (let i = 0; i < a.length; i++) {
    for (let j = 0; j < b.length; j++) {
      if (a[i] === 0 || b[j] === 0) continue
      const { s12 } = geodesic.Geodesic.WGS84.Inverse(lat[i], lon[i], lat[j], lon[j])
      sum += a[i] * b[j] * Math.max(0, 1 - (s12 as number) / cutoffMetres)
    }
  }
  return sum
}

const options = { order: 1, kernel: 'triangular', variance: 'spatial', reference: 't', level: 0.95 } as const
const bandwidths = { h: { untreated: h, treated: h }, b: { untreated: h, treated: h } }

describe('the spatial variance', () => {
  it.each([
    ['in the middle latitudes', 12, 51],
    ['across 180 degrees', 179.999, -17],
    ['near the pole', 100, 89.9],
  ])('is the sum over all pairs, %s', (_, lon0, lat0) => {
    const ground = scattered(seededRandom(5), 300, lon0, lat0)
    const places = spatialPlaces(ground.lon, ground.lat, cutoffMetres)
    const made = jumpAt(buildSample(ground), bandwidths, { ...options, spatial: places })
    if (!made.ok) throw new Error(made.reason)
    const plain = denseInfluence(ground, 1)
    const corrected = denseInfluence(ground, 2)
    expect(made.jump.plain.standardError ** 2 / denseSum(plain, plain, ground)).toBeCloseTo(1, 9)
    expect(made.jump.corrected.standardError ** 2 / denseSum(corrected, corrected, ground)).toBeCloseTo(1, 9)
  })

  it('has the covariance of two estimates that share ground but no unit', () => {
    const ground = scattered(seededRandom(6), 400, 12, 51)
    const half = (odd: number): Ground => {
      const rows = [...ground.x.keys()].filter((i) => i % 2 === odd)
      const pick = (values: Float64Array) => Float64Array.from(rows, (i) => values[i])
      return {
        ...ground,
        x: pick(ground.x),
        y: pick(ground.y),
        w: pick(ground.w as Float64Array),
        treated: Uint8Array.from(rows, (i) => ground.treated[i]),
        unit: Int32Array.from(rows),
      }
    }
    const places = spatialPlaces(ground.lon, ground.lat, cutoffMetres)
    const made = [half(0), half(1)].map((entries) => {
      const jump = jumpAt(buildSample(entries), bandwidths, { ...options, spatial: places })
      if (!jump.ok) throw new Error(jump.reason)
      return { jump: jump.jump, dense: spread(denseInfluence(entries, 2), entries.unit, 400) }
    })
    const { matrix, isDiagonal } = covarianceMatrix(
      made.map(({ jump }) => jump.influence),
      places,
    )
    expect(isDiagonal).toBe(false)
    const [a, b] = made.map(({ dense }) => dense)
    expect(matrix[1] / denseSum(a, b, ground)).toBeCloseTo(1, 9)
    expect(matrix[2]).toBe(matrix[1])
    expect(matrix[0] / denseSum(a, a, ground)).toBeCloseTo(1, 9)
  })

  it('does not change by a bit with the order of rows', () => {
    const ground = scattered(seededRandom(7), 300, 12, 51)
    const again = (order: readonly number[]) => {
      const pick = (values: Float64Array) => Float64Array.from(order, (i) => values[i])
      const entries = {
        x: pick(ground.x),
        y: pick(ground.y),
        w: pick(ground.w as Float64Array),
        treated: Uint8Array.from(order, (i) => ground.treated[i]),
        unit: Int32Array.from(order, (_, i) => i),
      }
      const places = spatialPlaces(pick(ground.lon), pick(ground.lat), cutoffMetres)
      const made = jumpAt(buildSample(entries), bandwidths, { ...options, spatial: places })
      return made.ok ? made.jump.corrected : made.reason
    }
    const forwards = [...ground.x.keys()]
    expect(again([...forwards].reverse())).toEqual(again(forwards))
  })

  it('does not change by a bit with the order of rows where many units stand at one place and serve two lines', () => {
    const random = seededRandom(8)
    const count = 240
    const at = Array.from({ length: count }, (_, i) => Math.floor(i / 8))
    const lon = Float64Array.from(at, (place) => 12 + 0.004 * place)
    const x = Float64Array.from(at, () => 2 * random.next() - 1)
    const y = x.map((value) => value + random.normal())
    const again = (order: readonly number[]) => {
      const twice = [...order, ...order]
      const places = spatialPlaces(
        Float64Array.from(order, (i) => lon[i]),
        Float64Array.from(order, () => 51),
        cutoffMetres,
      )
      const entries = {
        x: Float64Array.from(twice, (i, k) => (k < count ? x[i] : -x[i] / 2)),
        treated: Uint8Array.from(twice, (i, k) => (x[i] > 0 === k < count ? 1 : 0)),
        unit: Int32Array.from(twice, (_, k) => k % count),
        y: Float64Array.from(twice, (i) => y[i]),
        repeats: true,
      }
      const made = jumpAt(buildSample(entries), bandwidths, { ...options, spatial: places })
      return made.ok ? made.jump.corrected : made.reason
    }
    const forwards = [...x.keys()]
    const known = again(forwards)
    expect(known).toHaveProperty('standardError')
    for (const step of [7, 11, 13, 101, 239]) expect(again(forwards.map((i) => (i * step) % count))).toEqual(known)
  })

  it('may be negative for noise on a lattice: the kernel is no covariance in the plane', () => {
    // 36 places 0.7 cutoffs apart; the eigenvector of the least eigenvalue of the matrix of κ (ml-matrix)
    const step = (0.7 * cutoffMetres) / 111_195
    const at = Array.from({ length: 36 }, (_, i) => [step * (i % 6), step * Math.floor(i / 6)])
    const places = spatialPlaces(
      Float64Array.from(at, ([lon]) => lon),
      Float64Array.from(at, ([, lat]) => lat),
      cutoffMetres,
    )
    const kernel = new Matrix(
      at.map(([lon, lat]) =>
        at.map(([otherLon, otherLat]) => {
          const { s12 } = geodesic.Geodesic.WGS84.Inverse(lat, lon, otherLat, otherLon)
          return Math.max(0, 1 - (s12 as number) / cutoffMetres)
        }),
      ),
    )
    const { realEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(kernel, { assumeSymmetric: true })
    const least = realEigenvalues.indexOf(Math.min(...realEigenvalues))
    expect(realEigenvalues[least]).toBeLessThan(-0.03)
    const influence = {
      key: Int32Array.from(at, (_, i) => i),
      psi: Float64Array.from(eigenvectorMatrix.getColumn(least)),
    }
    expect(varianceOf(influence, places)).toBeCloseTo(realEigenvalues[least], 9)
    expect(negativeVariance(places)).toContain('the spatial variance is negative')
  })
})

function spread(values: Float64Array, rows: Int32Array, count: number): Float64Array {
  const all = new Float64Array(count)
  rows.forEach((row, i) => {
    all[row] = values[i]
  })
  return all
}
