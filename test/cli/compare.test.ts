/** Results folders compared on the command line: pairs of real runs that differ in one thing. */
import { cpSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Jump, Results } from '../../src/results.js'
import { newRoom, scarp, scheduleStudy, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

const results = (name: string): Results => JSON.parse(readFileSync(join(room, name, 'results.json'), 'utf8'))
const pooled = (name: string) => results(name).outcomes[0].pooled as Jump

async function run(name: string, change: (files: Record<string, string>) => Record<string, string> = (same) => same) {
  writeFiles(join(room, `${name}-study`), change(scheduleStudy() as Record<string, string>))
  const said = await scarp(['run', `${name}-study/study.yaml`, '--out', name, '--quiet'], { cwd: room })
  expect(said.stderr).toBe('')
}

const compare = (...words: string[]) => scarp(['compare', ...words], { cwd: room })

async function compared(first: string, second: string) {
  const said = await compare(first, second, '--json')
  expect(said).toMatchObject({ code: 0, stderr: '' })
  return JSON.parse(said.stdout)
}

beforeAll(async () => {
  await Promise.all([
    run('once'),
    run('again'),
    run('narrow', (files) => ({ ...files, 'study.yaml': `${files['study.yaml']}estimation: {bandwidth: 20}\n` })),
    run('mended', (files) => ({ ...files, 'pupils.csv': files['pupils.csv'].replace(/(\d)\n/, '$11\n') })),
    run('longer', (files) => ({
      ...files,
      'pupils.csv': `${files['pupils.csv']}${files['pupils.csv'].split('\n').slice(1).join('\n').replaceAll('2001', '2003')}`,
      'cutoffs.csv': `${files['cutoffs.csv']}2003,north,40\n2003,south,999\n`,
    })),
  ])
})

describe('scarp compare', () => {
  it('finds nothing between two runs of one study', async () => {
    const said = await compare('once', 'again')
    expect(said).toMatchObject({ code: 0, stderr: '' })
    expect(said.stdout).toMatch(
      /^the runs agree in options, inputs and version\nnothing moved: [\d,]+ numbers are equal to the last bit\n$/,
    )
  })

  it('names the bandwidth, and what moved with it', async () => {
    const found = await compared('once', 'narrow')
    expect(found.differs).toEqual([{ key: 'estimation.bandwidth', first: 'mse', second: '20' }])
    const [before, after] = [pooled('once').corrected, pooled('narrow').corrected]
    const row = found.moved.find(
      ({ number }: { number: string }) => number === 'outcomes[wage].pooled.corrected.estimate',
    )
    const difference = after.estimate - before.estimate
    expect(row).toEqual({
      number: 'outcomes[wage].pooled.corrected.estimate',
      main: true,
      first: before.estimate,
      second: after.estimate,
      difference,
      standard_error: before.standard_error,
      in_standard_errors: difference / before.standard_error,
    })
    const { stdout } = await compare('once', 'narrow')
    expect(stdout).toMatch(/^what differs between the runs\n.*\n {2}estimation\.bandwidth {2}mse {4}20\n/)
    expect(stdout).toMatch(/\n {2}wage: pooled corrected estimate {2}/)
    expect(stdout).not.toMatch(/pooled bandwidth/)
    expect((await compare('once', 'narrow', '--all')).stdout).toMatch(/\n {2}wage: pooled bandwidth untreated {2}/)
  })

  it('names the records that changed', async () => {
    const found = await compared('once', 'mended')
    const [before, after] = [results('once').inputs[0], results('mended').inputs[0]]
    expect(found.differs).toEqual([
      {
        key: 'input pupils.csv',
        first: `sha256 ${before.sha256}, 800 rows`,
        second: `sha256 ${after.sha256}, 800 rows`,
      },
    ])
    expect(before.sha256).not.toBe(after.sha256)
    expect(found.moved.length).toBeGreaterThan(0)
  })

  it('tells lines that are new, and what they have no estimate for', async () => {
    const found = await compared('once', 'longer')
    expect(found.lines).toEqual({ appeared: ['2003, north', '2003, south'], disappeared: [] })
    const lost = await compared('longer', 'once')
    expect(lost.lines).toEqual({ appeared: [], disappeared: ['2003, north', '2003, south'] })
    expect(found.differs.map(({ key }: { key: string }) => key)).toEqual(['input pupils.csv', 'input cutoffs.csv'])
  })

  it('names another version, and says where the folders explain nothing', async () => {
    cpSync(join(room, 'once'), join(room, 'later'), { recursive: true })
    const text = readFileSync(join(room, 'once', 'results.json'), 'utf8')
    writeFileSync(join(room, 'later', 'results.json'), text.replace(/"version": "[^"]*"/, '"version": "9.9.9"'))
    const { version } = results('once')
    expect((await compared('once', 'later')).differs).toEqual([{ key: 'version', first: version, second: '9.9.9' }])
    expect((await compare('once', 'later')).stdout).toMatch(/\nnothing moved: /)
    const { estimate } = pooled('once').corrected
    writeFileSync(
      join(room, 'later', 'results.json'),
      text.replace(`"estimate": ${estimate}`, `"estimate": ${estimate + 1}`),
    )
    expect((await compare('once', 'later')).stdout).toMatch(
      /^the runs agree .*: what moved the numbers is not in these/,
    )
  })

  it.each([
    ['a folder that is not there', 'nowhere', /^nowhere: results folder: there is no such folder; .*\n$/],
    ['a file', 'once-study/study.yaml', /^once-study\/study\.yaml: results folder: it is a file; .*\n$/],
    [
      'a folder of something else',
      'once-study',
      /^once-study\/results\.json: results: there is no such file; .*\nonce-study\/study\.resolved\.yaml: options: there is no such file; .*\n$/,
    ],
  ])('refuses %s', async (_, name, message) => {
    const said = await compare('once', name)
    expect(said).toMatchObject({ code: 2, stdout: '' })
    expect(said.stderr).toMatch(message)
  })

  it.each([
    ['results.json', '{"format": "scarp-results/1", "outcomes": 3}', /not the results of this program/],
    ['results.json', '{"format": ', /results\.json:1: results: not JSON at column 12/],
    ['study.resolved.yaml', 'title: [\n', /study\.resolved\.yaml:\d+: options: /],
  ])('refuses a %s that holds %j', async (file, text, message) => {
    cpSync(join(room, 'once'), join(room, 'broken'), { recursive: true })
    writeFileSync(join(room, 'broken', file), text)
    const said = await compare('broken', 'once')
    expect(said).toMatchObject({ code: 2, stdout: '' })
    expect(said.stderr).toMatch(message)
  })
})
