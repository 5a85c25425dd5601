import { describe, expect, it } from 'vitest'
import { eligible, measureUnits, placeboBorder, runnerUps } from '../../src/borders/index.js'
import {
  borderOf,
  box,
  columns,
  lengths,
  metresAround,
  seeded,
  withProperties,
  type ZoneFeature,
  zone,
  zonesOf,
} from './makeZones.js'

const at = metresAround(8, 50)
const side = 2000
const options = { snapMetres: 2, pieceMetres: 1000 }

/** Sixteen squares, named by column and row: A1 south-west, D4 north-east. */
const grid = [...'ABCD'].flatMap((column, c) =>
  [1, 2, 3, 4].map((row) => zone(`${column}${row}`, box(at, c * side, (row - 1) * side, (c + 1) * side, row * side))),
)
/** Columns C and D: 4 real borders; of the 24 between neighbours, 20 change nothing. */
const treated = ['C', 'D'].flatMap((column) => [1, 2, 3, 4].map((row) => `${column}${row}`))

function placebo(features: ZoneFeature[], more: object) {
  const border = placeboBorder(zonesOf(...features), { ...options, ...more })
  if (!border?.ok) throw new Error('no border of equal status')
  return border.value
}

describe('borders between zones of equal status', () => {
  const border = placebo(grid, { treated })

  it('are all that are not real, sorted names telling the sides', () => {
    const pairs = Object.entries(lengths(border))
    expect(pairs.length).toBe(20)
    expect(pairs.map(([pair]) => pair)).toContain('A1 | A2')
    expect(pairs.map(([pair]) => pair)).toContain('C3 | D3')
    expect(pairs.map(([pair]) => pair)).not.toContain('B1 | C1')
    for (const [pair, metres] of pairs) {
      const [first, second] = pair.split(' | ')
      expect(first < second).toBe(true)
      expect(Math.abs(metres / side - 1)).toBeLessThan(0.002)
    }
    expect(border.pieces.length).toBe(40)
  })

  it('has the corners that the real border makes, too', () => {
    // the nine inner points of the grid
    expect(border.corners.length).toBe(9)
    // A | B ends where C, which is treated, runs past both
    const past = [
      zone('A', box(at, 0, 0, 2000, 2000)),
      zone('B', box(at, 0, 2000, 2000, 4000)),
      zone('C', box(at, 2000, 0, 4000, 4000)),
    ]
    expect(placebo(past, { treated: ['C'] }).corners.map(({ zones }) => zones)).toEqual([['A', 'B', 'C']])
  })

  it('serves units of its own two zones, side by zone', () => {
    const points = [
      at(1900, 1000), // A1, by B1
      at(2100, 1000), // B1, by A1
      at(3950, 1000), // B1, 50 m from C1, which is treated: 1,000 m from B2
      at(1000, 2100), // A2, by A1
      at(-50, 1000), // in no zone
    ]
    const [lon, lat] = columns(points)
    const { placement, setAside } = eligible(border, measureUnits(border, lon, lat), { metresPerUnit: 1 })
    expect(Array.from(placement.line, (line) => placement.lines[line].zones?.join(' | '))).toEqual([
      'A1 | B1',
      'A1 | B1',
      'B1 | B2',
      'A1 | A2',
    ])
    expect([...placement.treated]).toEqual([0, 1, 0, 1])
    const metres = [-100, 100, -1000, 100]
    placement.x.forEach((x, e) => {
      expect(Math.abs(x - metres[e])).toBeLessThan(2)
    })
    expect(Object.fromEntries(setAside)).toEqual({ 'in no zone': 1 })
  })

  it('is the same whatever the order of zones', () => {
    const random = seeded(5)
    const shuffled = grid
      .map((feature) => ({ feature, key: random() }))
      .sort((a, b) => a.key - b.key)
      .map(({ feature }) => feature)
    const other = placebo(shuffled, { treated: [...treated].reverse() })
    expect(other.pieces).toEqual(border.pieces)
    expect(other.corners).toEqual(border.corners)
    const [lon, lat] = columns(Array.from({ length: 200 }, () => at(8000 * random(), 8000 * random())))
    const [one, two] = [border, other].map((b) => eligible(b, measureUnits(b, lon, lat), { metresPerUnit: 1 }))
    expect(two.placement).toEqual(one.placement)
  })

  it('counts the runner-up among the borders of the own zone', () => {
    const [lon, lat] = columns([at(1900, 1700)]) // A1: 100 m from B1, 300 m from A2
    const measured = measureUnits(border, lon, lat)
    const { piece, distanceMetres } = runnerUps(border, measured, lon, lat)
    expect(border.pieces[piece[0]].zones).toEqual(['A1', 'A2'])
    expect(Math.abs(distanceMetres[0] - 300)).toBeLessThan(1)
  })

  it('leaves the real border as it was, and shares no piece with it', () => {
    const real = borderOf(grid, treated)
    const labels = new Set(border.pieces.map(({ label }) => label))
    expect(Object.keys(lengths(real)).length).toBe(4)
    expect(real.pieces.some(({ label }) => labels.has(label))).toBe(false)
  })

  it('is between equal doses where there are doses', () => {
    const dosed = grid.map((feature, i) => withProperties(feature, { levy: Math.floor(i / 4) }))
    // rows of one column have one dose: 3 borders in each of 4 columns
    expect(Object.keys(lengths(placebo(dosed, { dose: 'levy' }))).length).toBe(12)
    expect(placebo(dosed, { dose: 'levy' }).pieces.some((piece) => 'dose' in piece)).toBe(false)
  })

  it('takes the land outside for an untreated zone where the study does', () => {
    const { pieces } = placebo(grid, { treated, outside: 'untreated' })
    const outside = new Set(pieces.filter(({ zones }) => zones[0] === 'outside').map(({ zones }) => zones[1]))
    // untreated zones at the edge: all of column A, and B1 and B4
    expect([...outside].sort()).toEqual(['A1', 'A2', 'A3', 'A4', 'B1', 'B4'])
  })

  it('is nothing where no two zones of equal status meet', () => {
    const two = [zone('West', box(at, 0, 0, 2000, 3000)), zone('East', box(at, 2000, 0, 4000, 3000))]
    expect(placeboBorder(zonesOf(...two), { ...options, treated: ['East'] })).toBeUndefined()
  })

  it('passes on what is wrong with the zones', () => {
    const found = placeboBorder(zonesOf(...grid), { ...options, treated: ['E1'] })
    expect(found?.ok).toBe(false)
  })
})
