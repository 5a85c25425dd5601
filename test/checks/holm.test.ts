import { describe, expect, it } from 'vitest'
import { holmAdjusted } from '../../src/checks/index.js'

describe('several p-values at once', () => {
  it('are those of R', () => {
    // R 4.2: p.adjust(c(0.04, 0.001, 0.03, 0.6, 0.03), "holm")
    const adjusted = holmAdjusted([0.04, 0.001, 0.03, 0.6, 0.03])
    const expected = [0.12, 0.005, 0.12, 0.6, 0.12]
    adjusted.forEach((p, i) => {
      expect(p).toBeCloseTo(expected[i], 12)
    })
    expect(holmAdjusted([0.7, 0.8])).toEqual([1, 1])
    expect(holmAdjusted([])).toEqual([])
  })

  it('must be p-values', () => {
    for (const wrong of [-0.1, 1.1, Number.NaN]) expect(() => holmAdjusted([0.5, wrong])).toThrow(RangeError)
  })
})
