import { mkdirSync, mkdtempSync, realpathSync, rmSync, symlinkSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { defaultOutFolder, outFolderProblems } from '../../src/cli/outFolder.js'

let room: string
let inputs: string[]
beforeEach(() => {
  room = realpathSync(mkdtempSync(join(tmpdir(), 'scarp-test-')))
  mkdirSync(join(room, 'city'))
  inputs = [join(room, 'city', 'study.yaml'), join(room, 'city', 'leases.csv')]
  for (const file of inputs) writeFileSync(file, 'x')
})
afterEach(() => rmSync(room, { recursive: true, force: true }))

const found = (out: string) => outFolderProblems(out, inputs).map((problem) => problem.found)

describe('defaultOutFolder', () => {
  it.each([
    ['boundaries/city/study.yaml', 'city-results'],
    ['boundaries/city/study.yml', 'city-results'],
    ['boundaries/city/study.json', 'city-results'],
    ['boundaries/city/levy.yaml', 'levy-results'],
    ['boundaries/city/levy.v2.yaml', 'levy.v2-results'],
  ])('%s goes to %s', (file, folder) => expect(defaultOutFolder(file)).toBe(folder))
})

describe('outFolderProblems', () => {
  it('takes a new folder, an empty one, and earlier results', () => {
    expect(found(join(room, 'new', 'deep'))).toEqual([])
    mkdirSync(join(room, 'empty'))
    expect(found(join(room, 'empty'))).toEqual([])
    mkdirSync(join(room, 'earlier'))
    writeFileSync(join(room, 'earlier', 'results.json'), '{\n  "format": "scarp-results/1",\n')
    writeFileSync(join(room, 'earlier', 'lines.csv'), '')
    expect(found(join(room, 'earlier'))).toEqual([])
    expect(found(join(room, 'city', 'inside'))).toEqual([])
  })

  it('refuses a folder that holds an input, by any name', () => {
    expect(found(join(room, 'city'))).toEqual(['it holds a file of the study (study.yaml)'])
    expect(found(room)).toEqual(['it holds a file of the study (study.yaml)'])
    symlinkSync(join(room, 'city'), join(room, 'alias'))
    expect(found(join(room, 'alias'))).toEqual(['it holds a file of the study (study.yaml)'])
    // A results folder is no better: the study would be deleted with it.
    writeFileSync(join(room, 'city', 'results.json'), '{"format": "scarp-results/1"}')
    expect(found(join(room, 'city'))).toEqual(['it holds a file of the study (study.yaml)'])
  })

  it('refuses the working directory, a file, and a folder with other files', () => {
    expect(found('.')).toEqual(['it is the working directory or a folder above it'])
    writeFileSync(join(room, 'file'), '')
    expect(found(join(room, 'file'))).toEqual(['it is a file'])
    expect(found(join(room, 'file', 'below'))).toEqual([`${join(room, 'file')} is a file`])
    mkdirSync(join(room, 'photos'))
    writeFileSync(join(room, 'photos', 'one.jpg'), '')
    expect(found(join(room, 'photos'))).toEqual(['it holds files, and not earlier results'])
    writeFileSync(join(room, 'photos', 'results.json'), '{"format": "something else"}')
    expect(found(join(room, 'photos'))).toEqual(['it holds files, and not earlier results'])
  })

  it('refuses earlier results beside which somebody keeps files of their own', () => {
    mkdirSync(join(room, 'earlier'))
    writeFileSync(join(room, 'earlier', 'results.json'), '{"format": "scarp-results/1"}')
    writeFileSync(join(room, 'earlier', 'notes.md'), 'mine')
    expect(found(join(room, 'earlier'))).toEqual(['beside earlier results it holds notes.md'])
  })
})
