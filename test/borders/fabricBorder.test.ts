import { describe, expect, it } from 'vitest'
import { fabricOf } from '../../src/borders/fabric.js'
import { borderFit, unitsChangingSide } from '../../src/borders/fabricBorder.js'
import { snapAgainstBandwidth } from '../../src/borders/snapAgainstBandwidth.js'
import { borderOf, box, closed, columns, lengths, metresAround, type Point, seeded, zone } from './makeZones.js'

const at = metresAround(12, 56)
const west = zone('T', box(at, 0, 0, 5000, 5000))
/** Overlaps T by 15 m up to 2,000 m north, and leaves a gap of 40 m beyond. */
const east = zone(
  'U',
  closed([at(4985, 0), at(9000, 0), at(9000, 5000), at(5040, 5000), at(5040, 2000), at(4985, 2000)]),
)

describe('the border between zones that do not fit together', () => {
  const border = borderOf([west, east], ['T'], { snapMetres: 50 })

  it('lies on the treated zone’s own edge, and as far from the other’s as the widest sliver', () => {
    const [fit, ...others] = borderFit(border, 50)
    expect(others).toEqual([])
    expect(fit.zones).toEqual(['U', 'T'])
    expect(fit.treatedMetres).toBeLessThan(1e-6)
    expect(fit.untreatedMetres).toBeCloseTo(40, 1)
    expect(Math.abs(lengths(border)['U | T'] - 5000)).toBeLessThan(5)
  })

  it('leaves units between the two zones’ edges without a side, and counts them by pair', () => {
    const fabric = fabricOf(border.zones, 50)
    const points = [
      at(4990, 500), // in the overlap
      at(4999, 1900),
      at(5010, 3000), // in the gap
      at(5039, 4000),
      at(5001, 4990),
      at(4980, 500), // in T alone
      at(5041, 3000), // in U alone
      at(5020, 5030), // beyond the gap's end, at sea
      [Number.NaN, 56],
    ]
    const [lon, lat] = columns(points)
    expect(unitsChangingSide(border, fabric, lon, lat)).toEqual({
      inGaps: 3,
      inOverlaps: 2,
      between: 5,
      pairs: [{ zones: ['U', 'T'], inGaps: 3, inOverlaps: 2 }],
    })
    expect(unitsChangingSide(border, fabric, lon.slice(5), lat.slice(5)).between).toBe(0)
    expect(() => unitsChangingSide(border, fabric, lon, lat.slice(1))).toThrow(RangeError)
  })

  it('counts as many units as the area between says', () => {
    const random = seeded(4)
    const points = Array.from({ length: 20_000 }, () => at(4900 + 200 * random(), 5000 * random()))
    const [lon, lat] = columns(points)
    const found = unitsChangingSide(border, fabricOf(border.zones, 50), lon, lat)
    // binomial: 20,000 units on a million square metres; four standard errors
    expect(Math.abs(found.inGaps - 2400)).toBeLessThan(4 * Math.sqrt(2400 * 0.88))
    expect(Math.abs(found.inOverlaps - 600)).toBeLessThan(4 * Math.sqrt(600 * 0.97))
  })

  it('has no such units where zones fit, nor at borders that are not used', () => {
    const other = zone('V', box(at, 9020, 0, 12_000, 5000))
    const more = borderOf([west, east, other], ['T'], { snapMetres: 50 })
    const [lon, lat] = columns([at(9010, 2500)])
    const fabric = fabricOf(more.zones, 50)
    expect(fabric.slivers.some(({ zones }) => zones.join() === 'U,V')).toBe(true)
    expect(unitsChangingSide(more, fabric, lon, lat).between).toBe(0)
  })
})

describe('the end of a border drawn twice, 2 m apart', () => {
  const degrees = (angle: number) => (angle * Math.PI) / 180
  const other = (angle: number) =>
    closed([at(2, 0), at(5000, 0), at(5000, 5000 + 4998 / Math.tan(degrees(angle))), at(2, 5000)])

  it.each([20, 30, 45, 60, 80])('is where the other zone turns away by %d degrees', (angle) => {
    const features = [zone('T', box(at, -3000, 0, 0, 20_000)), zone('U', other(angle))]
    for (const treated of ['T', 'U']) {
      const border = borderOf(features, [treated], { snapMetres: 10, pieceMetres: 1e6 })
      expect(Math.abs(border.pieces[0].lengthMetres - 5000)).toBeLessThan(2)
    }
  })

  it.each([20, 45, 70])('is the tip of a zone whose coast folds back by %d degrees', (angle) => {
    const tip: Point[] = [at(0, 0), at(0, 5000), at(-3000 * Math.tan(degrees(angle)), 2000), at(-3000, 0)]
    const features = [zone('T', closed(tip)), zone('U', box(at, 2, 0, 5000, 5000))]
    for (const treated of ['T', 'U']) {
      const border = borderOf(features, [treated], { snapMetres: 10, pieceMetres: 1e6 })
      expect(border.pieces).toHaveLength(1)
      expect(Math.abs(border.pieces[0].lengthMetres - 5000)).toBeLessThan(2)
    }
  })
})

describe('snap against the smallest bandwidth', () => {
  it('is fine up to a fifth of it', () => {
    expect(snapAgainstBandwidth(0, 10)).toBeUndefined()
    expect(snapAgainstBandwidth(20, 100)).toBeUndefined()
    expect(snapAgainstBandwidth(20.1, 100)?.says).toBe(
      'snap is 20.1 m, more than a fifth of the smallest bandwidth (100 m): the border is not sure to within distances ' +
        'that matter; set snap to 20 m or less, or use a wider bandwidth',
    )
    expect(snapAgainstBandwidth(50, 198)?.says).toMatch(/set snap to 39 m or less/)
    expect(snapAgainstBandwidth(5, 8.3)?.says).toMatch(/set snap to 1\.6 m or less/)
  })
  it('wants numbers', () => {
    expect(() => snapAgainstBandwidth(Number.NaN, 100)).toThrow(RangeError)
    expect(() => snapAgainstBandwidth(2, 0)).toThrow(RangeError)
  })
})
