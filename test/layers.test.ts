/** One way down between rooms: import lines are read against the table of DEVELOPERS.md. */
import { readdirSync, readFileSync } from 'node:fs'
import { dirname, join, relative, resolve } from 'node:path'
import { describe, expect, it } from 'vitest'

const source = resolve(import.meta.dirname, '../src')

/** What each room may import; leaf files at the top of src are open to all. */
const mayImport: Readonly<Record<string, readonly string[]>> = {
  math: [],
  study: [],
  records: [],
  layers: [],
  jump: ['math'],
  borders: ['math'],
  thresholds: ['math', 'jump'],
  checks: ['math', 'jump'],
  'results.ts': ['math', 'study', 'records', 'jump', 'borders', 'thresholds', 'checks'],
  analysis: ['math', 'study', 'records', 'jump', 'borders', 'thresholds', 'checks', 'results.ts'],
  'analyze.ts': ['analysis', 'math', 'study', 'records', 'jump', 'borders', 'thresholds', 'checks', 'results.ts'],
  report: ['results.ts', 'math'],
  // runs in the page
  'report/client': ['report', 'results.ts', 'math', 'jump'],
  'index.ts': ['analyze.ts', 'math', 'study', 'jump', 'borders', 'thresholds', 'checks', 'results.ts', 'report'],
}
const leaves = ['placement.ts', 'problem.ts']
const nodeFiles = /^(cli\/|layers\/|records\/files\.ts$|records\/duckdb\/)/

interface Import {
  readonly from: string
  readonly to: string
  readonly isType: boolean
}

const files = (readdirSync(source, { recursive: true }) as string[]).filter(
  (file) => /\.ts$/.test(file) && !/\.d\.ts$/.test(file),
)

function importsOf(file: string): Import[] {
  const text = readFileSync(join(source, file), 'utf8')
  const found = text.matchAll(
    /(?:^|\n)\s*(import|export)\b([^'"\n;]*(?:\{[^}]*\})?[^'"\n;]*)from\s+'([^']+)'|import\(\s*'([^']+)'\s*\)/g,
  )
  return [...found].map(([, , clause = '', named, dynamic]) => ({
    from: file,
    to: named ?? dynamic,
    isType: /^\s*type\b/.test(clause),
  }))
}

const roomOf = (file: string) => (file.startsWith('report/client/') ? 'report/client' : file.split('/')[0])
const all = files.flatMap(importsOf)
const inside = all
  .filter(({ to }) => to.startsWith('.'))
  .map((line) => ({
    ...line,
    target: relative(source, resolve(source, dirname(line.from), line.to)).replace(/\.js$/, '.ts'),
  }))

describe('layers', () => {
  it('reads the import lines', () => {
    expect(files.length).toBeGreaterThan(60)
    expect(inside.length).toBeGreaterThan(files.length)
  })

  it('imports only downwards, and through the door of another room', () => {
    const wrong = inside.filter(({ from, target }) => {
      const room = roomOf(from)
      const other = roomOf(target)
      if (room === other || room === 'cli' || leaves.includes(target)) return false
      if (leaves.includes(from)) return true
      const isDoor =
        !target.includes('/') ||
        (room === 'report/client' && other === 'report') ||
        target === `${other}/index.ts` ||
        room === 'analyze.ts'
      return !isDoor || !(mayImport[room] ?? []).includes(other)
    })
    expect(wrong.map(({ from, target }) => `${from} -> ${target}`)).toEqual([])
  })

  it('takes types alone from where only types may come', () => {
    const wrong = inside.filter(
      ({ from, target, isType }) =>
        (from === 'results.ts' || (from.startsWith('report/') && target === 'results.ts')) && !isType,
    )
    expect(wrong.map(({ from, target }) => `${from} -> ${target}`)).toEqual([])
  })

  it('knows Node only where files begin', () => {
    const node = all.filter(
      ({ from, to }) => (to.startsWith('node:') || to === '@duckdb/node-api') && !nodeFiles.test(from),
    )
    expect(node.map(({ from, to }) => `${from} -> ${to}`)).toEqual([])
  })

  it('reaches the Node side of records from the command line alone', () => {
    const wrong = inside.filter(({ from, target }) => /^records\/(files|duckdb)/.test(target) && !nodeFiles.test(from))
    expect(wrong.map(({ from, target }) => `${from} -> ${target}`)).toEqual([])
  })

  it('has no circle of imports between files', () => {
    const next = new Map<string, string[]>()
    for (const { from, target, isType } of inside) if (!isType) next.set(from, [...(next.get(from) ?? []), target])
    const done = new Set<string>()
    const circles: string[] = []
    const walk = (file: string, path: readonly string[]) => {
      if (path.includes(file)) circles.push([...path.slice(path.indexOf(file)), file].join(' -> '))
      else if (!done.has(file)) {
        for (const target of next.get(file) ?? []) walk(target, [...path, file])
        done.add(file)
      }
    }
    for (const file of files) walk(file, [])
    expect(circles).toEqual([])
  })
})
