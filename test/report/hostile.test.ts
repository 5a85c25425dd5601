/** Labels, names and reasons that try to break out of their language; and results with holes in them. */
import { describe, expect, it } from 'vitest'
import type { ReportInput } from '../../src/report/index.js'
import { drawReport, summaryLines } from '../../src/report/index.js'
import type { Analysis, Results } from '../../src/results.js'
import { borderStudy, scoreStudy } from '../fixtures/report/studies.js'
import { readCsv, readMarkdownParts } from './reading.js'

const hostile = `"><script>alert('x')</script> & 50% | a_b \\ $y {z} #w\n~`

function withHostileText(): ReportInput {
  const study = borderStudy()
  const { results, exhibits } = study.analysis
  const rename = (text: string) => `${text} ${hostile}`
  const outcome = `log_rent ${hostile}`
  const changed: Results = {
    ...results,
    title: rename(results.title),
    inputs: results.inputs.map((input) => ({ ...input, file: rename(input.file) })),
    lines: results.lines.map((line) => ({
      ...line,
      label: rename(line.label),
      zones: line.zones && [rename(line.zones[0]), line.zones[1]],
    })),
    outcomes: [
      {
        ...results.outcomes[0],
        outcome,
        checks: [{ check: hostile, verdict: 'doubt', says: hostile }],
        lines: results.outcomes[0].lines.map((line) =>
          'not_estimated' in line ? { ...line, not_estimated: hostile } : { ...line, notes: [hostile] },
        ),
      },
    ],
    ledger: results.ledger.map((step) => ({
      ...step,
      step: rename(step.step),
      reasons: (step.in > step.out ? { [hostile]: step.in - step.out } : {}) as Record<string, number>,
    })),
  }
  const map = exhibits.map && {
    ...exhibits.map,
    zones: exhibits.map.zones.map((zone) => ({ ...zone, name: rename(zone.name) })),
    barriers: exhibits.map.barriers.map((barrier) => ({ ...barrier, name: hostile })),
  }
  const analysis: Analysis = {
    ...study.analysis,
    results: changed,
    exhibits: { ...exhibits, outcomes: [{ ...exhibits.outcomes[0], outcome }], map },
  }
  return { ...study, analysis, resolvedStudy: `# ${hostile.replace('\n', ' ')}\n${study.resolvedStudy}` }
}

describe('hostile text', () => {
  const files = drawReport(withHostileText())

  it('opens no tag in HTML and SVG', () => {
    for (const [name, text] of files) {
      if (/\.(html|svg)$/.test(name)) expect(text, name).not.toContain('<script')
      if (name.endsWith('.md')) expect(text, name).not.toContain('<')
    }
  })

  it('makes no unsafe file name', () => {
    for (const name of files.keys()) expect(name).toMatch(/^([a-z]+\/)?[A-Za-z0-9_-]+\.(html|csv|geojson|md|tex|svg)$/)
  })

  it('leaves the cells of Markdown, LaTeX and CSV where they were', () => {
    const line = [...files.keys()].find((name) => name.startsWith('tables/lines-') && name.endsWith('.md')) as string
    const parts = readMarkdownParts(files.get(line) as string)
    for (const part of parts) for (const row of part) expect(row.length).toBe(part[0].length)
    expect(parts.flat().every((row) => row.length <= 9)).toBe(true)
    const tex = files.get(line.replace('.md', '.tex')) as string
    for (const row of tex.split('\n').filter((text) => text.endsWith(' \\\\') && !text.includes('multicolumn'))) {
      expect(parts.map(([first]) => first.length - 1)).toContain(row.match(/(?<!\\)&/g)?.length)
      expect(row).not.toMatch(/(?<!\\)[%#_$](?!-\$)(?<!\$-\$)/)
    }
    const rows = readCsv(files.get('lines.csv') as string)
    expect(rows[0].label.endsWith(hostile)).toBe(true)
  })
})

describe('results with holes', () => {
  const study = scoreStudy()
  const none = { not_estimated: 'no line has an estimate' }
  const [outcome] = study.analysis.results.outcomes

  it('are reported with their reasons when nothing could be estimated', () => {
    const results: Results = {
      ...study.analysis.results,
      outcomes: [
        {
          ...outcome,
          lines: outcome.lines.map(({ line }) => ({ line, not_estimated: 'treated side: no units' })),
          pooled: none,
          target: none,
          comparison: null,
          comparison_reason: 'no line has an estimate',
          checks: [],
        },
      ],
    }
    const exhibits = {
      ...study.analysis.exhibits,
      outcomes: [{ outcome: outcome.outcome, lines: outcome.lines.map(() => null) }],
    }
    const files = drawReport({ ...study, analysis: { ...study.analysis, results, exhibits } })
    expect(files.get('report.html')).toContain('There is no pooled estimate: no line has an estimate.')
    expect(files.has('figures/weeks-in-work-pooled.svg')).toBe(false)
    expect(summaryLines(results, 'out').join('\n')).toContain('not estimated: no line has an estimate')
  })

  it('print a dash for numbers that are missing', () => {
    const missing = null as unknown as number
    const lines = outcome.lines.map((line, index) =>
      index === 0 && !('not_estimated' in line)
        ? {
            ...line,
            corrected: { ...line.corrected, standard_error: missing, low: missing, high: missing, p: missing },
          }
        : line,
    )
    const results: Results = { ...study.analysis.results, outcomes: [{ ...outcome, lines }] }
    const files = drawReport({ ...study, analysis: { ...study.analysis, results } })
    const [, [row]] = readMarkdownParts(files.get('tables/lines-weeks-in-work.md') as string)
    expect(row.slice(-3)).toEqual(['–', '–', '–'])
    for (const [name, text] of files) expect(text, name).not.toMatch(/NaN|undefined|Infinity/)
  })
})
