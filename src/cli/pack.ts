/**
 * A replication folder: what is in it, and whether it still is what it was.
 *
 *     README.md          what a data editor asks for, with blanks for the author
 *     replication.json   what this file calls a manifest: versions, seed, and the hash of every file
 *     log.txt            when, where and how long it ran
 *     inputs/            the study as given, and the place of the files it reads
 *     results/           every exhibit, without units.csv
 *     drawn.json         what figures are drawn from beside the numbers
 *     units/             the units without coordinates and ids, and a study that reads them
 */
import { readdirSync } from 'node:fs'
import { join } from 'node:path'
import { readJsonFile } from '../layers/index.js'
import type { Checked, Problem } from '../problem.js'
import { hashOfFile } from './frozen.js'
import { type FolderKind, factsOf } from './outFolder.js'

export const manifestFile = 'replication.json'

export const packKind: FolderKind = {
  name: 'replication folder',
  holding: 'an earlier replication folder',
  names: new Set(['README.md', manifestFile, 'log.txt', 'drawn.json', 'inputs', 'results', 'units']),
  marker: manifestFile,
  begins: /^\s*\{\s*"format":\s*"scarp-replication\/\d+"/,
}

export interface HashedFile {
  readonly file: string
  readonly sha256: string
}

export interface Manifest {
  readonly format: 'scarp-replication/1'
  readonly title: string
  readonly version: string
  readonly node: string
  readonly seed: number
  /** Of the run that made the results; a rebuild repeats them, so that every byte can be the same. */
  readonly started: string
  readonly seconds: number
  /** The study as given. */
  readonly study: string
  /** What it reads, relative to it. */
  readonly inputs: readonly (HashedFile & { readonly bytes: number })[]
  /** Absent where the folder has no units. */
  readonly units?: {
    /** Ids of the lines that units/units.csv numbers from 1. */
    readonly lines?: readonly string[]
    /** What the study of the units lacks; `altered`: its estimates are others for that. */
    readonly left_out: readonly string[]
    readonly altered: boolean
  }
  /** Every file of the folder but the manifest. */
  readonly files: readonly HashedFile[]
}

/** What the author writes in, and what tells of one run: a rebuild does not ask for them. */
const ofTheAuthor: ReadonlySet<string> = new Set(['README.md', 'log.txt'])

const mostManifestBytes = 50_000_000

export async function readManifest(folder: string): Promise<Checked<Manifest>> {
  const refuse = (file: string, found: string): Checked<never> => {
    const problem = { file, what: 'replication folder', found, todo: 'name the folder that scarp replicate wrote' }
    return { ok: false, problems: [problem] }
  }
  const facts = factsOf(folder)
  if (!facts?.isDirectory()) return refuse(folder, facts ? 'it is a file' : 'there is no such folder')
  const file = join(folder, manifestFile)
  if (!factsOf(file)) return refuse(file, 'there is no such file')
  const read = await readJsonFile(file, { shownAs: file, askedBy: 'replication', mostBytes: mostManifestBytes })
  if (!read.ok) return read
  const manifest = read.value.content as Partial<Manifest> | null
  const isList = (list: unknown) =>
    Array.isArray(list) && list.every((one) => typeof one?.file === 'string' && typeof one?.sha256 === 'string')
  const isWhole =
    manifest?.format === 'scarp-replication/1' &&
    typeof manifest.study === 'string' &&
    typeof manifest.started === 'string' &&
    typeof manifest.seconds === 'number' &&
    isList(manifest.inputs) &&
    isList(manifest.files)
  return isWhole ? { ok: true, value: manifest as Manifest } : refuse(file, 'not the list of a replication folder')
}

/** What is not as it was: files that a rebuild needs and that changed or are gone. */
export async function changedFiles(folder: string, { files }: Manifest): Promise<Problem[]> {
  const problems: Problem[] = []
  // one after another: a folder may hold more files than can be open at once
  for (const { file, sha256 } of files) {
    const found = ofTheAuthor.has(file) ? undefined : await changeOf(join(folder, file), sha256)
    const todo = 'take the folder anew from where it was deposited'
    if (found !== undefined) problems.push({ file: join(folder, file), what: 'replication', found, todo })
  }
  return problems
}

/** In words; undefined where the file has that hash. */
export async function changeOf(path: string, sha256: string): Promise<string | undefined> {
  if (!factsOf(path)?.isFile()) return 'there is no such file'
  const now = await hashOfFile(path)
  if (now === sha256) return undefined
  return `it has changed: its SHA-256 begins ${now.slice(0, 12)}, and was ${sha256.slice(0, 12)}`
}

/** Files of somebody's own in a replication folder, which replacing it would delete: edited ones, and added ones. */
export async function ownFiles(folder: string): Promise<string[]> {
  const manifest = factsOf(join(folder, manifestFile)) ? await readManifest(folder) : undefined
  if (!manifest?.ok) return []
  const known = new Map(manifest.value.files.map(({ file, sha256 }) => [file, sha256]))
  const own: string[] = []
  for (const file of filesUnder(folder)) {
    const sha256 = known.get(file)
    const isOurs = file === manifestFile || (sha256 !== undefined && (await hashOfFile(join(folder, file))) === sha256)
    if (!isOurs) own.push(file)
  }
  return own
}

/** Paths below a folder, with forward slashes, in order. */
export function filesUnder(folder: string, above = ''): string[] {
  const entries = readdirSync(join(folder, above), { withFileTypes: true })
  return entries
    .flatMap((entry) => {
      const path = above === '' ? entry.name : `${above}/${entry.name}`
      return entry.isDirectory() ? filesUnder(folder, path) : [path]
    })
    .sort()
}
