/** Helpers of the records tests: files in a folder of their own, and short ways to ask for columns. */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll } from 'vitest'
import { problemText } from '../../src/problem.js'
import { type ReadOptions, readTable } from '../../src/records/files.js'
import { numbersOf, type Table, type WantedColumn } from '../../src/records/index.js'

export function numbers(...names: string[]): WantedColumn[] {
  return names.map((name) => ({ name, kind: 'number', askedBy: 'outcomes[0]' }))
}

export function labels(...names: string[]): WantedColumn[] {
  return names.map((name) => ({ name, kind: 'label', askedBy: 'records.id' }))
}

/** A folder for one test file, removed at its end. */
export function testFolder() {
  const folder = mkdtempSync(join(tmpdir(), 'records-'))
  afterAll(() => rmSync(folder, { recursive: true }))
  const path = (name: string) => join(folder, name)
  const write = (name: string, content: string | Uint8Array) => {
    writeFileSync(path(name), content)
    return path(name)
  }
  /** Writes a file and reads it back under its own name. */
  const read = (name: string, content: string | Uint8Array, options: Omit<ReadOptions, 'shownAs'>) =>
    readTable(write(name, content), { shownAs: name, ...options })
  const table = async (name: string, content: string | Uint8Array, options: Omit<ReadOptions, 'shownAs'>) => {
    const checked = await read(name, content, options)
    if (!checked.ok) throw new Error(checked.problems.map(problemText).join('\n'))
    return checked.value
  }
  const problems = async (name: string, content: string | Uint8Array, options: Omit<ReadOptions, 'shownAs'>) => {
    const checked = await read(name, content, options)
    return checked.ok ? [] : checked.problems.map(problemText)
  }
  return { folder, path, write, table, problems }
}

/** Texts of a label column, row by row; null where missing. */
export function textsOf(table: Table, name: string): (string | null)[] {
  const column = table.columns.get(name)
  if (column?.kind !== 'label') throw new Error(`${name} is no label column`)
  return Array.from(column.codes, (code) => (code < 0 ? null : column.labels[code]))
}

export function valuesOf(table: Table, name: string): number[] {
  return [...numbersOf(table, name)]
}
