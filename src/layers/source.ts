/** Bytes of a layer and of the files that belong to it: in a folder, or within a zip. Nothing here throws for a bad file. */
import { createHash } from 'node:crypto'
import { readdir, readFile, stat } from 'node:fs/promises'
import { basename, dirname, join } from 'node:path'
import { unzipSync } from 'fflate'
import type { Checked, Problem } from '../problem.js'

/** More than this is not read at once. */
const mostBytes = 2_000_000_000

/** One file that was opened, and its neighbours by name. */
export interface FileSource {
  /** File name, without the folder. */
  readonly name: string
  readonly bytes: Uint8Array
  /** Names of the files beside it, itself included. */
  readonly neighbours: readonly string[]
  readonly read: (neighbour: string) => Promise<Uint8Array>
}

export interface Asked {
  /** The path as the user wrote it, for messages. */
  readonly shownAs: string
  /** What asks for the file: `line.zones`. */
  readonly askedBy: string
}

export async function openFile(path: string, { shownAs, askedBy }: Asked): Promise<Checked<FileSource>> {
  const refuse = (found: string, todo: string): Checked<never> => ({
    ok: false,
    problems: [{ file: shownAs, what: askedBy, found, todo }],
  })
  try {
    const facts = await stat(path)
    if (facts.isDirectory()) return refuse('this is a folder', 'give the file in it')
    if (facts.size > mostBytes) {
      const found = `the file has ${(facts.size / 1e6).toFixed(0)} MB, more than the ${mostBytes / 1e6} MB this program reads`
      return refuse(found, 'give a smaller file')
    }
    const bytes = await readFile(path)
    if (bytes.length === 0) return refuse('the file is empty', 'check that it is the file you meant')
    const folder = dirname(path)
    const read = (neighbour: string) => readFile(join(folder, neighbour))
    return { ok: true, value: { name: basename(path), bytes, neighbours: await namesIn(folder, path), read } }
  } catch (error) {
    const [found, todo] = unreadable(error, path)
    return refuse(found, todo)
  }
}

/** A folder that may not be listed still lets its files be read. */
async function namesIn(folder: string, path: string): Promise<string[]> {
  try {
    return await readdir(folder)
  } catch {
    return [basename(path)]
  }
}

export function unreadable(error: unknown, path: string): [found: string, todo: string] {
  const code = (error as { code?: string }).code
  if (code === 'ENOENT' || code === 'ENOTDIR')
    return ['there is no such file', 'check the path; in a study, paths are relative to the study file']
  if (code === 'EACCES' || code === 'EPERM') return ['the file may not be read', 'give yourself the right to read it']
  return [`the file can't be read (${code ?? (error as Error).message})`, `check ${path}`]
}

const readable = /\.(shp|gpkg|kml|geojson|json|topojson|csv|tsv)$/i
const needed = /\.(shp|dbf|shx|prj|cpg|gpkg|kml|geojson|json|topojson|csv|tsv)$/i

/** The one layer file within a zip; `layer` picks among several, by its name with or without the ending. */
export function openZip(zip: FileSource, file: string, layer: string | undefined): Checked<FileSource> {
  const refuse = (what: string, found: string, todo: string): Checked<never> => ({
    ok: false,
    problems: [{ file, what, found, todo }],
  })
  const sizes = new Map<string, number>()
  let entries: Record<string, Uint8Array>
  try {
    entries = unzipSync(zip.bytes, {
      filter: ({ name, originalSize }) => {
        if (!needed.test(name) || /(^|\/)(__MACOSX|\.)/.test(name)) return false
        sizes.set(name, originalSize)
        return [...sizes.values()].reduce((a, b) => a + b, 0) <= mostBytes
      },
    })
  } catch (error) {
    return refuse('not a whole zip file', (error as Error).message, 'compress it again')
  }
  if (Object.keys(entries).length < sizes.size)
    return refuse('the zip holds too much', `more than ${mostBytes / 1e6} MB`, 'give a smaller file')
  const layers = Object.keys(entries)
    .filter((name) => readable.test(name))
    .sort()
  const isAsked = (name: string) => layer === undefined || [name, basename(name), stem(basename(name))].includes(layer)
  const found = layers.filter(isAsked)
  if (layers.length === 0)
    return refuse('no layer in the zip', names(Object.keys(entries)), 'zip the .shp with its .dbf, .shx and .prj')
  if (found.length !== 1)
    return refuse(
      'layer',
      layer ?? 'not named',
      `name the one of the zip to read: ${names(layers.map((n) => basename(n)))}`,
    )
  const folder = found[0].slice(0, found[0].length - basename(found[0]).length)
  const beside = Object.keys(entries).filter(
    (name) => name.startsWith(folder) && !name.slice(folder.length).includes('/'),
  )
  return {
    ok: true,
    value: {
      name: basename(found[0]),
      bytes: entries[found[0]],
      neighbours: beside.map((name) => basename(name)),
      read: async (neighbour) => entries[folder + neighbour],
    },
  }
}

/** A name without its last ending. */
export function stem(name: string): string {
  return name.replace(/\.[^.]*$/, '')
}

/** Names as a message lists them. */
export function names(all: readonly string[]): string {
  if (all.length === 0) return 'none'
  return all.length > 12 ? `${all.slice(0, 12).join(', ')} and ${all.length - 12} more` : all.join(', ')
}

/** SHA-256, hexadecimal, of several byte strings one after another. */
export function sha256Of(...parts: readonly Uint8Array[]): string {
  const hash = createHash('sha256')
  for (const part of parts) hash.update(part)
  return hash.digest('hex')
}

/** One problem as a refusal. */
export function refused(problem: Problem): { ok: false; problems: Problem[] } {
  return { ok: false, problems: [problem] }
}
