/** A schedule of 50 cutoffs, three of them wrong: the audit lists those three, and changes nothing. */
import { readFileSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, describe, expect, it } from 'vitest'
import { seededRandom } from '../../src/math/index.js'
import type { Results } from '../../src/results.js'
import { newRoom, scarp, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

const wrong: Readonly<Record<number, number>> = { 7: 8, 23: -6, 41: 10 }

async function run(name: string, isRight = false): Promise<Results> {
  const random = seededRandom(4)
  const rows: string[] = []
  for (let site = 0; site < 50; site++) {
    for (let i = 0; i < 800; i++) {
      const score = 100 * random.next()
      const cutoff = 40 + (site % 20)
      const real = cutoff + (isRight ? 0 : (wrong[site] ?? 0))
      const takes = random.next() < (score >= real ? 0.8 : 0.15) ? 1 : 0
      rows.push(`s${site},${score.toFixed(4)},${takes},${(score / 40 + 0.5 * takes + random.normal()).toFixed(4)}`)
    }
  }
  const cutoffs = Array.from({ length: 50 }, (_, site) => `s${site},${40 + (site % 20)}`)
  writeFiles(join(room, name), {
    'study.yaml': `records: {file: r.csv}
outcomes: [y]
line: {score: score, cutoff: {schedule: c.csv, by: site, value: cutoff}, treated: at-or-above}
audit: takes
checks: none
`,
    'r.csv': `site,score,takes,y\n${rows.join('\n')}\n`,
    'c.csv': `site,cutoff\n${cutoffs.join('\n')}\n`,
  })
  const said = await scarp(['run', `${name}/study.yaml`, '--out', `${name}-out`, '--json'], { cwd: room })
  expect(said).toMatchObject({ code: 0, stderr: '' })
  return JSON.parse(said.stdout)
}

describe('an audit of cutoffs', () => {
  it('lists the three that are wrong, and how far off they are', async () => {
    const { audit, lines } = await run('wrong')
    expect(audit).toMatchObject({ column: 'takes', audited: 50, not_possible: [] })
    expect(audit?.elsewhere.map(({ line }) => line).sort()).toEqual(['s23', 's41', 's7'])
    for (const { line, at, within } of audit?.elsewhere ?? []) {
      expect(Math.abs(at - wrong[Number(line.slice(1))])).toBeLessThan(3 * within + 1)
    }
    expect(lines.find(({ line }) => line === 's7')?.cutoff).toBe(47)
    expect(readFileSync(join(room, 'wrong-out', 'tables', 'audit.md'), 'utf8')).toContain('50 cutoffs audited')
  })

  it('lists none where all are right', async () => {
    expect((await run('right', true)).audit?.elsewhere).toEqual([])
  })
})
