/**
 * What README.md tells a reader to type is run: every `npx scarp …` in a fence that begins with ```sh run.
 * A fence ```text output straight after it is what the command prints; times may differ.
 */
import { readFileSync, rmSync, symlinkSync } from 'node:fs'
import { join, resolve } from 'node:path'
import { afterAll, describe, expect, it } from 'vitest'
import { newRoom, scarp } from './studies.js'

const room = newRoom()
symlinkSync(resolve('boundaries'), join(room, 'boundaries'))
afterAll(() => rmSync(room, { recursive: true, force: true }))

interface Example {
  readonly words: string[]
  readonly output?: string
}

function examplesOf(readme: string): Example[] {
  const fences = [...readme.matchAll(/^```(\S+(?: \S+)*)\n([\s\S]*?)^```$/gm)]
  return fences.flatMap((fence, i) => {
    if (fence[1] !== 'sh run') return []
    const commands = fence[2].split('\n').flatMap((line) => line.split('&&').map((part) => part.trim()))
    const own = commands.filter((command) => command.startsWith('npx scarp '))
    const output = fences[i + 1]?.[1] === 'text output' ? fences[i + 1][2] : undefined
    return own.map((command, k) => ({
      words: command.split(/\s+/).slice(2),
      output: k === own.length - 1 ? output : undefined,
    }))
  })
}

const timeless = (text: string) => text.replace(/\d+(\.\d+)? (s|seconds)\b/g, '# s').trimEnd()

describe('README.md', () => {
  const examples = examplesOf(readFileSync('README.md', 'utf8'))

  it('shows commands', () => expect(examples.length).toBeGreaterThan(0))

  it.each(examples)('is right about scarp $words', async ({ words, output }) => {
    const said = await scarp(words, { cwd: room })
    expect(said).toMatchObject({ code: 0, stderr: '' })
    if (output !== undefined) expect(timeless(said.stdout)).toBe(timeless(output))
  })
})
