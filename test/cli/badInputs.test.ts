import { mkdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { parse } from 'yaml'
import {
  borderStudy,
  bytesUnder,
  type Files,
  newRoom,
  type Said,
  scarp,
  scheduleStudy,
  scoreStudy,
  twoAtATime,
  writeFiles,
} from './studies.js'

interface Change {
  readonly file: string
  readonly replace?: string
  readonly with?: string
  readonly text?: string
  readonly base64?: string
  readonly remove?: true
  readonly folder?: true
}

interface Case {
  readonly name: string
  readonly study: 'score' | 'schedule' | 'border'
  readonly change?: readonly Change[]
  readonly words?: readonly string[]
  readonly says: string | readonly string[]
}

const cases: readonly Case[] = parse(readFileSync(new URL('badInputs/cases.yaml', import.meta.url), 'utf8'))
const studies = { score: scoreStudy(), schedule: scheduleStudy(), border: borderStudy() }
/** What every line on standard error looks like: what it is about, what was found, what to do. */
const problemLine = /^(\S.*: .+; .+|and \d+ more problems?)$/

function change(folder: string, files: Files, { file, ...how }: Change): void {
  const path = join(folder, file)
  mkdirSync(dirname(path), { recursive: true })
  if (how.replace !== undefined) {
    const text = readFileSync(path, 'utf8')
    if (!text.includes(how.replace)) throw new Error(`${file} has no ${JSON.stringify(how.replace)}`)
    writeFileSync(
      path,
      text.replace(how.replace, () => how.with ?? ''),
    )
    return
  }
  if (files[file] !== undefined) rmSync(path)
  if (how.folder) mkdirSync(path)
  if (how.text !== undefined) writeFileSync(path, how.text)
  if (how.base64 !== undefined) writeFileSync(path, Buffer.from(how.base64, 'base64'))
}

interface Outcome {
  readonly said: Said
  readonly before: Record<string, string>
  readonly after: Record<string, string>
}

describe('bad input', () => {
  const room = newRoom()
  const outcomes = new Map<string, Outcome>()
  const good = new Map<string, Said>()
  const earlier = '{\n  "format": "scarp-results/1",\n  "title": "earlier"\n}\n'

  beforeAll(async () => {
    await twoAtATime(Object.entries(studies), async ([name, files]) => {
      const folder = join(room, `good ${name}`)
      writeFiles(folder, files)
      good.set(name, await scarp(['run', 'study.yaml', '--out', 'out'], { cwd: folder }))
    })
    await twoAtATime(cases, async ({ name, study, change: changes = [], words }) => {
      const folder = join(room, name)
      writeFiles(folder, studies[study])
      for (const one of changes) change(folder, studies[study], one)
      writeFiles(join(folder, 'out'), { 'results.json': earlier, 'lines.csv': 'line\n' })
      const before = bytesUnder(folder)
      const said = await scarp(words ?? ['run', 'study.yaml', '--out', 'out'], { cwd: folder })
      outcomes.set(name, { said, before, after: bytesUnder(folder) })
    })
  }, 600_000)
  afterAll(() => rmSync(room, { recursive: true, force: true }))

  it('is of at least thirty kinds, each with a name of its own', () => {
    expect(new Set(cases.map(({ name }) => name)).size).toBe(cases.length)
    expect(cases.length).toBeGreaterThanOrEqual(30)
  })

  it.each(Object.keys(studies))('is what is wrong, and not the %s study itself', (name) => {
    expect(good.get(name)).toMatchObject({ code: 0, stderr: '' })
  })

  it.each(cases)('is refused: $name', ({ name, says }) => {
    const { said, before, after } = outcomes.get(name)!
    const lines = said.stderr.trimEnd().split('\n')
    for (const expected of [says].flat()) expect(said.stderr).toMatch(new RegExp(expected, 'm'))
    for (const line of lines) expect(line).toMatch(problemLine)
    expect(lines.length).toBeLessThanOrEqual(21)
    expect(said.stderr).not.toMatch(/\n\s+at |node:internal|\.js:\d+|node_modules/)
    expect(said.stdout).toBe('')
    expect(said.code).toBe(2)
    expect(after).toEqual(before)
  })
})
