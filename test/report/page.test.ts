/** The page in a real browser, network off: nothing requested, nothing said, nothing seriously inaccessible, nothing too wide. */
import {
  copyFileSync,
  cpSync,
  existsSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  writeFileSync,
} from 'node:fs'
import { createRequire } from 'node:module'
import { tmpdir } from 'node:os'
import { join, resolve } from 'node:path'
import type axe from 'axe-core'
import type { Browser, BrowserContextOptions, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { drawReport } from '../../src/report/index.js'
import type { Results } from '../../src/results.js'
import { scarp } from '../cli/studies.js'
import { manyLines } from '../fixtures/report/manyLines.js'
import { borderStudy, scoreStudy } from '../fixtures/report/studies.js'
import { launch, openPage, type Seen } from './browser.js'
import { compareFigures } from './compareFigures.js'
import { readCsv } from './reading.js'

const folder = mkdtempSync(join(tmpdir(), 'report-page-'))
const files = { border: drawReport(borderStudy()), score: drawReport(scoreStudy()) }
/** Studies of boundaries/, run by the command line; the border study asks for points along it and for balance, too. */
const examples = ['quillhaven', 'hedgerows']
const axeSource = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8')
let browser: Browser

beforeAll(async () => {
  for (const [name, texts] of Object.entries(files))
    writeFileSync(join(folder, `${name}.html`), texts.get('report.html') as string)
  const runs = examples.map(async (name) => {
    cpSync(resolve('boundaries', name), join(folder, 'studies', name), { recursive: true })
    const file = join(folder, 'studies', name, 'study.yaml')
    const asked = readFileSync(file, 'utf8')
      .replace('  barriers:', '  along: 800\n  barriers:')
      .replace('checks:', name === 'quillhaven' ? 'predetermined: [beds, built]\nchecks:' : 'checks:')
    writeFileSync(file, asked)
    const said = await scarp(['run', file, '--out', name, '--quiet'], { cwd: folder })
    expect(said).toEqual({ code: 0, stdout: '', stderr: '' })
    copyFileSync(join(folder, name, 'report.html'), join(folder, `${name}.html`))
  })
  await Promise.all(runs)
  browser = await launch()
})

afterAll(async () => {
  await browser?.close()
  rmSync(folder, { recursive: true, force: true })
})

const open = (name: string, options: BrowserContextOptions, use: (page: Page, seen: Seen) => Promise<void>) =>
  openPage(browser, folder, name, options, use)

describe.each(examples)('the figures of %s', (name) => {
  it('carry the numbers of its results in every digit, and no small cell', () => {
    const results: Results = JSON.parse(readFileSync(join(folder, name, 'results.json'), 'utf8'))
    const rowsOf = (figure: string) => readCsv(readFileSync(join(folder, name, 'figures', `${figure}.csv`), 'utf8'))
    expect(compareFigures(results, rowsOf)).toBeGreaterThan(name === 'quillhaven' ? 12 : 6)
    const small = readdirSync(join(folder, name, 'figures'))
      .filter((file) => file.endsWith('.csv'))
      .flatMap((file) => readCsv(readFileSync(join(folder, name, 'figures', file), 'utf8')))
      .flatMap((row) => Object.entries(row).filter(([column]) => /^units/.test(column)))
      .filter(([, units]) => Number(units) > 0 && Number(units) < 10)
    expect(small).toEqual([])
  })
})

/** Runs in the page, every figure open: texts of one figure whose boxes overlap, as drawn, and texts that leave the figure. */
function wordsInTheWay(): string[] {
  for (const details of document.querySelectorAll('details')) details.open = true
  const found: string[] = []
  for (const svg of document.querySelectorAll('figure svg')) {
    const name = svg.querySelector('title')?.id
    const edge = svg.getBoundingClientRect()
    const texts = [...svg.querySelectorAll('text')].map((text) => {
      const { left, right, top, bottom } = text.getBoundingClientRect()
      // a line of text has room above and below its letters
      const spare = 0.2 * (bottom - top)
      return { words: text.textContent, left, right, top: top + spare, bottom: bottom - spare }
    })
    texts.forEach((a, i) => {
      if (a.left < edge.left - 1 || a.right > edge.right + 1) found.push(`${name}: ${a.words} leaves the figure`)
      for (const b of texts.slice(i + 1)) {
        const isOver = a.left < b.right && b.left < a.right && a.top < b.bottom && b.top < a.bottom
        if (isOver) found.push(`${name}: ${a.words} | ${b.words}`)
      }
    })
  }
  return found
}

describe.each(['border', 'score', ...examples])('the %s page', (name) => {
  it('asks for nothing and says nothing, and its style sheet applies', async () => {
    await open(name, {}, async (page, seen) => {
      expect(seen).toEqual({ requests: [], messages: [] })
      expect(await page.evaluate(() => getComputedStyle(document.body).marginTop)).toBe('0px')
      // drawn without the script that the command line hands over, a page has none
      const scripts = await page.evaluate(() => document.querySelectorAll('script:not([type])').length)
      expect(scripts).toBe(examples.includes(name) ? 1 : 0)
    })
  })

  it('shows each figure with a text alternative, a caption and links to files that are there', async () => {
    await open(name, {}, async (page) => {
      const figures = await page.evaluate(() =>
        [...document.querySelectorAll('figure:has(> figcaption .files)')].map((figure) => ({
          role: figure.querySelector('svg')?.getAttribute('role'),
          title: figure.querySelector('svg title')?.textContent ?? '',
          description: figure.querySelector('svg desc')?.textContent ?? '',
          caption: figure.querySelector('figcaption')?.textContent ?? '',
          links: [...figure.querySelectorAll('figcaption a')].slice(0, 3).map((link) => link.getAttribute('href')),
        })),
      )
      expect(figures.length).toBeGreaterThan(2)
      expect(new Set(figures.flatMap(({ links }) => links)).size).toBe(3 * figures.length)
      for (const { role, title, description, caption, links } of figures) {
        expect(role).toBe('img')
        expect(Math.min(title.length, description.length, caption.length)).toBeGreaterThan(20)
        if (!examples.includes(name)) continue
        for (const link of links) expect(existsSync(join(folder, name, link as string)), link as string).toBe(true)
      }
    })
  })

  it('has no words over other words in any figure, nor beyond its edge', async () => {
    await open(name, { viewport: { width: 1280, height: 900 } }, async (page) => {
      expect(await page.evaluate(wordsInTheWay)).toEqual([])
    })
  })

  it.each([320, 768, 1600])('is not wider than a window of %i', async (width) => {
    await open(name, { viewport: { width, height: 900 } }, async (page) => {
      expect(await page.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(width)
      const wide = await page.evaluate(
        () =>
          [...document.querySelectorAll('.scroll, .drawing, pre')].filter(
            (box) => box.scrollWidth > box.clientWidth && box.getAttribute('tabindex') !== '0',
          ).length,
      )
      expect(wide).toBe(0)
    })
  })

  it.each(['light', 'dark'] as const)('has nothing serious against it in %s', async (colorScheme) => {
    await open(name, { colorScheme, bypassCSP: true, viewport: { width: 1280, height: 900 } }, async (page) => {
      await page.evaluate(axeSource)
      const found = await page.evaluate(async () => {
        const results = await (window as unknown as { axe: typeof axe }).axe.run(document)
        return results.violations.map(({ id, impact, nodes }) => ({
          id,
          impact,
          nodes: nodes.slice(0, 3).map((node) => node.html.slice(0, 200)),
        }))
      })
      expect(found).toEqual([])
    })
  })

  it('prints without its navigation and without scrolling boxes', async () => {
    await open(name, { viewport: { width: 800, height: 1000 } }, async (page) => {
      await page.emulateMedia({ media: 'print' })
      expect(await page.evaluate(() => getComputedStyle(document.querySelector('nav') as Element).display)).toBe('none')
      expect(await page.evaluate(() => getComputedStyle(document.querySelector('.scroll') as Element).overflowX)).toBe(
        'visible',
      )
    })
  })
})

it('has no words over other words in the forest of 200 lines', async () => {
  writeFileSync(join(folder, 'many.html'), drawReport(manyLines(200)).get('report.html') as string)
  await open('many', { viewport: { width: 1280, height: 900 } }, async (page) => {
    expect(await page.evaluate(() => document.querySelectorAll('[id*="forest-"] ~ text').length)).toBeGreaterThan(400)
    expect(await page.evaluate(wordsInTheWay)).toEqual([])
  })
})

it('parses every figure as XML', async () => {
  await open('score', { bypassCSP: true }, async (page) => {
    for (const [name, text] of [...files.border, ...files.score].filter(([path]) => path.endsWith('.svg'))) {
      const fault = await page.evaluate(
        (svg) => new DOMParser().parseFromString(svg, 'image/svg+xml').querySelector('parsererror')?.textContent ?? '',
        text,
      )
      expect(fault, name).toBe('')
    }
  })
})
