import { describe, expect, test } from 'vitest'
import { argsort, normalCdf, seededRandom, streamOf } from '../../src/math/index.js'
import { generatorFrom } from '../../src/math/random.js'
import { golden } from './golden.js'

describe('the generator', () => {
  test('gives the words of xoshiro128**, two to a double', () => {
    const { state, words } = golden<{ state: number[]; words: number[] }>('xoshiro.json')
    const random = generatorFrom(Uint32Array.from(state))
    for (let i = 0; i < words.length; i += 2) {
      expect(random.next()).toBe((Math.floor(words[i] / 32) * 2 ** 26 + Math.floor(words[i + 1] / 64)) / 2 ** 53)
    }
  })
  // Made by this code; a change here changes every seeded result that was ever printed.
  test('keeps its first numbers', () => {
    expect(firstOf(seededRandom(1))).toEqual([0.1936336134001696, 0.09104931700964625, 0.28227238145952094])
    expect(firstOf(streamOf(1, 0))).toEqual([0.5859321942699229, 0.41615006767398877, 0.23912152049811508])
    expect(seededRandom(1).normal()).toBe(-0.864583873708812)
  })
  test('differs between seeds and streams, and repeats for the same', () => {
    const starts = [0, 1, 2, -1, 0.5, 2 ** 53, 2 ** 31].map((seed) => seededRandom(seed).next())
    for (let k = 0; k < 2000; k++) starts.push(streamOf(1, k).next(), streamOf(2, k).next())
    starts.push(streamOf(1, 2 ** 32).next(), streamOf(1, 2 ** 33).next())
    expect(new Set(starts).size).toBe(starts.length)
    expect(firstOf(streamOf(7, 3))).toEqual(firstOf(streamOf(7, 3)))
    expect(firstOf(seededRandom(-0))).toEqual(firstOf(seededRandom(0)))
  })
  test('refuses seeds, streams and ranges that are no numbers', () => {
    expect(() => seededRandom(Number.NaN)).toThrow(RangeError)
    expect(() => streamOf(1, -1)).toThrow(RangeError)
    expect(() => streamOf(1, 0.5)).toThrow(RangeError)
    for (const n of [0, -3, 1.5, Number.NaN]) expect(() => seededRandom(1).integer(n)).toThrow(RangeError)
  })
})

// Seeded, so each either always passes or always fails; the bounds are five standard errors.
describe('the draws', () => {
  const n = 200_000
  test('uniform: mean, variance, and no relation of a draw to the next', () => {
    const random = seededRandom(11)
    let [total, squares, products, before] = [0, 0, 0, 0]
    for (let i = 0; i < n; i++) {
      const u = random.next() - 0.5
      total += u
      squares += u * u
      products += u * before
      before = u
    }
    expect(Math.abs(total / n)).toBeLessThan(5 * Math.sqrt(1 / 12 / n))
    expect(Math.abs(squares / n - 1 / 12)).toBeLessThan(5 * Math.sqrt(1 / 180 / n))
    expect(Math.abs(products / n)).toBeLessThan((5 * (1 / 12)) / Math.sqrt(n))
  })
  test('normal: first four moments', () => {
    const random = seededRandom(12)
    const sums = [0, 0, 0, 0]
    for (let i = 0; i < n; i++) {
      const z = random.normal()
      for (let k = 0; k < 4; k++) sums[k] += z ** (k + 1)
    }
    // Variances of z, z², z³, z⁴ are 1, 2, 15, 96.
    for (const [k, [mean, variance]] of [
      [0, 1],
      [1, 2],
      [0, 15],
      [3, 96],
    ].entries()) {
      expect(Math.abs(sums[k] / n - mean)).toBeLessThan(5 * Math.sqrt(variance / n))
    }
  })
  test('normal: distance from the distribution function (Kolmogorov, 1e-5 level: 2.5/√n)', () => {
    const random = seededRandom(13)
    const draws = Float64Array.from({ length: n }, () => random.normal())
    const order = argsort(draws)
    let worst = 0
    for (let i = 0; i < n; i++) worst = Math.max(worst, Math.abs(normalCdf(draws[order[i]]) - (i + 0.5) / n))
    expect(worst).toBeLessThan(2.5 / Math.sqrt(n))
  })
  test('whole numbers: every value equally often, up to the largest range', () => {
    const random = seededRandom(14)
    const counts = new Float64Array(7)
    for (let i = 0; i < n; i++) counts[random.integer(7)]++
    for (const count of counts) expect(Math.abs(count - n / 7)).toBeLessThan(5 * Math.sqrt((n / 7) * (6 / 7)))
    expect(random.integer(1)).toBe(0)
    expect(Number.isSafeInteger(random.integer(2 ** 53 - 1))).toBe(true)
  })
  test('streams of one seed are unrelated: the mean over streams of first draws', () => {
    let total = 0
    for (let k = 0; k < 20_000; k++) total += streamOf(5, k).next() - 0.5
    expect(Math.abs(total / 20_000)).toBeLessThan(5 * Math.sqrt(1 / 12 / 20_000))
  })
})

function firstOf(random: { next(): number }): number[] {
  return [random.next(), random.next(), random.next()]
}
