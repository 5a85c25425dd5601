import { expect, test } from 'vitest'
import { seededRandom, symmetricEigen } from '../../src/math/index.js'
import { quadraticFormByRank } from '../../src/thresholds/rank.js'

/** F F' for a seeded n x rank matrix F with rows of very unequal size. */
function ofRank(count: number, rank: number, seed: number): Float64Array {
  const random = seededRandom(seed)
  const factor = Array.from({ length: count }, (_, a) => {
    return Array.from({ length: rank }, () => 10 ** ((a % 7) - 3) * random.normal())
  })
  const product = new Float64Array(count * count)
  for (let a = 0; a < count; a++) {
    for (let b = 0; b < count; b++) {
      for (let k = 0; k < rank; k++) product[a * count + b] += factor[a][k] * factor[b][k]
    }
  }
  return product
}

/** d' A⁺ d and the rank of A from the eigenvalues of A scaled to unit diagonal. */
function byEigenvalues(a: Float64Array, count: number, d: Float64Array): { statistic: number; rank: number } {
  const root = Array.from({ length: count }, (_, i) => Math.sqrt(a[i * count + i]))
  const scaled = a.map((value, at) => value / root[Math.floor(at / count)] / root[at % count])
  const { values, vectors } = symmetricEigen(scaled, count)
  let statistic = 0
  let rank = 0
  values.forEach((value, k) => {
    if (!(value > 1e-10 * values[count - 1])) return
    const component = root.reduce((sum, unit, i) => sum + (vectors[i * count + k] * d[i]) / unit, 0)
    statistic += component ** 2 / value
    rank++
  })
  return { statistic, rank }
}

test.each([
  [6, 6],
  [9, 4],
  [30, 11],
  [5, 1],
])('%i rows of rank %i: as by eigenvalues', (count, rank) => {
  const a = ofRank(count, rank, count)
  const random = seededRandom(2)
  const d = Float64Array.from({ length: count }, (_, i) => Math.sqrt(a[i * count + i]) * random.normal())
  const form = quadraticFormByRank(a, d)
  const slow = byEigenvalues(a, count, d)
  expect(form.rank).toBe(rank)
  expect(slow.rank).toBe(rank)
  expect(form.statistic / slow.statistic).toBeCloseTo(1, 8)
})

test('rows of zero variance are left out, and nothing has rank 0', () => {
  expect(quadraticFormByRank(Float64Array.of(4, 0, 0, 0), Float64Array.of(6, 1))).toEqual({ statistic: 9, rank: 1 })
  expect(quadraticFormByRank(new Float64Array(4), Float64Array.of(1, 1))).toEqual({ statistic: 0, rank: 0 })
})
