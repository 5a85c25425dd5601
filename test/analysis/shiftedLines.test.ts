import { describe, expect, it } from 'vitest'
import { entriesOf } from '../../src/analysis/entries.js'
import { estimateOutcome } from '../../src/analysis/estimating.js'
import { placeStudy } from '../../src/analysis/placing.js'
import { shiftedLines } from '../../src/analysis/shiftedLines.js'
import { seededRandom } from '../../src/math/index.js'
import { box, metresAround, type Point, zone } from '../borders/makeZones.js'
import { type GroundStudy, groundStudy } from './groundStudies.js'

const at = metresAround(8, 50)
const halves = [zone('West', box(at, -6000, 0, 0, 8000)), zone('East', box(at, 0, 0, 6000, 8000))]

interface Draw {
  readonly outcome?: (east: number, north: number) => number
  readonly lines?: readonly string[]
  readonly rest?: readonly string[]
  readonly reversed?: boolean
}

/** Noise of variance 1 over both halves. */
function draw(seed: number, { outcome = () => 0, lines = [], rest = [], reversed = false }: Draw = {}): GroundStudy {
  const random = seededRandom(seed)
  const points: Point[] = []
  const y = new Float64Array(8000)
  for (let i = 0; i < y.length; i++) {
    const [east, north] = [12_000 * random.next() - 6000, 8000 * random.next()]
    points.push(at(east, north))
    y[i] = random.normal() + outcome(east, north)
  }
  return groundStudy(reversed ? [...halves].reverse() : halves, ['East'], points, y, { lines, rest })
}

function checked({ study, inputs }: GroundStudy, metres?: readonly number[]) {
  const placed = placeStudy(study, inputs)
  if (!placed.ok) throw new Error('not placed')
  const entries = entriesOf(study, inputs.table, placed.value, 'y')
  const { pooled } = estimateOutcome(study, placed.value, entries, undefined, () => {})
  return { pooled, ...shiftedLines(study, inputs, placed.value, 'y', pooled, metres) }
}

const step = (east: number) => (east > 0 ? 3 : 0)

describe('shifted lines', () => {
  it('find nothing where the outcome jumps at the real border alone', () => {
    const { checks, exhibit, pooled } = checked(draw(1, { outcome: step }))
    if ('reason' in pooled) throw new Error(pooled.reason)
    expect(pooled.jump.corrected.estimate).toBeGreaterThan(2)
    expect(checks.length).toBe(6)
    expect(exhibit?.shifted.length).toBe(6)
    for (const { verdict, p_holm } of checks) {
      expect(verdict).toBe('fine')
      expect(p_holm).toBeGreaterThan(0.05)
    }
    const h = pooled.jump.bandwidths.h.untreated
    const metres = exhibit?.shifted.filter(({ side }) => side === 'untreated').map((one) => one.metres) ?? []
    metres.forEach((distance, i) => {
      expect(Math.abs(distance / ([1, 1.5, 2][i] * h) - 1)).toBeLessThan(0.05)
    })
    for (const { error_metres, metres: distance } of exhibit?.shifted ?? [])
      expect(error_metres).toBeLessThan(0.001 * distance)
  })

  it('find a jump inside a side, with the sign of the way to treated land', () => {
    // untreated land: 2 more within 1,500 m of the border; treated land: 2 more beyond 1,500 m
    const outcome = (east: number) => ((east > -1500 && east < 0) || east > 1500 ? 2 : 0)
    const { checks, exhibit } = checked(draw(2, { outcome: (east) => outcome(east) }), [1500, 4000])
    const of = (side: string, metres: number) =>
      exhibit?.shifted.find((one) => one.side === side && one.metres === metres)
    for (const side of ['untreated', 'treated']) {
      const { estimate, standard_error, p_holm } = of(side, 1500) ?? { estimate: 0, standard_error: 0, p_holm: 1 }
      expect(Math.abs(estimate - 2)).toBeLessThan(4 * standard_error)
      expect(p_holm).toBeLessThan(0.001)
      expect(of(side, 4000)?.p_holm).toBeGreaterThan(0.05)
    }
    expect(checks.map(({ line, verdict }) => `${line}: ${verdict}`)).toEqual([
      '1500 m into untreated land: doubt',
      '4000 m into untreated land: fine',
      '1500 m into treated land: doubt',
      '4000 m into treated land: fine',
    ])
    expect(checks[0].says).toContain('more than chance explains')
  })

  it('use units of one side alone: the jump at the real border does not reach them', () => {
    // a jump of 100, 300 m away from a line with a bandwidth of 600 m
    const outcome = (east: number) => (east > 0 ? 100 : 0)
    const { exhibit } = checked(draw(3, { outcome, rest: ['estimation: {bandwidth: 600}'] }), [300])
    expect(exhibit?.shifted.length).toBe(2)
    for (const { estimate, standard_error } of exhibit?.shifted ?? []) {
      expect(Math.abs(estimate)).toBeLessThan(4 * standard_error)
      expect(standard_error).toBeLessThan(2)
    }
  })

  it('say why a line can’t be drawn', () => {
    const { checks, exhibit } = checked(draw(4, { lines: ['reach: 5000'] }), [5500, 7000])
    expect(exhibit?.shifted).toEqual([])
    expect(checks.map(({ verdict, says }) => `${verdict}: ${says}`)).toEqual(
      Array(4).fill('not possible: no unit is used so far away'),
    )
    const { checks: beyond } = checked(draw(4), [7000])
    expect(beyond.map(({ says }) => says)).toEqual(Array(2).fill('there is no such land'))
  })

  it('do not depend on the order of zones', () => {
    const [one, two] = [false, true].map((reversed) => checked(draw(5, { outcome: step, reversed }), [1000]))
    expect(two.checks).toEqual(one.checks)
    expect(two.exhibit).toEqual(one.exhibit)
  })
})
