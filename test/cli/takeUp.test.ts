/** Partial take-up through the command line: three sites whose take-up jumps by 0.7, 0.25 and 0. */
import { readFileSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { seededRandom } from '../../src/math/index.js'
import type { Jump, NotEstimated, Results } from '../../src/results.js'
import { readCsv } from '../report/reading.js'
import { newRoom, scarp, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))
const firstStage: Readonly<Record<string, number>> = { much: 0.7, some: 0.25, none: 0 }

let results: Results
beforeAll(async () => {
  const random = seededRandom(14)
  const rows: string[] = []
  for (const [site, jump] of Object.entries(firstStage)) {
    for (let i = 0; i < 1500; i++) {
      const score = 100 * random.next()
      const takes = random.next() < 0.1 + (score >= 50 ? jump : 0) ? 1 : 0
      const y = score / 50 + 2 * takes + 0.7 * random.normal()
      rows.push(`${site},${score.toFixed(4)},${i % 50 === 0 ? '' : takes},${y.toFixed(4)}`)
    }
  }
  writeFiles(join(room, 'sites'), {
    'study.yaml': `records: {file: r.csv}
outcomes: [y]
line: {score: score, cutoff: 50, treated: at-or-above, compare_by: site}
take_up: takes
estimation: {bandwidth: 30}
`,
    'r.csv': `site,score,takes,y\n${rows.join('\n')}\n`,
  })
  const said = await scarp(['run', 'sites/study.yaml', '--out', 'out', '--json'], { cwd: room })
  expect(said).toMatchObject({ code: 0, stderr: '' })
  results = JSON.parse(said.stdout)
})

describe('take-up', () => {
  const lineOf = (site: string) => results.outcomes[0].lines.find(({ line }) => line === site)

  it('gives the effect per unit of it, the first stage and the effect of eligibility', () => {
    const line = lineOf('much') as unknown as Jump
    const { estimate, standard_error: error } = line.corrected
    expect(Math.abs(estimate - 2)).toBeLessThan(3.5 * error)
    expect(line.take_up?.f).toBeGreaterThan(16)
    expect(line.take_up?.eligibility.corrected.estimate).toBeCloseTo(estimate * (line.take_up?.jump as number), 10)
    expect(line.take_up?.anderson_rubin).toHaveLength(1)
    expect(line.notes ?? []).toEqual([])
  })

  it('withholds the ratio where take-up does not jump, and keeps what needs no first stage', () => {
    const line = lineOf('none') as unknown as NotEstimated
    expect(line.not_estimated).toMatch(/^take-up jumps too little for a ratio: F = .*, under 4$/)
    expect(line.take_up?.anderson_rubin.flat()).toContain(null)
    expect(Math.abs(line.take_up?.eligibility.corrected.estimate as number)).toBeLessThan(0.6)
  })

  it('pools, warns and reports', () => {
    const { pooled, checks } = results.outcomes[0]
    const { corrected, take_up: takeUp } = pooled as Jump
    expect(Math.abs(corrected.estimate - 2)).toBeLessThan(3.5 * corrected.standard_error)
    expect(takeUp?.jump).toBeGreaterThan(0.2)
    expect(checks.filter(({ verdict }) => verdict === 'fail')).toEqual([])
    const ledger = results.ledger.find(({ step }) => step === 'y: outcome present')
    expect(ledger?.reasons).toEqual({ 'covariate or take-up missing': 90 })
    const table = readFileSync(join(room, 'out', 'tables', 'pooled.md'), 'utf8')
    expect(table.indexOf('jump in take-up')).toBeLessThan(table.indexOf('pooled per unit of take-up'))
  })

  it('is drawn first: binned take-up and its jump at every line, also where the ratio is withheld', () => {
    const read = (file: string) => readFileSync(join(room, 'out', file), 'utf8')
    const rows = readCsv(read('figures/y-take-up-lines.csv'))
    const jumps = [...results.outcomes[0].lines, results.outcomes[0].pooled].map((jump) => jump.take_up)
    expect(rows.map((row) => [Number(row.jump), Number(row.standard_error), Number(row.f)])).toEqual(
      jumps.map((stage) => [stage?.jump, stage?.standard_error, stage?.f]),
    )
    const bins = readCsv(read('figures/y-take-up.csv'))
    const treated = bins.filter(({ side }) => side === 'treated')
    for (const { y } of treated) expect(Math.abs(Number(y) - 0.42)).toBeLessThan(0.15)
    const page = read('report.html')
    expect(page.indexOf('id="figure-y-take-up-title"')).toBeLessThan(page.indexOf('id="figure-y-pooled-title"'))
    expect(page).toContain('Effect on y per unit of take-up')
  })
})
