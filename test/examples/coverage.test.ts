/** The example studies, run through the command line, cover the effects that their generators planted. */
import { cpSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join, resolve } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Jump, OutcomeResult, Results, Target } from '../../src/results.js'
import { newRoom, scarp } from '../cli/studies.js'
import { trueEffects as grantEffects } from './hedgerows/farms.js'
import { trueEffects as levyEffects } from './quillhaven/leases.js'
import { drawsFrom } from './random.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

async function run(example: string): Promise<Results> {
  const said = await scarp(['run', resolve('boundaries', example, 'study.yaml'), '--out', example, '--quiet'], {
    cwd: room,
  })
  expect(said).toEqual({ code: 0, stdout: '', stderr: '' })
  return JSON.parse(readFileSync(join(room, example, 'results.json'), 'utf8'))
}

const outcomeOf = (results: Results, name: string) =>
  results.outcomes.find(({ outcome }) => outcome === name) as OutcomeResult
const covers = ({ low, high }: { low: number; high: number }, truth: number) => low <= truth && truth <= high
const correctedOf = (line: OutcomeResult['lines'][number]) => (line as Jump).corrected

/** Of 20 to 24 independent 95% intervals fewer than 19 or 21 cover with probability below 0.02 (binomial). */
function expectMostCovered(intervals: readonly { low: number; high: number }[], truths: readonly number[]): void {
  const missed = intervals.filter((interval, i) => !covers(interval, truths[i])).length
  expect(missed).toBeLessThanOrEqual(4)
}

describe('Quillhaven: a levy border', () => {
  let results: Results
  beforeAll(async () => {
    results = await run('quillhaven')
  })
  it.each(['log_rent', 'vacant'] as const)('%s', (name) => {
    const outcome = outcomeOf(results, name)
    const truth = levyEffects[name]
    expect(covers((outcome.pooled as Jump).corrected, truth)).toBe(true)
    expect(covers(outcome.target as Extract<Target, { low: number }>, truth)).toBe(true)
    expectMostCovered(
      outcome.lines.map(correctedOf),
      outcome.lines.map(() => truth),
    )
  })
})

describe('Hedgerows: cutoffs by year and region', () => {
  let results: Results
  beforeAll(async () => {
    results = await run('hedgerows')
  })
  it('soil_kept, whose effect differs by line', () => {
    const outcome = outcomeOf(results, 'soil_kept')
    const truths = results.lines.map(({ cutoff, line }) => {
      const known = grantEffects.soil_kept.lines.find(({ year, region }) => line === `${year}, ${region}`)
      expect(known?.cutoff).toBe(cutoff)
      return (known as { effect: number }).effect
    })
    expectMostCovered(outcome.lines.map(correctedOf), truths)
    const weights = (outcome.pooled as { weights: Record<string, number> }).weights
    const pooledTruth = results.lines.reduce((sum, { line }, i) => sum + weights[line] * truths[i], 0)
    expect(covers((outcome.pooled as Jump).corrected, pooledTruth)).toBe(true)
    const equal = truths.reduce((sum, truth) => sum + truth / truths.length, 0)
    expect(covers(outcome.target as Extract<Target, { low: number }>, equal)).toBe(true)
    expect(
      covers(outcome.comparison?.random_effects as { low: number; high: number }, grantEffects.soil_kept.mean),
    ).toBe(true)
  })
  it('replanted, whose effect is the same everywhere', () => {
    const outcome = outcomeOf(results, 'replanted')
    expect(covers((outcome.pooled as Jump).corrected, grantEffects.replanted)).toBe(true)
    expectMostCovered(
      outcome.lines.map(correctedOf),
      outcome.lines.map(() => grantEffects.replanted),
    )
  })
  it('its ledger adds up, from rows read to units used', () => {
    for (const { step, in: unitsIn, out, reasons } of results.ledger) {
      expect([step, unitsIn - Object.values(reasons).reduce((a, b) => a + b, 0)]).toEqual([step, out])
    }
    const asides = Object.values(results.placement.set_aside).reduce((a, b) => a + b, 0)
    expect(results.placement.placed + asides).toBe(results.placement.kept)
  })
})

describe('the order of rows', () => {
  it.each(['quillhaven', 'hedgerows'])('changes not one digit of %s', async (example) => {
    cpSync(resolve('boundaries', example), join(room, 'shuffled', example), { recursive: true })
    const file = join(room, 'shuffled', example, example === 'quillhaven' ? 'leases.csv' : 'farms.csv')
    const [head, ...rows] = readFileSync(file, 'utf8').trimEnd().split('\n')
    const draws = drawsFrom(17)
    const keyed = rows.map((row) => ({ row, key: draws.uniform() })).sort((a, b) => a.key - b.key)
    writeFileSync(file, `${[head, ...keyed.map(({ row }) => row)].join('\n')}\n`)
    const said = await scarp(['run', `shuffled/${example}/study.yaml`, '--out', `${example}-again`, '--quiet'], {
      cwd: room,
    })
    expect(said).toEqual({ code: 0, stdout: '', stderr: '' })
    const read = (folder: string): Results => JSON.parse(readFileSync(join(room, folder, 'results.json'), 'utf8'))
    const [again, before] = [read(`${example}-again`), read(example)]
    expect(again.inputs[0].sha256).not.toBe(before.inputs[0].sha256)
    for (const key of ['lines', 'outcomes', 'ledger', 'border'] as const) {
      expect(JSON.stringify(again[key])).toBe(JSON.stringify(before[key]))
    }
  })
})
