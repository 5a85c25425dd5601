/** Effects between the cutoffs of two lines that a study names. */
import { readFileSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, describe, expect, it } from 'vitest'
import { seededRandom } from '../../src/math/index.js'
import type { Results } from '../../src/results.js'
import { newRoom, scarp, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

async function run(treated: string, names: string): Promise<Results> {
  const random = seededRandom(8)
  const isUp = treated === 'at-or-above'
  const rows = Array.from({ length: 6000 }, (_, i) => {
    const [site, cutoff] = i % 2 ? ['south', 40] : ['north', 70]
    const score = 100 * random.next()
    const isTreated = isUp ? score >= cutoff : score < cutoff
    const y = (site === 'south' ? 1 : 0) + score / 50 + (isTreated ? 2 : 0) + 0.5 * random.normal()
    return `${site},${cutoff},${score.toFixed(4)},${y.toFixed(4)}`
  })
  writeFiles(join(room, 'away'), {
    'study.yaml': `records: {file: r.csv}
outcomes: [y]
line: {score: score, cutoff: {column: cutoff}, treated: ${treated}, compare_by: site}
away_from_line: ${names}
checks: none
`,
    'r.csv': `site,cutoff,score,y\n${rows.join('\n')}\n`,
  })
  const said = await scarp(['run', 'away/study.yaml', '--out', 'out', '--json'], { cwd: room })
  expect(said).toMatchObject({ code: 0, stderr: '' })
  return JSON.parse(said.stdout)
}

describe('away from the line', () => {
  it.each([
    ['at-or-above', '{low: south, high: north}'],
    ['below', '{low: north, high: south}'],
  ])('finds the effect of 2 between the cutoffs, treated %s', async (treated, names) => {
    const { outcomes } = await run(treated, names)
    const away = outcomes[0].away_from_line
    if (!away || 'not_estimated' in away) throw new Error('no estimate')
    expect(away.points).toHaveLength(9)
    for (const { score, estimate, standard_error: error } of away.points) {
      expect(score).toBeGreaterThan(40)
      expect(score).toBeLessThan(70)
      expect(Math.abs(estimate - 2)).toBeLessThan(4 * error)
      expect(error).toBeLessThan(0.3)
    }
    expect(away.parallel?.p).toBeGreaterThan(0.01)
    expect(readFileSync(join(room, 'out', 'tables', 'away-y.md'), 'utf8')).toContain('between the cutoffs of')
  })

  it('says why there is none', async () => {
    const { outcomes } = await run('at-or-above', '{low: north, high: south}')
    expect(outcomes[0].away_from_line).toMatchObject({ not_estimated: expect.stringContaining('treats more') })
  })
})
