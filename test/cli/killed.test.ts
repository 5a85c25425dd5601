import { existsSync, readdirSync, readFileSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { bytesUnder, newRoom, scarp, scatter, scoreStudy, twoAtATime, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

describe('a run that is stopped', () => {
  let milliseconds: number
  const run = (study: string, stop: { killAfter?: number; signal?: NodeJS.Signals } = {}) =>
    scarp(['run', 'study.yaml', '--out', 'out', '--quiet'], { cwd: join(room, study), ...stop })

  beforeAll(async () => {
    for (const name of ['a', 'b']) {
      writeFiles(join(room, name), scoreStudy())
      const begun = performance.now()
      expect((await run(name)).code).toBe(0)
      milliseconds = performance.now() - begun
    }
  })

  it('leaves results that are whole: the earlier ones, or its own', async () => {
    const random = scatter(7)
    const stops = Array.from({ length: 16 }, (_, i) => ({
      name: i % 2 === 0 ? 'a' : 'b',
      // Half of them in the last third, where the folder is written.
      killAfter: milliseconds * (i < 8 ? random() : 0.67 + 0.5 * random()),
      signal: (i % 4 < 2 ? 'SIGKILL' : 'SIGTERM') as NodeJS.Signals,
    }))
    const files = Object.keys(bytesUnder(join(room, 'a', 'out')))
    await twoAtATime(['a', 'b'], async (name) => {
      for (const stop of stops.filter((one) => one.name === name)) {
        await run(name, stop)
        const out = join(room, name, 'out')
        const usable = existsSync(out) ? out : asideOf(join(room, name))
        expect(Object.keys(bytesUnder(usable))).toEqual(files)
        expect(JSON.parse(readFileSync(join(usable, 'results.json'), 'utf8')).format).toBe('scarp-results/1')
      }
    })
  })

  it('is cleaned up after by the next one', async () => {
    for (const name of ['a', 'b']) {
      expect((await run(name)).code).toBe(0)
      expect(readdirSync(join(room, name)).sort()).toEqual(['households.csv', 'out', 'study.yaml'])
    }
  })
})

/** Between two renames the earlier results stand under another name, from which the next run puts them back. */
function asideOf(folder: string): string {
  const aside = readdirSync(folder).find((name) => /^\.out-\d+-[0-9a-f]{8}\.earlier$/.test(name))
  return join(folder, aside!)
}
