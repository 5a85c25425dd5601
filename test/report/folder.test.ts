/** What the results folder holds, and that every number in it is the result's own. */
import { createHash } from 'node:crypto'
import { describe, expect, it } from 'vitest'
import { drawReport, summaryLines } from '../../src/report/index.js'
import type { Estimate, Jump, Results } from '../../src/results.js'
import { borderStudy, plantedLatitude, plantedLongitude, plantedRow, scoreStudy } from '../fixtures/report/studies.js'
import { printed, readCsv, readMarkdown, readMarkdownParts, textOf } from './reading.js'

const border = borderStudy()
const score = scoreStudy()
const borderFiles = drawReport(border)
const scoreFiles = drawReport(score)
const isJump = (jump: object): jump is Jump => !('not_estimated' in jump)

function agrees(text: string, value: number): void {
  const { value: shown, half } = printed(text)
  expect(Math.abs(shown - value), `${text} for ${value}`).toBeLessThanOrEqual(half)
}

function intervalAgrees(text: string, interval: { low: number; high: number }): void {
  const [low, high] = text.split(' to ')
  agrees(low, interval.low)
  agrees(high, interval.high)
}

describe('the folder', () => {
  it('has the promised files', () => {
    const names = [...scoreFiles.keys()].filter((name) => !name.includes('-line-')).sort()
    expect(names).toEqual([
      'checks.csv',
      'figures/captions.md',
      'figures/ledger.csv',
      'figures/ledger.svg',
      'figures/weeks-in-work-forest.csv',
      'figures/weeks-in-work-forest.svg',
      'figures/weeks-in-work-pooled-fit.csv',
      'figures/weeks-in-work-pooled-fit.svg',
      'figures/weeks-in-work-pooled.csv',
      'figures/weeks-in-work-pooled.svg',
      'lines.csv',
      'pooled.csv',
      'report.html',
      ...['checks', 'comparison', 'contrasts-weeks-in-work', 'ledger', 'lines-weeks-in-work', 'pooled'].flatMap(
        (name) => ['csv', 'md', 'tex'].map((format) => `tables/${name}.${format}`),
      ),
    ])
    expect(borderFiles.has('borders.geojson')).toBe(true)
    expect(borderFiles.has('figures/map.svg')).toBe(true)
  })

  it('has one figure for each line that has an estimate', () => {
    expect([...scoreFiles.keys()].filter((name) => /-line-\d+\.svg$/.test(name)).length).toBe(24)
    expect(scoreFiles.has('figures/weeks-in-work-line-18.svg')).toBe(false)
  })

  it('is the same text for the same results', () => expect(drawReport(borderStudy())).toEqual(borderFiles))

  it('never has a unit in it', () => {
    for (const [name, text] of [...borderFiles, ...scoreFiles]) {
      for (const planted of [
        String(plantedRow),
        String(plantedLongitude),
        String(plantedLatitude),
        '123.456789',
        '4321.98',
      ]) {
        expect(text.includes(planted), `${planted} in ${name}`).toBe(false)
      }
      expect(text.includes('12.4712'), `a foot point in ${name}`).toBe(false)
    }
  })
})

describe('machine files', () => {
  it('carry every estimate of every line in full', () => {
    const rows = readCsv(borderFiles.get('lines.csv') as string)
    const lines = border.analysis.results.outcomes.flatMap((outcome) =>
      outcome.lines.map((line) => ({ outcome: outcome.outcome, line })),
    )
    expect(rows.length).toBe(lines.length)
    lines.forEach(({ outcome, line }, index) => {
      const row = rows[index]
      expect([row.outcome, row.line]).toEqual([outcome, line.line])
      if (!isJump(line)) {
        expect(row.not_estimated).not.toBe('')
        expect(row.corrected_estimate).toBe('')
        return
      }
      for (const kind of ['plain', 'corrected'] as const) {
        for (const [key, value] of Object.entries(line[kind] satisfies Estimate))
          expect(Number(row[`${kind}_${key}`])).toBe(value)
      }
      expect(Number(row.bandwidth_treated)).toBe(line.bandwidth.treated)
      expect(Number(row.at_line_untreated)).toBe(line.at_line.untreated)
    })
  })

  it('leave counts under the smallest cell out, and say so', () => {
    const rows = readCsv(borderFiles.get('lines.csv') as string)
    const small = rows.filter((row) => row.counts_withheld_under !== '')
    expect(small.map((row) => row.line)).toEqual([
      ...new Set(small.map((row) => row.line)),
      ...new Set(small.map((row) => row.line)),
    ])
    expect(small.length).toBe(4)
    for (const row of rows) {
      for (const column of [
        'units_untreated',
        'units_treated',
        'units_in_bandwidth_untreated',
        'units_in_bandwidth_treated',
      ]) {
        expect(row[column] === '' || row[column] === '0' || Number(row[column]) >= 10).toBe(true)
      }
    }
    expect(small[0].not_estimated).toBe('treated side: fewer than 10 distinct distances, a fit of order 1 needs 3')
  })

  it('carry what stands for all lines in full', () => {
    const [row] = readCsv(scoreFiles.get('pooled.csv') as string)
    const { pooled, target, comparison } = score.analysis.results.outcomes[0]
    if (!isJump(pooled) || !('estimate' in target) || !comparison?.prediction)
      throw new Error('the fixture lacks a part')
    expect(Number(row.corrected_high)).toBe(pooled.corrected.high)
    expect(Number(row.target_standard_error)).toBe(target.standard_error)
    expect(Number(row.tau_squared_pm)).toBe(comparison.tau_squared.pm)
    expect(Number(row.prediction_low)).toBe(comparison.prediction.low)
    expect(row.lines_estimated).toBe('24')
  })

  it('list every check', () => {
    const rows = readCsv(scoreFiles.get('checks.csv') as string)
    expect(rows.map((row) => row.verdict)).toEqual(['fine', 'doubt', 'not possible'])
    expect(readCsv(borderFiles.get('checks.csv') as string)).toEqual([])
  })

  it('draw each piece of border once, used or set aside', () => {
    const collection = JSON.parse(borderFiles.get('borders.geojson') as string)
    const map = border.analysis.exhibits.map
    expect(collection.features.length).toBe(map?.pieces.length)
    const outcome = border.analysis.results.outcomes[0]
    for (const [index, feature] of collection.features.entries()) {
      const piece = map?.pieces[index]
      expect(feature.geometry.type).toBe('MultiLineString')
      expect(feature.geometry.coordinates[0][0][0]).toBeCloseTo(piece?.coordinates[0][0][0] as number, 8)
      expect(feature.properties.set_aside).toBe(piece?.setAside ?? null)
      const jump = outcome.lines.find((line) => line.line === piece?.line)
      expect(feature.properties.log_rent_estimate ?? null).toBe(jump && isJump(jump) ? jump.corrected.estimate : null)
    }
  })
})

describe('tables for a paper', () => {
  it.each([
    ['border', borderFiles, border.analysis.results],
    ['score', scoreFiles, score.analysis.results],
  ] as const)('agree with the %s results in every digit shown', (_name, files, results: Results) => {
    const slugOf = (outcome: string) => outcome.replace(/ /g, '-')
    for (const outcome of results.outcomes) {
      const [facts, numbers] = readMarkdownParts(files.get(`tables/lines-${slugOf(outcome.outcome)}.md`) as string)
      expect(facts.length).toBe(outcome.lines.length)
      // what runs across stands in the first part alone
      let estimated = 0
      outcome.lines.forEach((line, index) => {
        if (!isJump(line)) {
          expect(facts[index].slice(1).every((text) => text === '–')).toBe(true)
          return
        }
        const cells = [...facts[index], ...numbers[estimated++].slice(1)]
        for (const [column, side] of [
          [2, 'untreated'],
          [3, 'treated'],
        ] as const) {
          const units = line.units_in_bandwidth[side]
          if (units < 10) expect(cells[column]).toBe('<10')
          else agrees(cells[column], units)
        }
        agrees(cells[4], line.bandwidth.untreated)
        const [mean, estimate, error, interval, p] = cells.slice(-5)
        agrees(mean, line.at_line.untreated)
        agrees(estimate, line.corrected.estimate)
        agrees(error, line.corrected.standard_error)
        intervalAgrees(interval, line.corrected)
        if (p === '<0.001') expect(line.corrected.p).toBeLessThan(0.001)
        else agrees(p, line.corrected.p)
      })
      expect(estimated).toBe(numbers.length)
    }
  })

  it('have the pooled, target and random-effects rows of each outcome, and what they rest on', () => {
    const [facts, numbers] = readMarkdownParts(borderFiles.get('tables/pooled.md') as string)
    const csv = readCsv(borderFiles.get('tables/pooled.csv') as string)
    expect(csv.length).toBe(numbers.length)
    border.analysis.results.outcomes.forEach((outcome, index) => {
      const [plain, corrected, target, mean] = numbers.slice(4 * index, 4 * index + 4)
      const { pooled } = outcome
      if (!isJump(pooled) || !('estimate' in outcome.target) || !outcome.comparison)
        throw new Error('the fixture lacks a part')
      agrees(plain[4], pooled.plain.estimate)
      agrees(corrected[4], pooled.corrected.estimate)
      intervalAgrees(corrected[6], pooled.corrected)
      agrees(target[4], outcome.target.estimate)
      intervalAgrees(mean[6], outcome.comparison.random_effects)
      agrees(corrected[3], pooled.at_line.untreated)
      const estimated = outcome.lines.filter(isJump)
      const lengthOf = new Map(border.analysis.results.lines.map((line) => [line.line, line.length_m ?? 0]))
      const km = estimated.reduce((sum, { line }) => sum + (lengthOf.get(line) as number), 0) / 1000
      const [, , lines, length, untreated, treated, bandwidth] = facts[4 * index + 1]
      agrees(lines, estimated.length)
      agrees(length, km)
      agrees(untreated, pooled.units_in_bandwidth.untreated)
      agrees(treated, pooled.units_in_bandwidth.treated)
      agrees(bandwidth, pooled.bandwidth.treated)
      const row = csv[4 * index + 1]
      expect(Number(row['95% interval: high'])).toBe(pooled.corrected.high)
      expect(Number(row['Largest weight'])).toBe(Math.max(...Object.values(pooled.weights)))
      expect(Number(row['Border, km'])).toBe(km)
    })
  })

  it('name a row in both of its columns of text wherever a wide table is split', () => {
    const parts = readMarkdownParts(borderFiles.get('tables/pooled.md') as string)
    expect(parts.length).toBe(2)
    expect(parts[1].map((row) => row.slice(0, 2))).toEqual(parts[0].map((row) => row.slice(0, 2)))
  })

  it('are split as often as they must be, and say so', () => {
    const layers = Array.from({ length: 20 }, (_, layer) => `layer ${layer}`)
    const shares = layers.map((_, layer) => layer / 7)
    const found = { layers, whole: { km: 1.5, shares }, pairs: [{ zones: ['a', 'b'] as const, km: 1.5, shares }] }
    const { results } = border.analysis
    const wide = { ...results, border: { waterfall: [], what_else_changes: found } } as unknown as Results
    const files = drawReport({ ...border, analysis: { ...border.analysis, results: wide } })
    const text = files.get('tables/what-else.md') as string
    const parts = readMarkdownParts(text)
    expect(parts.map(([row]) => row.length)).toEqual([8, 8, 8])
    expect(text.match(/22 columns are too many for one page/g)?.length).toBe(3)
    const tex = files.get('tables/what-else.tex') as string
    expect([...tex.matchAll(/\\begin\{tabular\}\{([lr]+)\}/g)].map(([, spec]) => spec)).toEqual(
      Array(3).fill('lrrrrrrr'),
    )
    const [all] = readCsv(files.get('tables/what-else.csv') as string)
    expect(layers.map((layer) => Number(all[layer]))).toEqual(shares)
  })

  it('have at most nine columns, and the same cells in LaTeX', () => {
    for (const [name, text] of borderFiles) {
      if (!name.endsWith('.tex')) continue
      const parts = readMarkdownParts(borderFiles.get(name.replace('.tex', '.md')) as string)
      const tabulars = [
        ...text.matchAll(/\\begin\{(?:tabular|longtable)\}\{([lr]+)\}[\s\S]*?\\end\{(?:tabular|longtable)\}/g),
      ]
      expect(tabulars.length).toBe(parts.length)
      for (const [part, [tabular, spec]] of tabulars.entries()) {
        expect(spec.length).toBeLessThanOrEqual(9)
        const body = tabular
          .slice(tabular.indexOf('\\midrule'))
          .split('\n')
          .filter((line) => line.endsWith('\\\\'))
        expect(body.length).toBe(parts[part].length)
        for (const [index, line] of body.entries()) {
          if (line.includes('\\multicolumn')) continue
          const cells = line.replace(/ \\\\$/, '').split(' & ')
          expect(
            cells.map((cell) =>
              cell
                .replace(/\$-\$/g, '−')
                .replace(/\\textless\{\}/g, '<')
                .replace(/\\textbar\{\}/g, '|')
                .replace(/--/g, '–')
                .replace(/\\/g, ''),
            ),
          ).toEqual(parts[part][index])
        }
      }
    }
  })

  it('reconcile in the ledger', () => {
    for (const files of [borderFiles, scoreFiles]) {
      for (const row of readMarkdown(files.get('tables/ledger.md') as string)) {
        expect(printed(row[1]).value - printed(row[2]).value).toBe(printed(row[3]).value)
      }
    }
  })
})

describe('the page', () => {
  const page = borderFiles.get('report.html') as string

  it('carries the hash of the style sheet it has, and no script', () => {
    const style = /<style>([\s\S]*?)<\/style>/.exec(page)?.[1] as string
    const hash = createHash('sha256').update(style, 'utf8').digest('base64')
    expect(page).toContain(`content="default-src 'none'; style-src 'sha256-${hash}'; img-src data:;`)
    expect(page).not.toMatch(/<script|\sstyle=|\son[a-z]+=|https?:\/\/(?!www\.w3\.org)/)
    expect(page.match(/<style/g)?.length).toBe(1)
  })

  it('uses every id once', () => {
    const ids = [...page.matchAll(/\sid="([^"]+)"/g)].map((match) => match[1])
    expect(new Set(ids).size).toBe(ids.length)
    for (const [, reference] of page.matchAll(/(?:url\(#|href="#)([^")]+)/g)) expect(ids).toContain(reference)
  })

  it('names cautions only where a fact calls for them', () => {
    const scorePage = textOf(scoreFiles.get('report.html') as string)
    expect(textOf(page)).toContain('Boundary files are not legal boundaries')
    expect(textOf(page)).toContain('Few clusters')
    expect(textOf(page)).toContain('Credibility was not checked')
    expect(textOf(page)).toContain('Fewer than 10 distinct distances')
    for (const words of ['legal', 'Few clusters', 'Credibility was not checked', 'Karney'])
      expect(scorePage).not.toContain(words)
    expect(scorePage).toContain('1 of 3 checks did not come out fine')
  })

  it('cites only what was used', () => {
    const normal = { ...score, resolvedStudy: score.resolvedStudy.replace('reference: t', 'reference: normal') }
    const text = textOf(drawReport(normal).get('report.html') as string)
    expect(text).not.toContain('Satterthwaite')
    expect(text).toContain('normal distribution')
    expect(text).not.toContain('Abadie')
  })

  it('refuses a resolved study without a level', () => {
    expect(() => drawReport({ ...score, resolvedStudy: 'title: none' })).toThrow(/estimation\.level/)
  })

  it('reads as stored', async () => {
    await expect(`${textOf(page)}\n`).toMatchFileSnapshot('../fixtures/report/border-page.txt')
    await expect(`${textOf(scoreFiles.get('report.html') as string)}\n`).toMatchFileSnapshot(
      '../fixtures/report/score-page.txt',
    )
  })
})

describe('the summary', () => {
  it('is about a dozen plain lines', () => {
    const lines = summaryLines(border.analysis.results, 'levy-results')
    expect(lines.length).toBeGreaterThan(8)
    expect(lines.length).toBeLessThan(16)
    for (const line of lines) expect(line).not.toMatch(/[\n<]script/)
    expect(lines.at(-1)).toContain('levy-results/report.html')
    const pooled = border.analysis.results.outcomes[0].pooled as Jump
    agrees(
      (/pooled {2}(\S+)/.exec(lines.find((line) => line.includes('pooled')) as string) as RegExpExecArray)[1],
      pooled.corrected.estimate,
    )
  })
})
