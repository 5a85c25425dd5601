/** Breaks at and off the line: sharp ones, which leave no residual, and ones too clear for their p to be told from 0. */
import { describe, expect, it } from 'vitest'
import { type AuditHalf, auditLine } from '../../src/checks/index.js'
import { seededRandom } from '../../src/math/index.js'

/** Two halves of scores from −50 to 50; the share that takes up is `low` before `real` and `high` from there on. */
function audited(units: number, real: number, low: number, high: number, isWhole = false) {
  const random = seededRandom(5)
  const half = (): AuditHalf => {
    const score = () => 100 * random.next() - 50
    const x = Float64Array.from({ length: units / 2 }, () => (isWhole ? Math.floor(score()) : score())).sort()
    return { x, y: x.map((value) => (random.next() < (value >= real ? high : low) ? 1 : 0)) }
  }
  const made = auditLine(half(), half())
  if (!made.ok) throw new Error(made.reason)
  return made
}

describe('an audit of one line', () => {
  it('finds take-up of all or none where it is', () => {
    expect(audited(800, 0, 0, 1)).toMatchObject({ at: 0, p: 0, isClearer: false })
    const off = audited(800, 4, 0, 1)
    expect(Math.abs(off.at - 4)).toBeLessThanOrEqual(off.step)
    expect(off).toMatchObject({ isClearer: true })
  })

  it('takes the place nearest to the line of those in one gap of the score', () => {
    expect(audited(4000, 0, 0, 1, true)).toMatchObject({ at: 0, isClearer: false })
  })

  it('tells two places apart whose p are both 0', () => {
    const off = audited(200_000, 3, 0.15, 0.8)
    expect([off.p, off.pAtLine]).toEqual([0, 0])
    expect(off.isClearer).toBe(true)
    expect(Math.abs(off.at - 3)).toBeLessThanOrEqual(off.step)
  })

  it('has a reason where nothing varies', () => {
    expect(() => audited(800, 99, 0, 1)).toThrow('do not vary')
  })
})
