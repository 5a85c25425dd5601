/** A cutoff that moves: differences in discontinuities, and nothing left at the old one. */
import { rmSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { seededRandom } from '../../src/math/index.js'
import type { Estimate, Results } from '../../src/results.js'
import { newRoom, scarp, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

/** Site a moves from 40 to 60, b from 60 to 45, c stays. At 60 something else jumps by 1 in all years; the rule adds 2. */
const cutoffs: Readonly<Record<string, Readonly<Record<string, number>>>> = {
  a: { 2001: 40, 2002: 60 },
  b: { 2001: 60, 2002: 45 },
  c: { 2001: 50, 2002: 50 },
}

let results: Results
beforeAll(async () => {
  const random = seededRandom(12)
  const rows: string[] = []
  for (const site of Object.keys(cutoffs)) {
    for (const year of ['2001', '2002']) {
      for (let i = 0; i < 2500; i++) {
        const score = 100 * random.next()
        const other = site === 'a' && score >= 60 ? 1 : 0
        const y = score / 100 + other + (score >= cutoffs[site][year] ? 2 : 0) + random.normal()
        rows.push(`${site},${year},${score.toFixed(4)},${y.toFixed(4)}`)
      }
    }
  }
  const table = Object.entries(cutoffs).flatMap(([site, by]) =>
    Object.entries(by).map(([year, cutoff]) => `${site},${year},${cutoff}`),
  )
  writeFiles(join(room, 'moves'), {
    'study.yaml': `records: {file: r.csv}
outcomes: [y]
line:
  score: score
  cutoff: {schedule: c.csv, by: [site, year], value: cutoff, period: year}
  treated: at-or-above
checks: none
`,
    'r.csv': `site,year,score,y\n${rows.join('\n')}\n`,
    'c.csv': `site,year,cutoff\n${table.join('\n')}\n`,
  })
  const said = await scarp(['run', 'moves/study.yaml', '--json'], { cwd: room })
  expect(said).toMatchObject({ code: 0, stderr: '' })
  results = JSON.parse(said.stdout)
})

const near = (one: unknown, value: number) => {
  const { estimate, standard_error: error } = one as Estimate
  expect(Math.abs(estimate - value)).toBeLessThan(3.5 * error)
  expect(error).toBeLessThan(0.5)
}

describe('moved cutoffs', () => {
  it('are those that differ between periods', () => {
    const moves = results.outcomes[0].moved_cutoffs?.moves
    expect(moves?.map(({ line, from, to }) => [line, from, to])).toEqual([
      ['a: 2001 to 2002', 40, 60],
      ['b: 2001 to 2002', 60, 45],
    ])
  })

  it('take what jumped before out of what jumps after', () => {
    const [a, b] = results.outcomes[0].moved_cutoffs?.moves ?? []
    near(a.after, 3)
    near(a.before, 1)
    near(a.difference, 2)
    near(b.after, 2)
    near(b.before, 0)
    near(b.difference, 2)
    near(a.old_cutoff, 0)
    near(b.old_cutoff, 0)
    const { difference, old_cutoff: old } = results.outcomes[0].moved_cutoffs?.pooled ?? {}
    near(difference, 2)
    near(old, 0)
  })

  it('add the variances of two estimates without a unit in common', () => {
    for (const { after, before, difference } of results.outcomes[0].moved_cutoffs?.moves ?? []) {
      const [a, b, d] = [after, before, difference].map((one) => (one as Estimate).standard_error)
      expect(Math.hypot(a, b) / d).toBeCloseTo(1, 10)
    }
  })

  it('have the jump after the move that the line itself has', () => {
    const line = results.outcomes[0].lines.find((one) => one.line === 'a, 2002')
    const move = results.outcomes[0].moved_cutoffs?.moves[0]
    expect(move?.after).toEqual((line as unknown as { corrected: Estimate }).corrected)
  })
})
