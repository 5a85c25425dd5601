/** Where results may go. A folder is replaced as a whole, so it must be one that this program wrote, or empty, or new. */
import {
  accessSync,
  closeSync,
  constants,
  openSync,
  readdirSync,
  readSync,
  realpathSync,
  type Stats,
  statSync,
} from 'node:fs'
import { basename, dirname, extname, join, resolve, sep } from 'node:path'
import type { Problem } from '../problem.js'

/** Everything at the top of a results folder; what is not listed here is somebody's own. */
export const resultNames: ReadonlySet<string> = new Set([
  'results.json',
  'report.html',
  'lines.csv',
  'pooled.csv',
  'checks.csv',
  'units.csv',
  'borders.geojson',
  'study.resolved.yaml',
  'tables',
  'figures',
])

/** A kind of folder that this program writes as a whole. */
export interface FolderKind {
  /** In messages. */
  readonly name: string
  readonly holding: string
  /** Everything at its top. */
  readonly names: ReadonlySet<string>
  /** The file that tells it, and how that begins. */
  readonly marker: string
  readonly begins: RegExp
}

const resultsKind: FolderKind = {
  name: 'results folder',
  holding: 'earlier results',
  names: resultNames,
  marker: 'results.json',
  begins: /^\s*\{\s*"format":\s*"scarp-results\/\d+"/,
}

/** `<folder>-ENDING` for a file called study, `<file without extension>-ENDING` for any other; in the working directory. */
export function defaultOutFolder(studyFile: string, ending = 'results'): string {
  const path = resolve(studyFile)
  const stem = basename(path, extname(path))
  return `${stem === 'study' ? basename(dirname(path)) || 'study' : stem}-${ending}`
}

/** Why `out` can't be the folder of a study that reads `inputs` (absolute paths); empty where it can. */
export function outFolderProblems(out: string, inputs: readonly string[], kind = resultsKind): Problem[] {
  const path = realPath(resolve(out))
  const refuse = (found: string, todo = 'choose another folder with --out'): Problem[] => [
    { file: out, what: kind.name, found, todo },
  ]
  const held = inputs.find((input) => isInside(realPath(input), path))
  if (held !== undefined) return refuse(`it holds a file of the study (${basename(held)})`)
  if (isInside(realPath(process.cwd()), path)) return refuse('it is the working directory or a folder above it')
  const facts = factsOf(path)
  if (facts !== undefined && !facts.isDirectory()) return refuse('it is a file')
  if (facts !== undefined) {
    const names = readdirSync(path)
    if (names.length > 0 && !isOfKind(path, kind)) return refuse(`it holds files, and not ${kind.holding}`)
    const own = names.filter((name) => !kind.names.has(name))
    if (own.length > 0)
      return refuse(
        `beside ${kind.holding} it holds ${own.slice(0, 3).join(', ')}`,
        'move that away, or choose another --out',
      )
  }
  const above = existingAbove(path)
  if (!factsOf(above)?.isDirectory()) return refuse(`${above} is a file`)
  if (!isWritable(above)) return refuse(`${above} may not be written to`)
  return []
}

/** The real path of what exists; of the rest, the real path of its nearest existing parent with the rest added. */
export function realPath(path: string): string {
  try {
    return realpathSync(path)
  } catch {
    const above = dirname(path)
    return above === path ? path : join(realPath(above), basename(path))
  }
}

function isInside(path: string, folder: string): boolean {
  return path === folder || path.startsWith(folder.endsWith(sep) ? folder : folder + sep)
}

/** Undefined where there is nothing, also where a parent is a file. */
export function factsOf(path: string): Stats | undefined {
  try {
    return statSync(path)
  } catch {
    return undefined
  }
}

function existingAbove(path: string): string {
  const above = dirname(path)
  return above === path || factsOf(above) !== undefined ? above : existingAbove(above)
}

function isWritable(folder: string): boolean {
  try {
    accessSync(folder, constants.W_OK | constants.X_OK)
    return true
  } catch {
    return false
  }
}

/** True if the folder's marker begins as ours does. */
function isOfKind(folder: string, { marker, begins }: FolderKind): boolean {
  const file = join(folder, marker)
  if (!factsOf(file)?.isFile()) return false
  const head = new Uint8Array(200)
  const descriptor = openSync(file, 'r')
  try {
    const length = readSync(descriptor, head)
    return begins.test(new TextDecoder().decode(head.subarray(0, length)))
  } finally {
    closeSync(descriptor)
  }
}
