import { spawn } from 'node:child_process'
import {
  existsSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  symlinkSync,
  writeFileSync,
} from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { mendResultsFolder, writeResultsFolder } from '../../src/cli/resultsFolder.js'

let room: string
beforeEach(() => {
  room = mkdtempSync(join(tmpdir(), 'scarp-test-'))
})
afterEach(() => rmSync(room, { recursive: true, force: true }))

const put = (folder: string, text: string) => {
  mkdirSync(folder, { recursive: true })
  writeFileSync(join(folder, 'results.json'), text)
}
const read = (folder: string) => readFileSync(join(folder, 'results.json'), 'utf8')

/** The number of a process that has ended. */
async function deadPid(): Promise<number> {
  const child = spawn(process.execPath, ['-e', ''])
  await new Promise((done) => child.on('exit', done))
  return child.pid!
}

describe('writeResultsFolder', () => {
  it('writes parts and nested folders, makes parents, and leaves nothing beside', async () => {
    const target = join(room, 'a', 'b', 'out')
    await writeResultsFolder(target, async (write) => {
      await write('results.json', ['one ', 'two'])
      await write('tables/lines.md', ['|'])
    })
    expect(read(target)).toBe('one two')
    expect(readFileSync(join(target, 'tables', 'lines.md'), 'utf8')).toBe('|')
    expect(readdirSync(join(room, 'a', 'b'))).toEqual(['out'])
  })

  it('replaces earlier results as a whole', async () => {
    const target = join(room, 'out')
    put(target, 'old')
    writeFileSync(join(target, 'lines.csv'), 'old')
    await writeResultsFolder(target, (write) => write('results.json', ['new']))
    expect(readdirSync(target)).toEqual(['results.json'])
    expect(read(target)).toBe('new')
    expect(readdirSync(room)).toEqual(['out'])
  })

  it('leaves earlier results as they are when writing fails', async () => {
    const target = join(room, 'out')
    put(target, 'old')
    const failing = writeResultsFolder(target, async (write) => {
      await write('results.json', ['half'])
      throw new Error('the disk is full')
    })
    await expect(failing).rejects.toThrow('the disk is full')
    expect(read(target)).toBe('old')
    expect(readdirSync(room)).toEqual(['out'])
  })

  it('replaces the folder that a link points to, and keeps the link', async () => {
    const real = join(room, 'real')
    put(real, 'old')
    symlinkSync(real, join(room, 'link'))
    await writeResultsFolder(join(room, 'link'), (write) => write('results.json', ['new']))
    expect(read(real)).toBe('new')
    expect(readdirSync(room).sort()).toEqual(['link', 'real'])
  })
})

describe('mendResultsFolder', () => {
  it('puts back results that a killed process had moved aside', async () => {
    const pid = await deadPid()
    put(join(room, `.out-${pid}-0123abcd.earlier`), 'old')
    put(join(room, `.out-${pid}-0123abcd`), 'new')
    mendResultsFolder(join(room, 'out'))
    expect(read(join(room, 'out'))).toBe('old')
    expect(readdirSync(room)).toEqual(['out'])
  })

  it('deletes what was moved aside where new results are in place', async () => {
    put(join(room, 'out'), 'new')
    put(join(room, `.out-${await deadPid()}-0123abcd.earlier`), 'old')
    mendResultsFolder(join(room, 'out'))
    expect(read(join(room, 'out'))).toBe('new')
    expect(readdirSync(room)).toEqual(['out'])
  })

  it('leaves alone the folders of living processes, of other targets, and other names', async () => {
    const names = [`.out-${process.ppid}-0123abcd`, `.other-${await deadPid()}-0123abcd`, '.out-1-notours', '.out']
    for (const name of names) put(join(room, name), 'kept')
    mendResultsFolder(join(room, 'out'))
    expect(readdirSync(room).sort()).toEqual([...names].sort())
    expect(existsSync(join(room, 'out'))).toBe(false)
  })

  it('says nothing about a target whose parent is not there', () => {
    expect(() => mendResultsFolder(join(room, 'no', 'such', 'out'))).not.toThrow()
  })
})
