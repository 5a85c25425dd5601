/** Two runs compared as data. Expected values are worked out by hand from the numbers written here. */
import { describe, expect, it } from 'vitest'
import { compareRuns } from '../../src/analysis/comparedRuns.js'
import type { Run } from '../../src/analysis/runDifferences.js'
import type { Results } from '../../src/results.js'

interface Written {
  readonly lines: Readonly<Record<string, readonly [estimate: number, standardError: number] | string>>
  readonly verdict?: string
  readonly q?: number | null
  readonly options?: unknown
  readonly inputs?: Results['inputs']
}

function runOf({ lines, verdict = 'fine', q = 4, options = {}, inputs = [] }: Written): Run {
  const jump = (of: string | readonly [number, number]) =>
    typeof of === 'string' ? { not_estimated: of } : { corrected: { estimate: of[0], standard_error: of[1] } }
  const results = {
    version: '1',
    started: `${Math.random()}`,
    seconds: Math.random(),
    inputs,
    lines: Object.keys(lines).map((line) => ({ line, label: line })),
    outcomes: [
      {
        outcome: 'rent',
        lines: Object.entries(lines).map(([line, of]) => ({ line, ...jump(of) })),
        pooled: { not_estimated: 'one' },
        target: { not_estimated: 'one' },
        comparison: { q, df: 3 },
        checks: [{ check: 'density', verdict, says: `it is ${verdict}` }],
      },
    ],
  }
  return { results: results as unknown as Results, options }
}

describe('two runs', () => {
  const first = runOf({ lines: { a: [1, 0.5], b: [2, 0.25], c: [3, 1] } })

  it('that are equal have nothing that moved, whenever and however fast they ran', () => {
    const same = compareRuns(first, runOf({ lines: { a: [1, 0.5], b: [2, 0.25], c: [3, 1] } }))
    expect(same).toMatchObject({ moved: [], reworded: [], differs: [], only: { first: [], second: [] }, equal: 8 })
  })

  it('list what moved by standard errors of the first, then what has none', () => {
    const second = runOf({ lines: { b: [2.5, 0.25], a: [1.5, 0.5], c: [3.5, 2] }, q: 5 })
    const { moved } = compareRuns(first, second)
    expect(moved.map(({ number, difference, in_standard_errors }) => [number, difference, in_standard_errors])).toEqual(
      [
        ['outcomes[rent].lines[b].corrected.estimate', 0.5, 2],
        ['outcomes[rent].lines[a].corrected.estimate', 0.5, 1],
        ['outcomes[rent].lines[c].corrected.standard_error', 1, 1],
        ['outcomes[rent].lines[c].corrected.estimate', 0.5, 0.5],
        ['outcomes[rent].comparison.q', 1, null],
      ],
    )
    expect(moved.every(({ main }) => main)).toBe(true)
  })

  it('see the last bit of a double', () => {
    const { moved, equal } = compareRuns(first, runOf({ lines: { a: [1, 0.5], b: [2 + 2 ** -51, 0.25], c: [3, 1] } }))
    expect(moved.map(({ difference }) => difference)).toEqual([2 ** -51])
    expect(equal).toBe(7)
  })

  it('tell lines that came, went, or lost and found an estimate', () => {
    const before = runOf({ lines: { a: [1, 0.5], b: [2, 0.25], d: 'only 3 units' } })
    const after = runOf({ lines: { b: 'no unit treated', d: [1, 1], e: [4, 1] } })
    const { lines, estimability, only } = compareRuns(before, after)
    expect(lines).toEqual({ appeared: ['e'], disappeared: ['a'] })
    expect(estimability).toEqual([
      { what: 'rent, b', now: 'not estimated', reason: 'no unit treated' },
      { what: 'rent, d', now: 'estimated', reason: 'only 3 units' },
    ])
    expect(only.second.map(({ number }) => number)).toContain('outcomes[rent].lines[e].corrected.estimate')
  })

  it('tell words that changed, and numbers that became blank', () => {
    const { reworded, moved } = compareRuns(
      first,
      runOf({ lines: { a: [1, 0.5], b: [2, 0.25], c: [3, 1] }, verdict: 'doubt', q: null }),
    )
    expect(moved).toEqual([])
    expect(reworded.map(({ number, first: a, second: b, main }) => [number, a, b, main])).toEqual([
      ['outcomes[rent].comparison.q', 4, null, true],
      ['outcomes[rent].checks[density].verdict', 'fine', 'doubt', true],
      ['outcomes[rent].checks[density].says', 'it is fine', 'it is doubt', false],
    ])
  })

  it('say why: options by key, inputs by hash and rows', () => {
    const lines = { a: [1, 0.5] as const }
    const file = (name: string, sha256: string, rows: number) => ({ file: name, sha256, rows })
    const one = runOf({
      lines,
      options: { seed: 1, line: { zones: 'z', snap: 2 } },
      inputs: [file('a.csv', 'aa', 10), file('b.csv', 'bb', 1)],
    })
    const other = runOf({
      lines,
      options: { seed: 2, line: { zones: 'z', reach: 9 } },
      inputs: [file('a.csv', 'ac', 11), file('c.csv', 'bb', 1)],
    })
    expect(compareRuns(one, other).differs).toEqual([
      { key: 'seed', first: '1', second: '2' },
      { key: 'line.snap', first: '2', second: null },
      { key: 'line.reach', first: null, second: '9' },
      { key: 'input a.csv', first: 'sha256 aa, 10 rows', second: 'sha256 ac, 11 rows' },
      { key: 'input b.csv', first: 'sha256 bb, 1 row, the same bytes', second: null },
      { key: 'input c.csv', first: null, second: 'sha256 bb, 1 row, the same bytes' },
    ])
  })
})
