/** What is drawn of the test of density: counts by bin, small ones blank, and the densities that the test compared. */
import { describe, expect, it } from 'vitest'
import { groundExhibit, scoreExhibit } from '../../src/analysis/densityExhibit.js'
import { type DensityTest, densityTest } from '../../src/checks/index.js'
import { seededRandom } from '../../src/math/index.js'
import { readStudy } from '../../src/study/index.js'

function studyWith(cell: number) {
  const made = readStudy(
    `records: {file: r.csv}\noutcomes: [y]\nline: {score: s, cutoff: 0, treated: above}\ndisclosure: {smallest_cell: ${cell}}\n`,
    's.yaml',
  )
  if (!made.ok) throw new Error(JSON.stringify(made.problems))
  return made.value
}

/** Uniform on −2 to 2, the treated side twice as dense. */
function scores(count: number, seed: number) {
  const random = seededRandom(seed)
  const x = Float64Array.from({ length: count }, () => (random.next() < 2 / 3 ? 2 : -2) * random.next())
  return {
    lines: [],
    unit: new Int32Array(count),
    line: new Int32Array(count),
    x,
    treated: Uint8Array.from(x, (v) => (v >= 0 ? 1 : 0)),
  }
}

describe('density by score', () => {
  const placement = scores(6000, 3)
  const test = densityTest(placement.x, placement.treated, { kernel: 'triangular' }) as DensityTest
  const drawn = scoreExhibit(studyWith(10), placement, test)

  it('counts every unit of each bin, over its width', () => {
    for (const { side, low, high, units, density } of drawn.bins) {
      const inside = placement.x.filter((v) =>
        side === 'treated' ? v >= low && v < high : v > low && v <= high,
      ).length
      // an edge shared by two bins moves no more than the units that stand on it: none here
      expect(units).toBe(inside)
      expect(density).toBeCloseTo(inside / (high - low), 8)
    }
  })

  it('shows the densities at the line that the truth has: 1,000 and 2,000 units per unit of score', () => {
    const { untreated, treated } = drawn.atLine
    expect(Math.abs(untreated.density - 1000)).toBeLessThan(3.5 * untreated.standardError)
    expect(Math.abs(treated.density - 2000)).toBeLessThan(3.5 * treated.standardError)
    expect(drawn.ratio).toBe(treated.density / untreated.density)
  })

  it('blanks bins with fewer units than the smallest cell, and none that are empty', () => {
    const blanked = scoreExhibit(studyWith(200), placement, test)
    blanked.bins.forEach(({ units, density }, i) => {
      const small = (drawn.bins[i].units as number) > 0 && (drawn.bins[i].units as number) < 200
      expect(units === null && density === null).toBe(small)
    })
    expect(blanked.bins.some(({ units }) => units === null)).toBe(true)
  })
})

describe('density on the ground', () => {
  it('is units over land: 20 and 40 per km² where 400 points stand for one km²', () => {
    const units = scores(6000, 4)
    const land = scores(80_000, 5)
    const even = { ...land, x: land.x.map((v, i) => (i % 2 === 0 ? Math.abs(v) : -Math.abs(v))) }
    const ground = {
      line: land.line,
      x: even.x,
      treated: Uint8Array.from(even.x, (v) => (v >= 0 ? 1 : 0)),
      perSquareKm: 400,
    }
    const test = (points: { x: Float64Array; treated: Uint8Array }, bandwidth?: number) =>
      densityTest(points.x, points.treated, { kernel: 'triangular', bandwidth }) as DensityTest
    const [made, onLand] = [test(units), test(ground, test(units).bandwidth)]
    const drawn = groundExhibit(studyWith(10), units, ground, { units: made, land: onLand, ratio: 2, p: 0 })
    // 40,000 points a side at 400 per km² are 100 km² a side, with 2,000 and 4,000 units on them
    expect(Math.abs(drawn.atLine.untreated.density - 20)).toBeLessThan(3.5 * drawn.atLine.untreated.standardError)
    expect(Math.abs(drawn.atLine.treated.density - 40)).toBeLessThan(3.5 * drawn.atLine.treated.standardError)
    const mean = (side: string) => {
      const bins = drawn.bins.filter((bin) => bin.side === side)
      return bins.reduce((sum, { density }) => sum + (density ?? 0), 0) / bins.length
    }
    expect(Math.abs(mean('untreated') - 20)).toBeLessThan(1.5)
    expect(Math.abs(mean('treated') - 40)).toBeLessThan(2)
  })
})
