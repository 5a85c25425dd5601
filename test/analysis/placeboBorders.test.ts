import { describe, expect, it } from 'vitest'
import { entriesOf } from '../../src/analysis/entries.js'
import { estimateOutcome } from '../../src/analysis/estimating.js'
import { placeboBorders, placePlacebos } from '../../src/analysis/placeboBorders.js'
import { placeStudy } from '../../src/analysis/placing.js'
import { seededRandom } from '../../src/math/index.js'
import { box, metresAround, type Point, type ZoneFeature, zone } from '../borders/makeZones.js'
import { type GroundStudy, groundStudy } from './groundStudies.js'

const at = metresAround(8, 50)
const side = 2000
/** Sixteen squares; columns C and D treated, so that 20 of their 24 borders change nothing. */
const grid = [...'ABCD'].flatMap((column, c) =>
  [1, 2, 3, 4].map((row) => zone(`${column}${row}`, box(at, c * side, (row - 1) * side, (c + 1) * side, row * side))),
)
const treated = ['C', 'D'].flatMap((column) => [1, 2, 3, 4].map((row) => `${column}${row}`))

interface Draw {
  readonly units?: number
  readonly zones?: readonly ZoneFeature[]
  readonly effect?: number
  readonly trend?: (x: number, y: number) => number
  readonly lines?: readonly string[]
}

/** Noise of variance 1 over the squares, with an effect at x = 4 km. */
function draw(seed: number, { units = 3000, zones = grid, effect = 0, trend = () => 0, lines = [] }: Draw) {
  const random = seededRandom(seed)
  const points: Point[] = []
  const y = new Float64Array(units)
  for (let i = 0; i < units; i++) {
    const [east, north] = [4 * side * random.next(), 4 * side * random.next()]
    points.push(at(east, north))
    y[i] = random.normal() + trend(east, north) + (east > 2 * side ? effect : 0)
  }
  return groundStudy(zones, treated, points, y, { lines: ['piece: 2000', ...lines] })
}

function checked({ study, inputs }: GroundStudy) {
  const placed = placeStudy(study, inputs)
  if (!placed.ok) throw new Error('not placed')
  const entries = entriesOf(study, inputs.table, placed.value, 'y')
  const { pooled } = estimateOutcome(study, placed.value, entries, undefined, () => {})
  const placebos = placePlacebos(study, inputs, placed.value)
  const { checks, exhibit } = placeboBorders(study, inputs, placebos, 'y', pooled)
  return { checks, exhibit, placebos }
}

describe('borders that change nothing', () => {
  it('give an effect each, and the real one comes first where it is there', () => {
    const { checks, exhibit } = checked(draw(1, { effect: 2 }))
    expect(exhibit?.placebos.length).toBe(20)
    expect(exhibit?.not_estimated).toEqual([])
    expect(exhibit).toMatchObject({ rank: 1, of: 21, p: 1 / 21, rank_by_estimate: 1, p_by_estimate: 1 / 21 })
    expect(checks).toEqual([
      {
        check: 'borders that change nothing',
        statistic: 1,
        p: 1 / 21,
        verdict: 'fine',
        says: expect.stringContaining('among 20 borders that change nothing the real effect ranks 1 of 21 by |t|'),
      },
    ])
  })

  it('stay near 0 under a smooth trend', () => {
    const trend = (x: number, y: number) => Math.sin(x / 3000) + (y / 4000) ** 2
    const { exhibit } = checked(draw(2, { units: 20_000, trend }))
    const t = exhibit?.placebos.map(({ estimate, standard_error }) => Math.abs(estimate / standard_error)) ?? []
    expect(t.length).toBe(20)
    expect(Math.max(...t)).toBeLessThan(3.5)
    expect(exhibit?.placebos.every(({ units }) => units > 100)).toBe(true)
  })

  it('are doubted where zones differ by themselves', () => {
    const own = (x: number, y: number) => 3 * Math.sin(7 * Math.floor(x / side) + 11 * Math.floor(y / side))
    const { checks } = checked(draw(3, { trend: own, effect: 2 }))
    expect(checks[0].verdict).toBe('doubt')
  })

  it('rank an effect that is not there anywhere', () => {
    const ranks = Array.from({ length: 24 }, (_, i) => checked(draw(100 + i, { units: 1500 })).exhibit?.rank as number)
    // uniform on 1 … 21: mean 11, standard deviation of a mean of 24 draws 1.24
    const mean = ranks.reduce((sum, rank) => sum + rank, 0) / ranks.length
    expect(Math.abs(mean - 11)).toBeLessThan(3.7)
    expect(new Set(ranks).size).toBeGreaterThan(8)
    expect(ranks.filter((rank) => rank <= 7).length).toBeGreaterThan(2)
    expect(ranks.filter((rank) => rank >= 15).length).toBeGreaterThan(2)
  })

  it('do not depend on the order of zones', () => {
    const [one, two] = [grid, [...grid].reverse()].map((zones) => checked(draw(4, { zones })))
    expect(two.exhibit).toEqual(one.exhibit)
    expect(two.checks).toEqual(one.checks)
  })

  it('are held to the rules of the study', () => {
    const { placebos } = checked(draw(5, { lines: ['reach: 500', 'corner: 300'] }))
    if (!placebos.ok) throw new Error(placebos.reason)
    const { placement, setAside } = placebos.placed
    expect(placement.x.every((x) => Math.abs(x) <= 500)).toBe(true)
    expect(setAside.get('beyond reach')).toBeGreaterThan(100)
    expect(setAside.get('near a corner where three zones meet')).toBeGreaterThan(100)
  })

  it('say so where there are none', () => {
    const two = [zone('A1', box(at, 0, 0, 4000, 8000)), zone('C1', box(at, 4000, 0, 8000, 8000))]
    const one = draw(6, { zones: two })
    const { line } = one.study
    if (line.kind !== 'border') throw new Error('a border')
    const { checks, exhibit } = checked({ ...one, study: { ...one.study, line: { ...line, treated: ['C1'] } } })
    const says = 'no two zones of equal status share a border'
    expect(checks).toEqual([{ check: 'borders that change nothing', verdict: 'not possible', says }])
    expect(exhibit).toBeUndefined()
  })
})
