import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { argsort, argsortBy, seededRandom } from '../../src/math/index.js'

/** The order by the engine's own stable sort, comparing numbers (so −0 equals 0). */
function plainOrder(keys: readonly Float64Array[]): number[] {
  const rows = Array.from(keys[0], (_, i) => i)
  return rows.sort((i, j) => {
    for (const key of keys) if (key[i] !== key[j]) return key[i] < key[j] ? -1 : 1
    return i - j
  })
}

const random = seededRandom(21)
const kinds: Record<string, () => number> = {
  uniform: () => random.next(),
  'of both signs': () => random.normal(),
  'very skewed (Cauchy)': () => Math.tan(Math.PI * (random.next() - 0.5)),
  'few whole numbers': () => random.integer(9) - 4,
  'close together, far from 0': () => 1e12 + random.next(),
  'close together, below 0': () => -1 - 1e-9 * random.next(),
  'alike in their upper bits, in two clumps': () => (random.next() < 0.5 ? -1 : 1) * (1 + 1e-12 * random.integer(50)),
  'of all sizes': () => (random.next() < 0.5 ? -1 : 1) * 10 ** (600 * random.next() - 300),
  'zeros of both signs, and the smallest doubles': () =>
    (random.integer(5) - 2) * 5e-324 * (random.next() < 0.5 ? -1 : 1),
  'ends of the line': () => [Number.NEGATIVE_INFINITY, -1, -0, 0, 1, Number.POSITIVE_INFINITY][random.integer(6)],
  'one value': () => 7,
}

describe.each(Object.keys(kinds))('keys %s', (kind) => {
  // Both sides of every change of method: insertion to 32, merging to 512, digits above.
  test.each([0, 1, 2, 31, 32, 33, 100, 511, 512, 513, 5000])('%i of them', (n) => {
    const keys = Float64Array.from({ length: n }, kinds[kind])
    expect([...argsort(keys)]).toEqual(plainOrder([keys]))
  })
})

test('one outlier of 1e12 among 5000, sorted and reversed columns, and a view into a larger buffer', () => {
  const keys = Float64Array.from({ length: 5000 }, () => random.next())
  keys[1234] = 1e12
  expect([...argsort(keys)]).toEqual(plainOrder([keys]))
  const rising = keys.slice().sort()
  expect([...argsort(rising)]).toEqual([...rising.keys()])
  expect([...argsort(rising.slice().reverse())]).toEqual([...rising.keys()].reverse())
  const view = keys.subarray(1000, 4000)
  expect([...argsort(view)]).toEqual(plainOrder([view]))
})

test('any doubles at all', () => {
  const anyKeys = fc.array(fc.oneof(fc.double({ noNaN: true }), fc.integer({ min: -3, max: 3 })), { maxLength: 1200 })
  fc.assert(
    fc.property(anyKeys, (values) => {
      const keys = Float64Array.from(values)
      expect([...argsort(keys)]).toEqual(plainOrder([keys]))
    }),
    { seed: 5, numRuns: 60 },
  )
})

describe('by several keys', () => {
  test.each([
    [20, 3],
    [300, 2],
    [3000, 2],
    [3000, 40],
    [3000, 100_000],
  ])('%i rows, up to %i values of each key', (n, values) => {
    const keys = [0, 1, 2].map(() => Float64Array.from({ length: n }, () => random.integer(values) - 1))
    keys[1] = keys[1].map((value) => (value === 0 && random.next() < 0.5 ? -0 : value))
    expect([...argsortBy(keys)]).toEqual(plainOrder(keys))
    expect([...argsortBy(keys.slice(0, 1))]).toEqual(plainOrder(keys.slice(0, 1)))
  })
})

test('what is no number, or not of one length, throws', () => {
  expect(() => argsort(Float64Array.from([1, Number.NaN]))).toThrow(RangeError)
  expect(() => argsortBy([Float64Array.from([1, 2]), Float64Array.from([1, Number.NaN])])).toThrow(RangeError)
  expect(() => argsortBy([new Float64Array(2), new Float64Array(3)])).toThrow(RangeError)
  expect(() => argsortBy([])).toThrow(RangeError)
})
