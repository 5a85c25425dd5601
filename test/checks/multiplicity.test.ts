import { describe, expect, it } from 'vitest'
import { benjaminiHochberg, holm } from '../../src/checks/multiplicity.js'

describe('adjusted p-values', () => {
  // base R 4.2.2: p.adjust(c(.01, .04, .03, .005, .6, .04), 'holm'), and 'BH'
  const p = [0.01, 0.04, 0.03, 0.005, 0.6, 0.04]

  it('by Holm', () => {
    expect(holm(p)).toEqual([0.05, 0.12, 0.12, 0.03, 0.6, 0.12].map((value) => expect.closeTo(value, 12)))
  })

  it('by Benjamini and Hochberg', () => {
    expect(benjaminiHochberg(p)).toEqual(
      [0.03, 0.048, 0.048, 0.03, 0.6, 0.048].map((value) => expect.closeTo(value, 12)),
    )
  })

  it('of none and of one', () => {
    expect([holm([]), benjaminiHochberg([])]).toEqual([[], []])
    expect([holm([0.2]), benjaminiHochberg([0.2])]).toEqual([[0.2], [0.2]])
  })
})
