import { expect, test } from 'vitest'
import { quadraticFormPseudoInverse, seededRandom } from '../../src/math/index.js'
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
  const slow = quadraticFormPseudoInverse(a, count, d)
  expect(form.rank).toBe(rank)
  expect(slow.rank).toBe(rank)
  expect(form.statistic / slow.statistic).toBeCloseTo(1, 8)
})

test('rows of zero variance are left out, and nothing has rank 0', () => {
  expect(quadraticFormByRank(Float64Array.of(4, 0, 0, 0), Float64Array.of(6, 1))).toEqual({ statistic: 9, rank: 1 })
  expect(quadraticFormByRank(new Float64Array(4), Float64Array.of(1, 1))).toEqual({ statistic: 0, rank: 0 })
})
