import { describe, expect, test } from 'vitest'
import { goldenMinimum, rootBetween } from '../../src/math/index.js'

describe('golden section', () => {
  test.each([
    ['(x − 2)⁴ + x', (x: number) => (x - 2) ** 4 + x, -5, 10, 2 - 0.25 ** (1 / 3)],
    ['x log x', (x: number) => x * Math.log(x), 1e-9, 3, Math.exp(-1)],
    ['|x − 0.3|, a corner', (x: number) => Math.abs(x - 0.3), 0, 1, 0.3],
    ['rising: the low end', (x: number) => x, 1, 4, 1],
    ['falling: the high end', (x: number) => -x, 1, 4, 4],
  ])('%s', (_, f, low, high, place) => {
    // The values of a smooth function cannot tell places nearer than about the root of the rounding unit.
    const found = goldenMinimum(f, low, high, 1e-6)
    expect(Math.abs(found - place)).toBeLessThan(1e-6)
  })
  test('stays inside, counts its calls, and ends though the tolerance is beyond the doubles', () => {
    let calls = 0
    goldenMinimum(
      (x) => {
        expect(x >= 2 && x <= 3).toBe(true)
        calls++
        return (x - 2.5) ** 2
      },
      2,
      3,
      1e-3,
    )
    expect(calls).toBeLessThanOrEqual(Math.ceil(Math.log(1e3) / Math.log(1.618)) + 2)
    expect(Math.abs(goldenMinimum((x) => Math.abs(x - 1e9), 0, 2e9, 1e-30) - 1e9)).toBeLessThan(1e-5)
  })
  test('refuses an empty interval and a tolerance that is none', () => {
    expect(() => goldenMinimum((x) => x, 2, 1, 1e-3)).toThrow(RangeError)
    expect(() => goldenMinimum((x) => x, Number.NaN, 1, 1e-3)).toThrow(RangeError)
    expect(() => goldenMinimum((x) => x, 0, 1, 0)).toThrow(RangeError)
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
