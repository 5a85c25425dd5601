/** The page in a real browser, network off: nothing requested, nothing said, nothing seriously inaccessible, nothing too wide. */
import { copyFileSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import { tmpdir } from 'node:os'
import { join, resolve } from 'node:path'
import type axe from 'axe-core'
import type { Browser, BrowserContextOptions, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { drawReport } from '../../src/report/index.js'
import { scarp } from '../cli/studies.js'
import { borderStudy, scoreStudy } from '../fixtures/report/studies.js'
import { launch, openPage, type Seen } from './browser.js'

const folder = mkdtempSync(join(tmpdir(), 'report-page-'))
const files = { border: drawReport(borderStudy()), score: drawReport(scoreStudy()) }
/** Studies of boundaries/, run by the command line. */
const examples = ['quillhaven', 'hedgerows']
const axeSource = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8')
let browser: Browser

beforeAll(async () => {
  for (const [name, texts] of Object.entries(files))
    writeFileSync(join(folder, `${name}.html`), texts.get('report.html') as string)
  for (const name of examples) {
    const said = await scarp(['run', resolve('boundaries', name, 'study.yaml'), '--out', name, '--quiet'], {
      cwd: folder,
    })
    expect(said).toEqual({ code: 0, stdout: '', stderr: '' })
    copyFileSync(join(folder, name, 'report.html'), join(folder, `${name}.html`))
  }
  browser = await launch()
})

afterAll(async () => {
  await browser?.close()
  rmSync(folder, { recursive: true, force: true })
})

const open = (name: string, options: BrowserContextOptions, use: (page: Page, seen: Seen) => Promise<void>) =>
  openPage(browser, folder, name, options, use)

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
