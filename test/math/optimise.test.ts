import { describe, expect, test } from 'vitest'
import { rootBetween } from '../../src/math/index.js'

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
