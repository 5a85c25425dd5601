import {
  type Document,
  isAlias,
  isMap,
  isScalar,
  isSeq,
  LineCounter,
  type ParsedNode,
  parseDocument,
  type YAMLError,
} from 'yaml'
import type { Checked, Problem } from '../problem.js'

/** Where something stands in the study: keys and list indices from the top. */
export type Path = readonly (string | number)[]

/** A study as plain data, with the line of every key and list item. */
export interface Source {
  readonly data: unknown
  /** Line, from 1, of the key or item at a path, or of the nearest thing around it. */
  readonly lineOf: (path: Path) => number
}

/** More values than any study holds: a guard against aliases that multiply. */
const MOST_VALUES = 100_000

/**
 * YAML 1.2 (of which JSON is a subset) to plain data.
 * A number at a path for which `isName` holds is returned as it was written: a zone named 0101 stays "0101".
 * Refused, all at once: bad syntax, several documents, a key written twice, unknown tags and aliases, an empty file.
 */
export function readSource(text: string, file: string, isName: (path: Path) => boolean): Checked<Source> {
  const lines = new LineCounter()
  const document = parseDocument(text, { lineCounter: lines, prettyErrors: false, uniqueKeys: false })
  const lineAt = (node: { range?: [number, number, number] | null } | null | undefined) =>
    node?.range ? lines.linePos(node.range[0]).line : undefined

  const faults = [...document.errors, ...document.warnings]
  if (faults.length > 0) return { ok: false, problems: syntaxProblems(faults, lines, file) }
  if (!isMap(document.contents)) return { ok: false, problems: [notAMapping(document, file)] }

  const problems: Problem[] = []
  const lineOfPath = new Map<string, number>()
  const say = (line: number | undefined, what: string, found: string, todo: string) =>
    problems.push({ file, ...(line === undefined ? {} : { line }), what, found, todo })
  let values = 0

  const convert = (written: ParsedNode | null, path: Path, open: readonly unknown[]): unknown => {
    const node = isAlias(written) ? (written.resolve(document) as ParsedNode | undefined) : written
    values += 1
    if (isAlias(written) && (node === undefined || open.includes(node) || values > MOST_VALUES)) {
      if (values <= MOST_VALUES || node === undefined)
        say(lineAt(written), pathText(path), `the alias *${written.source} can't be followed`, 'write the value out')
      return null
    }
    if (isMap(node)) {
      const entries = new Map<string, unknown>()
      for (const pair of node.items) {
        if (!isScalar(pair.key)) {
          say(lineAt(pair.key as ParsedNode), pathText(path), 'a key that is not text', 'write a plain key')
          continue
        }
        const key = pair.key.value === null ? 'null' : (pair.key.source ?? String(pair.key.value))
        const here = [...path, key]
        const line = lineAt(pair.key as ParsedNode)
        if (entries.has(key))
          say(line, pathText(here), `written twice, first on line ${lineOfPath.get(pathText(here))}`, 'keep one')
        else if (line !== undefined) lineOfPath.set(pathText(here), line)
        entries.set(key, convert(pair.value as ParsedNode | null, here, [...open, node]))
      }
      return Object.fromEntries(entries)
    }
    if (isSeq(node)) {
      return node.items.map((item, index) => {
        const here = [...path, index]
        const line = lineAt(item as ParsedNode)
        if (line !== undefined) lineOfPath.set(pathText(here), line)
        return convert(item as ParsedNode, here, [...open, node])
      })
    }
    if (!isScalar(node)) return null
    return typeof node.value === 'number' && isName(path) ? (node.source ?? String(node.value)) : node.value
  }

  const data = convert(document.contents, [], [])
  if (values > MOST_VALUES) say(undefined, 'the study', `more than ${MOST_VALUES} values`, 'use fewer aliases')
  if (problems.length > 0) return { ok: false, problems }
  const firstLine = lineAt(document.contents) ?? 1
  const lineOf = (path: Path): number => {
    for (let length = path.length; length > 0; length--) {
      const line = lineOfPath.get(pathText(path.slice(0, length)))
      if (line !== undefined) return line
    }
    return firstLine
  }
  return { ok: true, value: { data, lineOf } }
}

/** `line.barriers[0].within`; the top of the study is "the study". */
export function pathText(path: Path): string {
  if (path.length === 0) return 'the study'
  return path.map((part, at) => (typeof part === 'number' ? `[${part}]` : at === 0 ? part : `.${part}`)).join('')
}

function notAMapping(document: Document.Parsed, file: string): Problem {
  const found = document.contents === null ? 'an empty file' : isSeq(document.contents) ? 'a list' : 'plain text'
  return { file, line: 1, what: 'the study must hold keys', found, todo: 'begin with records, outcomes and line' }
}

/** One problem a line: the parser stumbles on from its first fault. */
function syntaxProblems(faults: readonly YAMLError[], lines: LineCounter, file: string): Problem[] {
  const byLine = new Map<number, Problem>()
  for (const fault of faults) {
    const line = lines.linePos(fault.pos[0]).line
    if (byLine.has(line)) continue
    if (fault.code === 'MULTIPLE_DOCS') {
      const found = 'a second document begins here'
      byLine.set(line, { file, line, what: 'several studies in one file', found, todo: 'keep one study in a file' })
    } else {
      const found = fault.message.charAt(0).toLowerCase() + fault.message.slice(1)
      byLine.set(line, { file, line, what: 'not valid YAML', found, todo: syntaxAdvice(fault.code) })
    }
  }
  return [...byLine.values()]
}

function syntaxAdvice(code: YAMLError['code']): string {
  switch (code) {
    case 'TAB_AS_INDENT':
      return 'indent with spaces'
    case 'MULTILINE_IMPLICIT_KEY':
      return 'write a space after the colon of each key'
    case 'BLOCK_AS_IMPLICIT_KEY':
    case 'BAD_SCALAR_START':
      return 'put the text in quotes'
    case 'MISSING_CHAR':
    case 'BAD_INDENT':
      return 'close the quote or bracket, and check the indentation'
    case 'TAG_RESOLVE_FAILED':
      return 'leave the ! tag out'
    default:
      return 'check the colons, quotes and indentation here'
  }
}
