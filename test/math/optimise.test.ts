import { describe, expect, test } from 'vitest'
import { lowestOn, rootBetween } from '../../src/math/index.js'

describe('lowest place', () => {
  // The values of a smooth function cannot tell places nearer than about the root of the rounding unit.
  test.each([
    ['(x − 2)⁴ + x', (x: number) => (x - 2) ** 4 + x, 0.1, 10, 2 - 0.25 ** (1 / 3)],
    ['x log x', (x: number) => x * Math.log(x), 1e-9, 3, Math.exp(-1)],
    ['a corner', (x: number) => Math.abs(x - 0.3), 0.01, 1, 0.3],
    ['rising: the low end', (x: number) => x, 1, 4, 1],
    ['falling: the high end', (x: number) => -x, 1, 4, 4],
    ['many minima, the lowest at 3', (x: number) => (x - 3) ** 2 - Math.cos(12 * (x - 3)), 0.5, 9, 3],
    ['nowhere but past 2', (x: number) => (x < 2 ? Number.POSITIVE_INFINITY : (x - 2.5) ** 2), 1, 9, 2.5],
    ['one point', (x: number) => x, 2, 2, 2],
  ])('%s', (_, f, low, high, place) => {
    expect(Math.abs((lowestOn(f, low, high, 40, 1e-7) as number) - place)).toBeLessThan(1e-6)
  })
  test('stays inside, has no answer where there is none, and refuses what is no interval', () => {
    const f = (x: number) => {
      expect(x >= 2 && x <= 3).toBe(true)
      return (x - 2.5) ** 2
    }
    lowestOn(f, 2, 3, 7, 1e-3)
    expect(lowestOn(() => Number.POSITIVE_INFINITY, 1, 2, 5, 1e-3)).toBeUndefined()
    expect(() => lowestOn(f, 3, 2, 7, 1e-3)).toThrow(RangeError)
    expect(() => lowestOn(f, Number.NaN, 2, 7, 1e-3)).toThrow(RangeError)
    expect(() => lowestOn(f, 2, 3, 7, 0)).toThrow(RangeError)
  })
})

describe('root', () => {
  test.each([
    ['cos x = x', (x: number) => Math.cos(x) - x, 0, 1, 0.7390851332151607],
    ['x³ = 2x + 5 (Newton’s example)', (x: number) => x ** 3 - 2 * x - 5, 2, 3, 2.0945514815423265],
    ['a jump', (x: number) => (x < 0.7 ? -1 : 1), 0, 1, 0.7],
    ['flat about the root', (x: number) => (x - 1) ** 9, -3, 4.5, 1],
    ['steep', (x: number) => Math.exp(50 * x) - 2, -1, 10, Math.log(2) / 50],
    ['at an end', (x: number) => x - 4, 4, 9, 4],
  ])('%s', (_, f, low, high, root) => {
    for (const [a, b] of [
      [low, high],
      [high, low],
    ]) {
      expect(Math.abs(rootBetween(f, a, b, 1e-13) - root)).toBeLessThan(1e-12)
    }
  })
  test('needs few calls for a smooth function, and not many for a bad one', () => {
    const callsFor = (f: (x: number) => number) => {
      let calls = 0
      rootBetween((x) => f(x) + 0 * calls++, 0, 1, 1e-14)
      return calls
    }
    expect(callsFor((x) => Math.cos(x) - x)).toBeLessThanOrEqual(8)
    expect(callsFor((x) => (x < 0.7 ? -1 : 1))).toBeLessThanOrEqual(150)
  })
  test('refuses functions without a change of sign', () => {
    expect(() => rootBetween((x) => x * x + 1, -1, 1, 1e-9)).toThrow(/no change of sign between -1 \(value 2\)/)
    expect(() => rootBetween(() => Number.NaN, -1, 1, 1e-9)).toThrow(RangeError)
    expect(() => rootBetween((x) => x, -1, 1, Number.NaN)).toThrow(RangeError)
  })
})
