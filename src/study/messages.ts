/** Schema issues to problems: what is wrong, what was found, what to write. */
import { stringify } from 'yaml'
import type { z } from 'zod'
import type { Problem } from '../problem.js'
import type { Advice } from './leaf.js'
import { nearest } from './nearest.js'
import { parts } from './schema.js'
import { type Path, pathText, type Source } from './source.js'

/** Problems in the order of the issues. A missing key is left out where an unknown one was surely meant for it. */
export function problemsOf(issues: readonly z.core.$ZodIssue[], source: Source, file: string): Problem[] {
  const meant = new Set<string>()
  for (const issue of issues)
    if (issue.code === 'unrecognized_keys')
      for (const key of issue.keys) {
        const near = nearest(key, issue.message.split(' '))
        if (near !== undefined) meant.add(pathText([...pathOf(issue), near]))
      }
  return issues.flatMap((issue): Problem[] => {
    const path = pathOf(issue)
    if (issue.code === 'unrecognized_keys')
      return issue.keys.map((key) => {
        const here = [...path, key]
        return { file, line: source.lineOf(here), ...unknownKey(here, key, issue.message.split(' ')) }
      })
    const value = valueAt(source.data, path)
    if (value === undefined && meant.has(pathText(path))) return []
    return [{ file, line: source.lineOf(path), ...wrongValue(issue, pathText(path), value) }]
  })
}

type Words = Pick<Problem, 'what' | 'found' | 'todo'>

function unknownKey(path: Path, key: string, known: readonly string[]): Words {
  const what = pathText(path)
  const near = nearest(key, known)
  if (near !== undefined) return { what, found: 'not a known key', todo: `did you mean ${near}?` }
  const home = Object.keys(parts).find((part) => nearest(key, parts[part]) !== undefined)
  if (home !== undefined) return { what, found: 'not a known key here', todo: `it belongs to ${home}` }
  return { what, found: 'not a known key', todo: `known here: ${known.join(', ')}` }
}

function wrongValue(issue: z.core.$ZodIssue, key: string, value: unknown): Words {
  const advice: Advice | undefined = issue.code === 'custom' ? issue.params?.advice : undefined
  const todo = advice?.todo ?? (issue.code === 'invalid_type' ? wantedShape(issue.expected, key, value) : 'correct it')
  if (value === undefined) return { what: key, found: 'missing', todo }
  if (value === null) return { what: key, found: 'nothing after the colon', todo }
  const must =
    issue.code !== 'invalid_type'
      ? issue.message
      : issue.expected === 'array'
        ? 'must be a list'
        : 'must hold keys of its own'
  return {
    what: `${key}: ${must}`,
    found: `got ${shown(value)}`,
    todo: betterAdvice(value, advice) ?? todo,
  }
}

function wantedShape(expected: string, key: string, value: unknown): string {
  if (expected === 'array') {
    const one = typeof value === 'string' || typeof value === 'number'
    return one ? `write [${value}]` : 'write a list: [one, another]'
  }
  return `write the keys of ${key} indented under it`
}

/** What can be read off the value itself: the number in "12,5", the word in "Triangular". */
function betterAdvice(value: unknown, advice: Advice | undefined): string | undefined {
  if (typeof value !== 'string' || advice === undefined) return undefined
  const near = nearest(value, advice.options ?? [])
  if (near !== undefined) return `did you mean ${near}?`
  if (advice.wants === 'switch') {
    if (/^(yes|on|y)$/i.test(value)) return 'write true'
    return /^(no|off|n)$/i.test(value) ? 'write false' : undefined
  }
  if (advice.wants !== 'number') return undefined
  const number = value.trim()
  if (/^[-+]?\d{1,3}([ ,_']\d{3})+(\.\d+)?$/.test(number)) return `write ${number.replace(/[ ,_']/g, '')}`
  if (/^[-+]?\d+,\d+$/.test(number)) return `write ${number.replace(',', '.')}`
  if (/^[-+]?(\d+\.?\d*|\.\d+)(e[-+]?\d+)?$/i.test(number)) return `write ${number} without quotes`
  return undefined
}

function shown(value: unknown): string {
  if (typeof value === 'number' && !Number.isFinite(value)) return stringify(value).trim()
  const text = JSON.stringify(value)
  return text.length > 60 ? `${text.slice(0, 57)}...` : text
}

function pathOf(issue: z.core.$ZodIssue): Path {
  return issue.path.map((part) => (typeof part === 'number' ? part : String(part)))
}

function valueAt(data: unknown, path: Path): unknown {
  let value = data
  for (const part of path) {
    if (typeof value !== 'object' || value === null || !Object.hasOwn(value, part)) return undefined
    value = (value as Record<string | number, unknown>)[part]
  }
  return value
}
