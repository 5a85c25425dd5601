import type { ChildProcess } from 'node:child_process'
import { existsSync, readdirSync, readFileSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { bytesUnder, newRoom, scarp, scatter, scoreStudy, twoAtATime, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

interface Stop {
  readonly name: string
  readonly signal: NodeJS.Signals
  /** Milliseconds from the start, or from the first change in the folder of the study: it is then that results are written. */
  readonly after: number
  readonly from: 'start' | 'writing'
}

describe('a run that is stopped', () => {
  let milliseconds: number
  const run = (name: string, watch?: (child: ChildProcess) => () => void) =>
    scarp(['run', 'study.yaml', '--out', 'out', '--quiet'], { cwd: join(room, name), watch })

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
    const stops = Array.from({ length: 20 }, (_, i): Stop => {
      const from = i < 4 ? 'start' : 'writing'
      const after = from === 'start' ? milliseconds * random() : 40 * random() ** 2
      return { name: i % 2 === 0 ? 'a' : 'b', signal: i % 8 < 6 ? 'SIGKILL' : 'SIGTERM', after, from }
    })
    const files = Object.keys(bytesUnder(join(room, 'a', 'out')))
    let stopped = 0
    await twoAtATime(['a', 'b'], async (name) => {
      const folder = join(room, name)
      for (const stop of stops.filter((one) => one.name === name)) {
        const { code } = await run(name, (child) => stopAt(child, folder, stop))
        if (code === null) stopped++
        const usable = existsSync(join(folder, 'out')) ? join(folder, 'out') : asideOf(folder)
        expect(Object.keys(bytesUnder(usable))).toEqual(files)
        expect(JSON.parse(readFileSync(join(usable, 'results.json'), 'utf8')).format).toBe('scarp-results/1')
      }
    })
    expect(stopped).toBeGreaterThan(5)
  })

  it('is cleaned up after by the next one', async () => {
    for (const name of ['a', 'b']) {
      expect((await run(name)).code).toBe(0)
      expect(readdirSync(join(room, name)).sort()).toEqual(['households.csv', 'out', 'study.yaml'])
    }
  })

  it('cleans up after itself where it is asked to stop', async () => {
    const folder = join(room, 'a')
    for (const after of [0, 2, 5]) {
      await run('a', (child) => stopAt(child, folder, { name: 'a', signal: 'SIGTERM', after, from: 'writing' }))
      expect(readdirSync(folder).sort()).toEqual(['households.csv', 'out', 'study.yaml'])
    }
  })
})

function stopAt(child: ChildProcess, folder: string, { after, from, signal }: Stop): () => void {
  let timer: NodeJS.Timeout
  const stopLater = () => {
    timer = setTimeout(() => child.kill(signal), after)
  }
  if (from === 'start') {
    stopLater()
    return () => clearTimeout(timer)
  }
  // A folder that an earlier stop left is cleaned away first: what counts is a new name, or results that vanish.
  const before = new Set(readdirSync(folder))
  const poll = setInterval(() => {
    const now = readdirSync(folder)
    if (now.includes('out') && now.every((name) => before.has(name))) return
    clearInterval(poll)
    stopLater()
  }, 1)
  return () => {
    clearInterval(poll)
    clearTimeout(timer)
  }
}

/** Between two renames the earlier results stand under another name, from which the next run puts them back. */
function asideOf(folder: string): string {
  const aside = readdirSync(folder).find((name) => /^\.out-\d+-[0-9a-f]{8}\.earlier$/.test(name))
  return join(folder, aside!)
}
