/** Whole text files: the study and the GeoJSON layers. What can't be read becomes a problem, never an exception. */
import { createHash } from 'node:crypto'
import { readFile, stat } from 'node:fs/promises'
import type { Checked, Problem } from '../problem.js'
import { findJsonFault } from './jsonFault.js'

export interface TextFile {
  readonly text: string
  /** Of the bytes, hexadecimal. */
  readonly sha256: string
}

export interface Asked {
  /** The path as the user wrote it, for messages. */
  readonly shownAs: string
  /** What asks for the file: `study`, `line.zones`. */
  readonly askedBy: string
  readonly mostBytes: number
}

export async function readTextFile(path: string, asked: Asked): Promise<Checked<TextFile>> {
  const { shownAs, askedBy, mostBytes } = asked
  const refuse = (found: string, todo: string) => refused({ file: shownAs, what: askedBy, found, todo })
  let bytes: Uint8Array
  try {
    const facts = await stat(path)
    if (facts.isDirectory()) return refuse('this is a folder', 'give the file in it')
    if (facts.size > mostBytes) return refuse(tooLarge(facts.size, mostBytes), 'give a smaller file')
    bytes = await readFile(path)
  } catch (error) {
    const [found, todo] = unreadable(error, path)
    return refuse(found, todo)
  }
  if (bytes.length === 0) return refuse('the file is empty', 'check that it is the file you meant')
  if (bytes.length > mostBytes) return refuse(tooLarge(bytes.length, mostBytes), 'give a smaller file')
  try {
    const text = new TextDecoder('utf-8', { fatal: true }).decode(bytes)
    return { ok: true, value: { text, sha256: createHash('sha256').update(bytes).digest('hex') } }
  } catch {
    return refuse(notUtf8(bytes), 'save it as UTF-8')
  }
}

export interface JsonFile {
  readonly content: unknown
  readonly sha256: string
}

/** A text file read as JSON; a fault in it is named by line and column. */
export async function readJsonFile(path: string, asked: Asked): Promise<Checked<JsonFile>> {
  const file = await readTextFile(path, asked)
  if (!file.ok) return file
  const { text, sha256 } = file.value
  try {
    return { ok: true, value: { content: JSON.parse(text), sha256 } }
  } catch (error) {
    const fault = findJsonFault(text)
    if (fault === undefined) throw error
    return refused({
      file: asked.shownAs,
      line: fault.line,
      what: `${asked.askedBy}: not JSON at column ${fault.column}`,
      found: `expected ${fault.expected}, found ${fault.found}`,
      todo: 'write the layer again as GeoJSON from the program it came from',
    })
  }
}

function refused(problem: Problem): { ok: false; problems: Problem[] } {
  return { ok: false, problems: [problem] }
}

function unreadable(error: unknown, path: string): [found: string, todo: string] {
  const code = (error as { code?: string }).code
  if (code === 'ENOENT' || code === 'ENOTDIR')
    return ['there is no such file', 'check the path; in a study, paths are relative to the study file']
  if (code === 'EACCES' || code === 'EPERM') return ['the file may not be read', 'give yourself the right to read it']
  return [`the file can't be read (${code ?? (error as Error).message})`, `check ${path}`]
}

function tooLarge(size: number, most: number): string {
  const megabytes = (bytes: number) => (bytes / 1e6).toFixed(bytes < 1e7 ? 1 : 0)
  return `the file has ${megabytes(size)} MB, more than the ${megabytes(most)} MB this program reads`
}

/** Line of the first bytes that are not UTF-8, found by halving: decoding is whole or it throws. */
function notUtf8(bytes: Uint8Array): string {
  if ((bytes[0] === 0xff && bytes[1] === 0xfe) || (bytes[0] === 0xfe && bytes[1] === 0xff)) return 'the file is UTF-16'
  let good = 0
  let bad = bytes.length
  while (bad - good > 1) {
    const middle = (good + bad) >> 1
    try {
      new TextDecoder('utf-8', { fatal: true }).decode(bytes.subarray(0, middle), { stream: true })
      good = middle
    } catch {
      bad = middle
    }
  }
  let line = 1
  for (let i = 0; i < good; i++) if (bytes[i] === 10) line += 1
  return `line ${line} is not UTF-8`
}
