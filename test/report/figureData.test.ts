/** The numbers behind figures: those of the results in every digit, without small cells, and the same bytes each time. */
import { describe, expect, it } from 'vitest'
import { pdfOf } from '../../src/cli/pdf.js'
import { winAnsi } from '../../src/cli/winAnsi.js'
import { drawReport, pdfPath } from '../../src/report/index.js'
import type { Jump } from '../../src/results.js'
import { borderStudy, scoreStudy } from '../fixtures/report/studies.js'
import { readCsv } from './reading.js'

const border = borderStudy()
const score = scoreStudy()
const borderFiles = drawReport(border)
const scoreFiles = drawReport(score)

const rowsOf = (files: ReadonlyMap<string, string>, name: string) => readCsv(files.get(`figures/${name}.csv`) as string)
/** Nothing stands for null. */
const same = (text: string, value: number | null | undefined) =>
  expect(text === '' ? null : Number(text)).toBe(value ?? null)

describe('every figure', () => {
  it('has a title, a description, a caption and its data', () => {
    for (const files of [borderFiles, scoreFiles]) {
      const captions = files.get('figures/captions.md') as string
      for (const [name, svg] of files) {
        if (!name.endsWith('.svg')) continue
        expect(svg, name).toMatch(
          /^<svg [^>]*role="img"[^>]*><title id="[^"]+">[^<]{20,}<\/title><desc id="[^"]+">[^<]{20,}<\/desc>/,
        )
        expect(readCsv(files.get(name.replace('.svg', '.csv')) as string).length, name).toBeGreaterThan(0)
        if (pdfPath(name)) expect(captions).toContain(`## ${name.slice('figures/'.length, -'.svg'.length)}\n`)
      }
    }
  })
})

describe('the data of a forest', () => {
  it.each([
    ['border', borderFiles, border],
    ['score', scoreFiles, score],
  ] as const)('are those of the %s results', (_name, files, { analysis }) => {
    for (const { outcome, lines, pooled, target, comparison } of analysis.results.outcomes) {
      const rows = rowsOf(files, `${outcome.replace(/ /g, '-')}-forest`)
      expect(rows.length).toBe(lines.length + 3)
      for (const line of lines) {
        const row = rows.find((one) => one.line === line.line) as Record<string, string>
        const made = 'not_estimated' in line ? undefined : line.corrected
        same(row.estimate, made?.estimate)
        same(row.low, made?.low)
        same(row.high, made?.high)
        const shrunken = comparison?.shrunken.find((effect) => effect.line === line.line)
        same(row.shrunken_estimate, shrunken?.estimate)
        same(row.shrunken_low, shrunken?.low)
      }
      const [all, aim, mean] = rows.slice(-3)
      same(all.estimate, (pooled as Jump).corrected.estimate)
      same(aim.high, 'not_estimated' in target ? null : target.high)
      same(mean.estimate, comparison?.random_effects.estimate)
      same(mean.prediction_low, comparison?.prediction?.low)
    }
  })
})

describe('the data of a scatter', () => {
  it('are its bins, and with the fit its curves', () => {
    const exhibit = score.analysis.exhibits.outcomes[0].pooled
    const bins = rowsOf(scoreFiles, 'weeks-in-work-pooled')
    expect(bins.map(({ x, y, units }) => [Number(x), Number(y), Number(units)])).toEqual(
      exhibit?.bins.map(({ x, mean, units }) => [x, mean, units]),
    )
    const curves = rowsOf(scoreFiles, 'weeks-in-work-pooled-fit').filter(({ mark }) => mark === 'curve')
    expect(curves.map(({ y }) => Number(y))).toEqual([
      ...(exhibit?.fit.untreated.y ?? []),
      ...(exhibit?.fit.treated.y ?? []),
    ])
  })

  it('have no curve in the first view', () => {
    const [bare, fitted] = ['', '-fit'].map((end) => scoreFiles.get(`figures/weeks-in-work-pooled${end}.svg`) as string)
    const curves = (svg: string) => svg.match(/stroke-width="2.2"/g)?.length ?? 0
    expect([curves(bare), curves(fitted)]).toEqual([0, 2])
    const page = scoreFiles.get('report.html') as string
    expect(page.indexOf('<details>')).toBeGreaterThan(page.indexOf('id="figure-weeks-in-work-pooled-title"'))
    expect(page.indexOf('<details>')).toBeLessThan(page.indexOf('id="figure-weeks-in-work-pooled-fit-title"'))
  })

  it('leave out bins under the smallest cell', () => {
    const thin = drawReport({ ...score, disclosure: { coordinates: false, smallestCell: 60 } })
    const units = [...thin]
      .filter(([name]) => /-(pooled|line-\d+)(-fit)?\.csv$/.test(name))
      .flatMap(([, text]) => readCsv(text).map((row) => row.units))
    expect(units.some((count) => count !== '')).toBe(true)
    for (const count of units) if (count !== '') expect(Number(count)).toBeGreaterThanOrEqual(60)
  })
})

describe('the PDF of a figure', () => {
  const svg = borderFiles.get('figures/map.svg') as string

  it('has the same bytes each time, its title and no date of today', async () => {
    const [first, second] = [await pdfOf(svg), await pdfOf(svg)]
    expect(Buffer.compare(first, second)).toBe(0)
    const text = Buffer.from(first).toString('latin1')
    expect(text.startsWith('%PDF-1.')).toBe(true)
    expect(text).toContain('D:19700101000000Z')
    expect(text).not.toContain(`D:${new Date().getFullYear()}`)
    expect(text).toMatch(/\/BaseFont \/Helvetica/)
  })

  it('is made of main figures alone', () => {
    expect(pdfPath('figures/a-line-3.svg')).toBe(undefined)
    expect(pdfPath('figures/a-line-3-fit.svg')).toBe(undefined)
    expect(pdfPath('figures/a-line-3-pooled.svg')).toBe('figures/a-line-3-pooled.pdf')
    expect(pdfPath('figures/map.csv')).toBe(undefined)
  })

  it('writes letters that its fonts lack without their marks, or as ?', () => {
    expect(winAnsi('−0.3 ≤ τ², Łódź, Žižkov – Çeşme 東')).toBe('–0.3 &lt;= tau², Lódz, Žižkov – Çesme ?')
  })
})
