/** Passports of lines in a real browser: found by name, sorted, linked; a plain list without the script. */
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type axe from 'axe-core'
import type { Browser, BrowserContextOptions, Page } from 'playwright-core'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { drawReport } from '../../src/report/index.js'
import type { Jump } from '../../src/results.js'
import { borderStudy } from '../fixtures/report/studies.js'
import { launch, openPage } from './browser.js'

const folder = mkdtempSync(join(tmpdir(), 'passports-'))
const study = borderStudy()
const { lines, outcomes } = study.analysis.results
let browser: Browser
beforeAll(async () => {
  const script = readFileSync('dist/report/pageScript.js', 'utf8').trimEnd()
  for (const [name, given] of [
    ['with', { ...study, script }],
    ['without', study],
  ] as const)
    writeFileSync(join(folder, `${name}.html`), drawReport(given).get('report.html') as string)
  browser = await launch()
})
afterAll(async () => {
  await browser?.close()
  rmSync(folder, { recursive: true, force: true })
})
const open = (name: string, use: (page: Page) => Promise<void>, options: BrowserContextOptions = {}) =>
  openPage(browser, folder, name, options, async (page, seen) => {
    await use(page)
    expect(seen).toEqual({ requests: [], messages: [] })
  })
const shown = (page: Page) =>
  page.$$eval('details.passport:not([hidden]) .name', (all) => all.map(({ textContent }) => textContent))

it('are found by name and sorted by estimate, those without one last, by keyboard too', async () => {
  await open('with', async (page) => {
    expect(await shown(page)).toEqual(lines.map(({ label }) => label))
    await page.getByLabel('Sort by').selectOption('estimate')
    const estimates = outcomes[0].lines.map((line) => ('corrected' in line ? line.corrected.estimate : Number.NaN))
    const order = [...lines.keys()].sort((a, b) => {
      if (Number.isNaN(estimates[a]) || Number.isNaN(estimates[b])) return Number.isNaN(estimates[a]) ? 1 : -1
      return estimates[b] - estimates[a]
    })
    expect(await shown(page)).toEqual(order.map((line) => lines[line].label))
    const word = lines[3].label.split(' ')[0]
    await page.getByLabel('Find').focus()
    await page.keyboard.type(word.toLowerCase())
    const found = lines.filter(({ label }) => label.includes(word))
    expect((await shown(page)).sort()).toEqual(found.map(({ label }) => label).sort())
    expect(await page.getByRole('status').first().textContent()).toBe(`${found.length} of ${lines.length} shown`)
  })
})

it('open where the address names one, and have its numbers', async () => {
  await open('with', async (page) => {
    await page.evaluate(() => {
      location.hash = '#line-2'
    })
    await page.waitForFunction(() => (document.getElementById('line-2') as HTMLDetailsElement).open)
    const text = (await page.locator('#line-2').textContent()) as string
    const jump = outcomes[0].lines[1] as Jump
    expect(text).toContain(jump.corrected.estimate.toFixed(4).replace('-', '−'))
    expect(text).toContain(`${((lines[1].length_m as number) / 1000).toFixed(2)} km`)
    expect(text).toContain(lines[1].zones?.join(' | '))
  })
})

it('have nothing against them when all are open, and fit a small screen', async () => {
  const source = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8')
  const options = { bypassCSP: true, viewport: { width: 320, height: 800 } }
  await open(
    'with',
    async (page) => {
      await page.getByRole('button', { name: 'Open all shown' }).click()
      expect(await page.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(320)
      await page.evaluate(source)
      const found = await page.evaluate(async () => {
        const results = await (window as unknown as { axe: typeof axe }).axe.run('#passports')
        return results.violations.map(({ id, nodes }) => ({ id, html: nodes[0].html.slice(0, 200) }))
      })
      expect(found).toEqual([])
    },
    options,
  )
})

it('are a list that opens without the script', async () => {
  await open('without', async (page) => {
    expect(await shown(page)).toEqual(lines.map(({ label }) => label))
    await page.locator('#line-1 summary').click()
    expect(await page.locator('#line-1 table').first().isVisible()).toBe(true)
    expect(await page.locator('.passport-controls').count()).toBe(0)
  })
})
