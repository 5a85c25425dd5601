/** Lines that share units: a ladder's steps share those between them, and rows of one id. */
import { readFileSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, describe, expect, it } from 'vitest'
import { newRoom, scarp, scatter, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

const random = scatter(9)
const scores = Array.from({ length: 900 }, () => Math.round(random() * 9000) / 100)
const rows = scores.map((score, i) => `p${i % 600},${score},${i % 2 ? 'a' : 'b'},${(score / 30 + random()).toFixed(4)}`)

async function run(name: string, line: string, records = '') {
  writeFiles(join(room, name), {
    'study.yaml': `records: {file: r.csv${records}}\noutcomes: [y]\nline: ${line}\nchecks: none\n`,
    'r.csv': `person,score,site,y\n${rows.join('\n')}\n`,
  })
  const said = await scarp(['run', `${name}/study.yaml`, '--out', `${name}-out`, '--json'], { cwd: room })
  expect(said).toMatchObject({ code: 0, stderr: '' })
  return JSON.parse(said.stdout)
}

describe('lines that share units', () => {
  it('are the neighbours of a ladder, by the units between them', async () => {
    const { shared_units: shared } = await run(
      'ladder',
      '{score: score, cutoff: {ladder: [20, 40, 70]}, treated: at-or-above}',
    )
    const between = (low: number, high: number) => scores.filter((score) => score >= low && score < high).length
    expect(shared).toEqual({
      by: 'unit',
      serving_several: between(20, 70),
      pairs: [
        { lines: ['40', '70'], count: between(40, 70) },
        { lines: ['20', '40'], count: between(20, 40) },
      ],
    })
    expect(readFileSync(join(room, 'ladder-out', 'tables', 'shared-units.md'), 'utf8')).toContain('share units')
  })

  it('are those at which one id has several rows', async () => {
    const line = '{score: score, cutoff: 50, treated: at-or-above, compare_by: site}'
    const { shared_units: shared } = await run('people', line, ', id: person')
    // rows i and i + 600 are one person, at the same site
    expect(shared).toBeUndefined()
    const moved = await run(
      'movers',
      '{score: score, cutoff: 50, treated: at-or-above, compare_by: site}',
      ', id: site',
    )
    expect(moved.shared_units).toBeUndefined()
    const across = await run('across', line, ', id: score')
    const sites = new Map<number, Set<number>>()
    for (const [i, score] of scores.entries()) sites.set(score, (sites.get(score) ?? new Set()).add(i % 2))
    const count = [...sites.values()].filter(({ size }) => size === 2).length
    expect(count).toBeGreaterThan(5)
    expect(across.shared_units).toMatchObject({ by: 'id', serving_several: count })
  })
})
