/** Variants through the command line: each has the numbers of a study written that way. */
import { cpSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Jump, Results } from '../../src/results.js'
import { newRoom, scarp, scheduleStudy, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))
const study = readFileSync('boundaries/quillhaven/study.yaml', 'utf8').replace('checks: standard', 'checks: none')

async function run(folder: string, name: string, text: string): Promise<Results> {
  writeFileSync(join(room, folder, `${name}.yaml`), text)
  const said = await scarp(['run', `${folder}/${name}.yaml`, '--out', `${folder}-${name}`, '--quiet'], { cwd: room })
  expect(said).toEqual({ code: 0, stdout: '', stderr: '' })
  return JSON.parse(readFileSync(join(room, `${folder}-${name}`, 'results.json'), 'utf8'))
}

describe('variants of a border study', () => {
  let results: Results
  beforeAll(async () => {
    cpSync('boundaries/quillhaven', join(room, 'town'), { recursive: true })
    const leases = readFileSync('boundaries/quillhaven/leases.csv', 'utf8').split('\n')
    writeFileSync(join(room, 'town', 'leases.csv'), `${leases.slice(0, 8001).join('\n')}\n`)
    const variants = `variants:
  half bandwidth: {estimation: {bandwidth: {scale: 0.5}}}
  rivers allowed: {line: {barriers: []}}
  squares: {estimation: {order: 2, variance: hc3}}
  later leases: {records: {keep: "signed_year >= 2020"}}
  no clusters: {records: {cluster: null}}
`
    results = await run('town', 'varied', study + variants)
  })

  const pooledOf = (name: string, of = results) =>
    of.outcomes[0].variants?.find(({ variant }) => variant === name)?.pooled as Jump

  it('have the numbers of studies written that way', async () => {
    expect(results.outcomes[0].variants).toHaveLength(6)
    const main = results.outcomes[0].pooled as Jump
    const half = `estimation: {bandwidth: {main: ${main.bandwidth.treated / 2}, bias: ${main.bias_bandwidth.treated / 2}}}\n`
    const alone: Record<string, string> = {
      'half bandwidth': study + half,
      'rivers allowed': study.replace(/ {2}barriers:\n.*\n.*\n/, ''),
      squares: `${study}estimation: {order: 2, variance: hc3}\n`,
      'later leases': study.replace(/keep: .*/, 'keep: "signed_year >= 2020"'),
      'no clusters': study.replace(/ {2}cluster: block\n/, ''),
    }
    for (const [name, text] of Object.entries(alone)) {
      const other = await run('town', name.replace(' ', '-'), text)
      const { lines: _, ...own } = { lines: 0, ...other.outcomes[0].pooled } as Jump & { lines: number }
      expect(pooledOf(name), name).toEqual(own)
      const beside = results.outcomes[0].variants?.find(({ variant }) => variant === name)
      // half the bandwidth of each line is not half the pooled one, so that the target differs
      if (name !== 'half bandwidth') expect(beside?.target, name).toEqual(other.outcomes[0].target)
    }
  })

  it('stand beside the study with the difference from it, and its standard error where units or clusters are shared', () => {
    const main = results.outcomes[0].pooled as Jump
    for (const { pooled, difference } of results.outcomes[0].variants ?? []) {
      expect(difference?.estimate).toBe((pooled as Jump).corrected.estimate - main.corrected.estimate)
    }
    const difference = (name: string) =>
      results.outcomes[0].variants?.find(({ variant }) => variant === name)?.difference
    const own = (name: string) => pooledOf(name).corrected.standard_error
    // the two runs share most units: they differ by less than two independent ones would
    const independent = Math.hypot(own('rivers allowed'), main.corrected.standard_error)
    expect(difference('rivers allowed')?.standard_error).toBeGreaterThan(0)
    expect(difference('rivers allowed')?.standard_error).toBeLessThan(0.6 * independent)
    expect(difference('later leases')).toMatchObject({ standard_error: null })
    expect(difference('no clusters')).toMatchObject({ standard_error: null })
  })

  it('are in the report, its tables and the resolved study', () => {
    const page = readFileSync(join(room, 'town-varied', 'report.html'), 'utf8')
    expect(page).toContain('the study run otherwise')
    expect(readFileSync(join(room, 'town-varied', 'tables', 'variants-log_rent.md'), 'utf8')).toContain(
      'rivers allowed',
    )
    expect(readFileSync(join(room, 'town-varied', 'study.resolved.yaml'), 'utf8')).toMatch(
      /\n {2}half bandwidth:\n {4}estimation:\n {6}bandwidth:\n {8}scale: 0\.5\n/,
    )
  })
})

describe('variants of a study with a schedule', () => {
  it('may read another schedule', async () => {
    const files = scheduleStudy()
    writeFiles(join(room, 'schools'), { ...files, 'moved.csv': files['cutoffs.csv'].replace(',40', ',41') })
    const variants = `variants:
  moved: {line: {cutoff: {schedule: moved.csv, by: [year, region], value: cutoff}}}
`
    const varied = await run('schools', 'varied', files['study.yaml'] + variants)
    const alone = await run('schools', 'alone', files['study.yaml'].replace('cutoffs.csv', 'moved.csv'))
    expect(varied.outcomes[0].variants?.[0].pooled).toEqual(alone.outcomes[0].pooled)
    expect(varied.outcomes[0].variants?.[0].pooled).not.toEqual(varied.outcomes[0].pooled)
  })
})
