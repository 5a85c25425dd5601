/** Covariates through the command line: one line, several, and what the report says of them. */
import { readFileSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { seededRandom } from '../../src/math/index.js'
import type { Jump, Results } from '../../src/results.js'
import { newRoom, scarp, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

const rows: string[] = []
beforeAll(() => {
  const random = seededRandom(17)
  for (let i = 0; i < 3000; i++) {
    const score = 100 * random.next()
    const age = random.normal()
    const site = i % 3
    const y = score / 50 + (score >= 50 ? 1 : 0) + 2 * age + site + 0.5 * random.normal()
    rows.push(`s${site},${score.toFixed(4)},${i % 100 ? age.toFixed(4) : ''},1,${y.toFixed(4)}`)
  }
})

async function run(name: string, line: string, more = ''): Promise<Results> {
  writeFiles(join(room, name), {
    'study.yaml': `records: {file: r.csv}\noutcomes: [y]\nline: ${line}\nchecks: none\n${more}`,
    'r.csv': `site,score,age,one,y\n${rows.join('\n')}\n`,
  })
  const said = await scarp(['run', `${name}/study.yaml`, '--out', `${name}-out`, '--json'], { cwd: room })
  expect(said).toMatchObject({ code: 0, stderr: '' })
  return JSON.parse(said.stdout)
}

const one = '{score: score, cutoff: 50, treated: at-or-above}'
const several = '{score: score, cutoff: 50, treated: at-or-above, compare_by: site}'

describe('covariates of a study', () => {
  it.each([
    ['one line', one],
    ['several lines', several],
  ])('tighten the estimate of %s, and say by how much', async (name, line) => {
    const file = name.replace(' ', '-')
    const results = await run(file, line, 'covariates: [age, one]\n')
    const plain = await run(`${file}-plain`, line)
    const { corrected, covariates } = results.outcomes[0].pooled as Jump
    const without = (plain.outcomes[0].pooled as Jump).corrected
    expect(covariates?.coefficients.age).toBeCloseTo(2, 1)
    expect(covariates?.left_out).toEqual(['one'])
    expect(corrected.standard_error).toBeLessThan(0.5 * without.standard_error)
    expect(Math.abs(corrected.estimate - 1)).toBeLessThan(4 * corrected.standard_error)
    expect(covariates?.standard_error_ratio).toBeLessThan(0.5)
    const ledger = results.ledger.find(({ step }) => step === 'y: outcome present')
    expect(ledger?.reasons).toEqual({ 'covariate or take-up missing': 30 })
    for (const made of results.outcomes[0].lines)
      expect((made as unknown as Jump).covariates?.left_out).toEqual(['one'])
    const table = readFileSync(join(room, `${file}-out`, 'tables', 'pooled.md'), 'utf8')
    expect(table).toContain('Covariates: age (one left out: constant, or a sum of others)')
  })
})
