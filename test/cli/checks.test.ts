/** Checks through the command line: quiet on a sound study, loud where something is planted. */
import { readFileSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { benjaminiHochberg, holm } from '../../src/checks/index.js'
import { seededRandom } from '../../src/math/index.js'
import type { CheckResult, Jump, Results } from '../../src/results.js'
import { newRoom, scarp, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

const study = (checks: string, more = '') => `title: Grants in Marrowdale
records: {file: r.csv}
outcomes: [y]
line: {score: score, cutoff: 50, treated: at-or-above}
predetermined: [age, size]
checks: ${checks}
${more}`

type Change = (row: { score: number; y: number; age: number; size: number }, noise: () => number) => void

async function run(name: string, change: Change = () => {}, checks = 'standard', more = ''): Promise<Results> {
  const random = seededRandom(21)
  const rows = Array.from({ length: 3000 }, () => {
    const score = 100 * random.next()
    const row = {
      score,
      y: score / 50 + (score >= 50 ? 1 : 0) + random.normal(),
      age: 40 + score / 10 + 5 * random.normal(),
      size: 3 + random.normal(),
    }
    change(row, () => random.next())
    return [row.score.toFixed(5), Number.isNaN(row.y) ? '' : row.y.toFixed(5), row.age.toFixed(3), row.size.toFixed(3)]
  })
  const text = `score,y,age,size\n${rows.map((row) => row.join(',')).join('\n')}\n`
  writeFiles(join(room, name), { 'study.yaml': study(checks, more), 'r.csv': text })
  const said = await scarp(['run', `${name}/study.yaml`, '--out', `${name}-out`, '--json'], { cwd: room })
  expect(said).toMatchObject({ code: 0, stderr: '' })
  return JSON.parse(said.stdout)
}

const named = ({ outcomes }: Results, name: string): CheckResult[] =>
  outcomes[0].checks.filter(({ check }) => check === name)

describe('checks', () => {
  let clean: Results
  beforeAll(async () => {
    clean = await run('clean')
  })

  it('find nothing in a sound study', () => {
    const [outcome] = clean.outcomes
    expect(outcome.checks.length).toBeGreaterThan(10)
    expect(outcome.checks.filter(({ verdict }) => verdict !== 'fine')).toEqual([])
    expect(outcome.standards?.map(({ answer }) => answer)).not.toContain('not met')
  })

  it('have ladders in the results, the page and a table', () => {
    const { ladders } = clean.outcomes[0]
    expect(ladders?.bandwidth.map(({ scale }) => scale)).toEqual([0.5, 0.75, 1.25, 1.5, 2])
    expect(ladders?.placebo_lines).toHaveLength(6)
    const page = readFileSync(join(room, 'clean-out', 'report.html'), 'utf8')
    expect(page).toContain('the pooled estimate with one choice changed')
    expect(page).toContain('What Works Clearinghouse')
    expect(readFileSync(join(room, 'clean-out', 'tables', 'ladders-y.md'), 'utf8')).toContain('line that is none at')
  })

  it('have p-values adjusted for the tests of their kind, two ways', () => {
    const rows = named(clean, 'placebo line')
    const p = rows.map((row) => row.p as number)
    expect(rows.map((row) => row.p_holm)).toEqual(holm(p))
    expect(rows.map((row) => row.p_bh)).toEqual(benjaminiHochberg(p))
    const [head, ...lines] = readFileSync(join(room, 'clean-out', 'checks.csv'), 'utf8').split('\n')
    const at = head.split(',').indexOf('p_bh')
    const written = lines
      .filter((line) => line.startsWith('y,placebo line,'))
      .map((line) => Number(line.split(',')[at]))
    expect(written).toEqual(rows.map((row) => row.p_bh))
  })

  it('give a rung the numbers of a study run that way', async () => {
    const rung = clean.outcomes[0].ladders?.order_kernel.find(
      ({ order, kernel }) => order === 2 && kernel === 'triangular',
    )
    const alone = await run('squares', undefined, 'none', 'estimation: {order: 2}\n')
    expect(rung).toMatchObject({
      estimate: (alone.outcomes[0].pooled as { corrected: { estimate: number } }).corrected.estimate,
    })
  })

  it('find a predetermined column that jumps, alone and jointly', async () => {
    const results = await run('sorted', (row) => {
      if (row.score >= 50) row.age += 4
    })
    expect(named(results, 'balance of age')).toMatchObject([{ verdict: 'doubt' }])
    expect(named(results, 'balance of size')).toMatchObject([{ verdict: 'fine' }])
    expect(named(results, 'balance, joint')).toMatchObject([{ verdict: 'doubt' }])
    const answer = results.outcomes[0].standards?.find(
      ({ requirement }) => requirement === 'Nothing else jumps at the line',
    )
    expect(answer).toMatchObject({ answer: 'not met' })
  })

  it('find outcomes that are missing more on one side', async () => {
    const results = await run('lost', (row, noise) => {
      if (row.score >= 50 && noise() < 0.3) row.y = Number.NaN
    })
    expect(named(results, 'missing outcome')).toMatchObject([{ verdict: 'doubt' }])
  })

  it('find a jump where there is no line', async () => {
    const results = await run('elsewhere', (row) => {
      if (row.score >= 25) row.y += 2
    })
    expect(named(results, 'placebo line').filter(({ verdict }) => verdict === 'doubt').length).toBeGreaterThan(0)
  })

  it('find an effect that only those at the very line show', async () => {
    const results = await run('heaped', (row) => {
      if (Math.abs(row.score - 50) < 1.5) row.y += row.score >= 50 ? 3 : -3
    })
    const unsteady = [...named(results, 'donut'), ...named(results, 'bandwidth')].map(({ verdict }) => verdict)
    expect(unsteady).not.toEqual(['fine', 'fine'])
  })

  it('find scores rounded to fives, and a heap on the cutoff', async () => {
    const results = await run('rounded', (row, noise) => {
      row.score = noise() < 0.2 ? 5 * Math.round(row.score / 5) : Math.round(row.score * 2) / 2
      if (row.score >= 49 && row.score <= 51 && noise() < 0.7) row.score = 50
    })
    expect(named(results, 'heaping')).toMatchObject([{ verdict: 'doubt' }])
    expect(named(results, 'heaping')[0].says).toMatch(
      /steps of 0.5; multiples of 5 hold .* heaps are at 50 .* one lies on the cutoff/,
    )
  })

  it('count units at the values next to the line where the score has few', async () => {
    const coarse: Change = (row) => {
      row.score = 2 * Math.floor(row.score / 2)
    }
    const even = await run('coarse', coarse, 'full')
    expect(named(even, 'density')).toMatchObject([{ verdict: 'fine', says: expect.stringContaining('few values') }])
    const piled = await run('piled', (row, noise) => {
      coarse(row, noise)
      if (row.score === 48 && noise() < 0.5) row.score = 50
    })
    expect(named(piled, 'density')).toMatchObject([{ verdict: 'doubt' }])
  })

  it('go with the bias-aware interval where a score has eight values a side', async () => {
    const eighths: Change = (row) => {
      row.score = 6.25 * Math.floor(row.score / 6.25) + 3.125
    }
    const results = await run('eighths', eighths, 'none')
    const pooled = results.outcomes[0].pooled as Jump
    expect(pooled.quoted).toBe('bias-aware')
    expect(pooled.quoted_because).toMatch(/^only [2-8] distinct values within the bandwidth on the (un)?treated side$/)
    expect(pooled.notes?.[0]).toContain('go by the bias-aware interval')
    expect(pooled.bias_aware?.low).toBeLessThan(1)
    expect(pooled.bias_aware?.high).toBeGreaterThan(1)
    const page = readFileSync(join(room, 'eighths-out', 'report.html'), 'utf8')
    expect(page).toContain('fewer than 10 distinct distances lie within the bandwidth')
    const asked = await run('asked', eighths, 'none', 'estimation: {interval: corrected}\n')
    expect((asked.outcomes[0].pooled as Jump).quoted).toBe('corrected')
    expect((asked.outcomes[0].pooled as Jump).quoted_because).toBeUndefined()
    expect((asked.outcomes[0].pooled as Jump).notes?.[0]).toContain('the study goes by the corrected interval')
    const squares = await run('squared', eighths, 'none', 'estimation: {order: 2, bandwidth: 40}\n')
    expect((squares.outcomes[0].pooled as Jump).quoted).toBe('corrected')
    expect((squares.outcomes[0].pooled as Jump).notes?.[0]).toContain('a bias-aware one has not been made')
    const table = readFileSync(join(room, 'eighths-out', 'tables', 'pooled.md'), 'utf8')
    expect(table).toMatch(/pooled, bias-aware \(curvature up to .*\), quoted/)
    expect(page).toContain('At 1 cutoff fewer than 10 distinct distances')
    const [head, row] = readFileSync(join(room, 'eighths-out', 'lines.csv'), 'utf8').split('\n')
    expect(row.split(',')[head.split(',').indexOf('quoted')]).toBe('bias-aware')
    const said = await scarp(['run', 'eighths/study.yaml', '--out', 'eighths-again'], { cwd: room })
    expect(said.stdout).toMatch(/^ {2}pooled {2}.*, bias-aware: only [2-8] distinct values within the bandwidth/m)
  })

  it('are left out where the study says so, and are more in full', async () => {
    const none = await run('none', undefined, 'none')
    expect(none.outcomes[0].checks).toEqual([])
    expect(none.outcomes[0].ladders).toBeUndefined()
    const full = await run('full', undefined, 'full')
    expect(full.outcomes[0].ladders?.order_kernel).toHaveLength(11)
    expect(named(full, 'density, binned')).toMatchObject([{ verdict: 'fine' }])
    expect(named(full, 'window randomisation')).toMatchObject([
      { verdict: 'fine', says: expect.stringContaining('predetermined columns are balanced') },
    ])
    expect(named(full, 'window randomisation')[0].p).toBeLessThan(0.05)
  })
})
