/** The replication folders of both example studies: every exhibit again, byte for byte, with the records and without. */
import { cpSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join, resolve } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Jump, Results } from '../../src/results.js'
import { bytesUnder, newRoom, scarp, twoAtATime } from '../cli/studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

const rebuild = (folder: string, ...words: string[]) => scarp(['rebuild', folder, ...words], { cwd: room })
const text = (...path: string[]) => readFileSync(join(room, ...path), 'utf8')
const pooled = (...folder: string[]) =>
  (JSON.parse(text(...folder, 'results.json')) as Results).outcomes.map((outcome) => outcome.pooled as Jump)

describe.each(['quillhaven', 'hedgerows'])('the replication folder of %s', (name) => {
  const example = resolve('boundaries', name)
  const folder = `${name}-replication`
  let published: Record<string, string>

  beforeAll(async () => {
    // its own place, as on another machine: nothing of the example lies beside it
    const said = await scarp(['replicate', join(example, 'study.yaml')], { cwd: room })
    expect(said).toMatchObject({ code: 0, stderr: '' })
    expect(said.stdout).toMatch(/one for each unit, .* check it against the licence of the data/)
    published = bytesUnder(join(room, folder, 'results'))
    expect(Object.keys(published).length).toBeGreaterThan(50)
  })

  it('is made again byte for byte, with the records and without them', async () => {
    await twoAtATime([[], ['--inputs', example]], async (words) => {
      const out = `${name}-again-${words.length}`
      const said = await rebuild(folder, ...words, '--out', out)
      expect(said).toMatchObject({ code: 0, stderr: '' })
      expect(said.stdout).toMatch(/\nevery file is the published one, byte for byte: /)
      expect(said.stdout).toMatch(
        words.length > 0 ? /the inputs are those of the published run/ : /units\/units\.csv: /,
      )
      expect(bytesUnder(join(room, out))).toEqual(published)
    })
  })

  it('has units that give the estimates by themselves', async () => {
    cpSync(join(room, folder, 'units'), join(room, `${name}-alone`), { recursive: true })
    const study = text(`${name}-alone`, 'study.yaml').replace('checks: standard', 'checks: none')
    writeFileSync(join(room, `${name}-alone`, 'study.yaml'), study)
    const words = ['run', `${name}-alone/study.yaml`, '--out', `${name}-units`, '--quiet']
    expect(await scarp(words, { cwd: room })).toEqual({ code: 0, stdout: '', stderr: '' })
    pooled(`${name}-units`).forEach((jump, i) => {
      const { corrected } = pooled(folder, 'results')[i]
      // sums over clusters in another order: 1e-12 is some hundred roundings
      for (const key of ['estimate', 'standard_error', 'low', 'high'] as const)
        expect(Math.abs(jump.corrected[key] / corrected[key] - 1)).toBeLessThan(1e-12)
    })
  })

  it('says what a reader needs, and leaves to the author what only the author knows', () => {
    const readme = text(folder, 'README.md')
    const { inputs } = JSON.parse(text(folder, 'results', 'results.json')) as Results
    for (const { file, sha256 } of inputs) {
      expect(readme).toContain(`| \`${file}\` | `)
      expect(readme).toContain(`\`${sha256}\``)
    }
    for (const file of Object.keys(published)) expect(readme).toContain(`\`${file}\``)
    expect(readme).toContain(`Node.js ${process.version.slice(1)}`)
    expect(readme.match(/\*\*\[AUTHOR: /g)?.length).toBeGreaterThan(6)
    expect(text(folder, 'inputs', 'study.yaml')).toBe(readFileSync(join(example, 'study.yaml'), 'utf8'))
  })
})
