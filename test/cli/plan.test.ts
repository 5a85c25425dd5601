import { rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { planFromAssumptions } from '../../src/analyze.js'
import type { Plan } from '../../src/results.js'
import { readPlanAlone } from '../../src/study/index.js'
import { newRoom, scarp, scheduleStudy, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

type Planned = Extract<Plan['rows'][number], { units: number }>

async function planOf(file: string): Promise<Plan> {
  const said = await scarp(['plan', file, '--json'], { cwd: room })
  expect(said).toMatchObject({ code: 0, stderr: '' })
  return JSON.parse(said.stdout)
}

describe('scarp plan', () => {
  beforeAll(() => writeFiles(join(room, 'schools'), scheduleStudy()))

  it('takes standard errors from pilot records, by line and pooled', async () => {
    const plan = await planOf('schools/study.yaml')
    const said = await scarp(['run', 'schools/study.yaml', '--json', '--quiet'], { cwd: room })
    const [outcome] = JSON.parse(said.stdout).outcomes
    const [pooled, ...lines] = plan.rows as Planned[]
    expect(pooled.standard_error).toBe(outcome.pooled.corrected.standard_error)
    expect(lines.map((row) => row.standard_error)).toEqual(
      outcome.lines.map((line: { corrected: { standard_error: number } }) => line.corrected.standard_error),
    )
    // CHECKS: smallest detectable effect at 80%, 5% two-sided
    for (const row of plan.rows as Planned[])
      expect(row.smallest_detectable / row.standard_error).toBeCloseTo(2.801582, 6)
  })

  it('plans from assumptions alone with the design effects of Schochet 2009, table 4.2', () => {
    const variance = (assume: string) => {
      const alone = readPlanAlone(`plan: {effect: 0.2, assume: {units: 1000, ${assume}}}\n`, 'alone.yaml')
      if (!alone?.ok) throw new Error('not a plan')
      return (planFromAssumptions(alone.value).rows.at(-1) as Planned).standard_error ** 2
    }
    for (const [score, share, effect] of [
      ['normal', 0.5, 2.75],
      ['normal', 0.33, 2.46],
      ['normal', 0.1, 1.52],
      ['uniform', 0.25, 2.29],
    ] as const) {
      const atRandom = 1 / (1000 * share * (1 - share))
      const planned = variance(`score: ${score}, share_treated: ${share}`)
      expect(Math.abs(planned / atRandom - effect), `${score} ${share}`).toBeLessThan(0.006)
      const explained = variance(`score: ${score}, share_treated: ${share}, r_squared: 0.5`)
      expect(explained / planned).toBeCloseTo(0.5, 10)
      const clustered = variance(
        `score: ${score}, share_treated: ${share}, intraclass_correlation: 0.1, cluster_size: 11`,
      )
      expect(clustered / planned).toBeCloseTo(2, 10)
      expect(variance(`score: ${score}, share_treated: ${share}, lines: 4`)).toBeCloseTo(planned, 12)
    }
  })

  it('says how many units an effect needs, and draws the power curve', async () => {
    writeFileSync(
      join(room, 'alone.yaml'),
      'plan: {effect: 0.1, power: 0.9, assume: {units: 2000, bandwidth: 0.5, lines: 20}}\n',
    )
    const plan = await planOf('alone.yaml')
    const [pooled, one] = plan.rows as Planned[]
    expect(pooled.units).toBe(40_000)
    expect(one.standard_error / pooled.standard_error).toBeCloseTo(Math.sqrt(20), 10)
    expect(one.units_needed).toBe(pooled.units_needed)
    expect(pooled.curve.find(({ effect }) => Math.abs(effect - pooled.smallest_detectable) < 1e-12)?.power).toBeCloseTo(
      0.9,
      10,
    )
    const said = await scarp(['plan', 'alone.yaml'], { cwd: room })
    expect(said.stdout).toContain('20 lines pooled')
    expect(said.stdout).toContain('power by size of effect')
  })

  it('refuses assumptions that are none', async () => {
    writeFileSync(join(room, 'bad.yaml'), 'plan:\n  assume: {units: 0, share_treated: 2}\n  wish: 1\n')
    const said = await scarp(['plan', 'bad.yaml'], { cwd: room })
    expect(said.code).toBe(2)
    expect(said.stderr).toContain('bad.yaml:2: plan.assume.units: must be a whole number, 1 or more: got 0')
    expect(said.stderr).toContain('bad.yaml:2: plan.assume.share_treated: must lie between 0 and 1: got 2')
    expect(said.stderr).toContain('bad.yaml:3: plan.wish: not a known key')
  })
})
