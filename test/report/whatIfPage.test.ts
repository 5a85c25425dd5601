/** The panel in a real browser, network off: by mouse, by keyboard and by address, with the program's own numbers. */
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type axe from 'axe-core'
import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { addressOf, type State } from '../../src/report/client/address.js'
import type { Analysis, Jump } from '../../src/results.js'
import { launch, openPage, type Seen } from './browser.js'
import { pooledOf, runExample } from './whatIfExamples.js'
import { pageOf, pageScript } from './whatIfStudies.js'

const folder = mkdtempSync(join(tmpdir(), 'what-if-page-'))
const axeSource = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8')
const script = pageScript()
let browser: Browser

beforeAll(async () => {
  browser = await launch()
})

afterAll(async () => {
  await browser?.close()
  rmSync(folder, { recursive: true, force: true })
})

const answer = (page: Page) => page.locator('#what-if-answer').textContent()
const slider = (page: Page) => page.locator('#what-if-bandwidth')
const hash = (page: Page) => page.evaluate(() => location.hash)
/** Estimate, low, high and p, with all their digits. */
const numbers = (page: Page) =>
  page.evaluate(() =>
    [...document.querySelectorAll<HTMLDataElement>('#what-if-answer data')].map((one) => Number(one.value)),
  )

/** Of the number itself. */
const tolerance = 1e-9

describe.each([
  ['hedgerows', 'soil_kept'],
  ['quillhaven', 'log_rent'],
])('the panel of %s', (name, outcome) => {
  let states: State[]
  let analysis: Analysis
  let own: Jump

  beforeAll(async () => {
    const first = await runExample(name)
    const bandwidths = first.analysis.exhibits.outcomes[0].whatIf?.pooled?.bandwidths ?? []
    expect(bandwidths.length).toBeGreaterThanOrEqual(20)
    states = [
      { outcome, side: 'both', bandwidth: bandwidths[3] },
      { outcome, side: 'both', bandwidth: bandwidths[12], kernel: 'uniform', order: 2 },
      { outcome, side: 'both', bandwidth: bandwidths[18], kernel: 'epanechnikov' },
    ]
    analysis = (await runExample(name, states)).analysis
    own = first.analysis.results.outcomes[0].pooled as Jump
    writeFileSync(join(folder, `${name}.html`), pageOf(first.study, first.analysis, script))
  })

  const open = (use: (page: Page, seen: Seen) => Promise<void>, address = '', options = {}) =>
    openPage(browser, folder, name, options, use, address)

  it('gives the program’s numbers, and asks for nothing and says nothing', async () => {
    await open(async (page, seen) => {
      for (const [place, state] of states.entries()) {
        await page.evaluate((address) => {
          location.hash = address
        }, addressOf(state))
        await page.waitForFunction(
          (width) => document.querySelector('#what-if-width')?.textContent?.startsWith(width),
          String(Number((state.bandwidth as number).toPrecision(4))),
        )
        const { estimate, low, high, p } = pooledOf(analysis, outcome, place).corrected
        const wanted = [estimate, low, high, p]
        for (const [i, value] of (await numbers(page)).entries())
          expect(Math.abs(value - wanted[i])).toBeLessThanOrEqual(tolerance * Math.abs(wanted[i]))
      }
      expect(seen).toEqual({ requests: [], messages: [] })
    })
  })

  it('follows keys and mouse, and goes back to the study’s choice with one press', async () => {
    await open(async (page, seen) => {
      const before = await answer(page)
      const { estimate, low, high, p } = own.corrected
      expect(before).toContain('This is the study’s choice.')
      expect(await numbers(page)).toEqual([estimate, low, high, p])
      await slider(page).focus()
      await page.keyboard.press('ArrowRight')
      const right = await answer(page)
      expect(right).not.toBe(before)
      expect(await hash(page)).toMatch(/^#what-if\?outcome=\w+&bandwidth=[\d.]+$/)
      expect(await slider(page).getAttribute('aria-valuetext')).toBe(await page.locator('#what-if-width').textContent())
      await page.keyboard.press('Home')
      const lowest = await answer(page)
      const box = await slider(page).boundingBox()
      if (!box) throw new Error('no slider')
      await slider(page).click({ position: { x: 0.35 * box.width, y: box.height / 2 } })
      expect([right, lowest]).not.toContain(await answer(page))
      await page.getByRole('button', { name: 'Back to the study’s choice' }).click()
      expect(await answer(page)).toBe(before)
      expect(await hash(page)).toBe(`#what-if?outcome=${outcome}`)
      await slider(page).press('End')
      const widest = await answer(page)
      await page.evaluate(() => {
        location.hash = '#what-if'
      })
      expect(await answer(page)).toBe(widest)
      expect(seen).toEqual({ requests: [], messages: [] })
    })
  })

  it('is restored from its address', async () => {
    let shown: string | null = null
    let address = ''
    await open(async (page) => {
      await page.getByLabel('Kernel', { exact: true }).selectOption('uniform')
      await page.getByLabel('Order', { exact: true }).selectOption('2')
      await page.getByLabel('Bandwidth that moves').selectOption('treated')
      await slider(page).focus()
      await page.keyboard.press('ArrowLeft')
      shown = await page.locator('#what-if-panel').textContent()
      address = await hash(page)
    })
    expect(address).toMatch(/^#what-if\?outcome=\w+&bandwidth\.treated=[\d.]+&kernel=uniform&order=2$/)
    await open(async (page) => expect(await page.locator('#what-if-panel').textContent()).toBe(shown), address)
    await open(async (page) => {
      expect(await page.locator('#what-if-panel').textContent()).toMatch(
        /123,456 ?m? is not among the bandwidths here; /,
      )
    }, '#what-if?bandwidth=123456')
  })

  it('shows a line at its own bandwidths', async () => {
    await open(async (page) => {
      const lines = await page.locator('#what-if-line option').count()
      expect(lines).toBe(analysis.results.lines.length + 1)
      const pooled = await answer(page)
      await page.getByLabel('Of', { exact: true }).selectOption({ index: 1 })
      expect(await answer(page)).not.toBe(pooled)
      expect(await answer(page)).toContain(analysis.results.lines[0].label)
      const curves = () => page.locator('#what-if-panel figure path[stroke-width="2.2"]').count()
      expect(await curves()).toBe(0)
      const tick = page.getByLabel('Draw the plain curves')
      // clusters tie the sides of this study's lines together
      if (name === 'quillhaven') return expect(await tick.isDisabled()).toBe(true)
      await tick.check()
      expect(await curves()).toBe(2)
      expect(await hash(page)).toMatch(/&fit=plain$/)
    })
  })

  it.each(['light', 'dark'] as const)(
    'has nothing against it in %s, and no figure without words',
    async (colorScheme) => {
      await open(
        async (page) => {
          await page.evaluate(axeSource)
          const found = await page.evaluate(async () => {
            const results = await (window as unknown as { axe: typeof axe }).axe.run('#what-if')
            return results.violations.map(({ id, nodes }) => ({
              id,
              html: nodes.map((node) => node.html.slice(0, 200)),
            }))
          })
          expect(found).toEqual([])
          const words = await page.evaluate(() =>
            [...document.querySelectorAll('#what-if svg')].map(
              (svg) => svg.querySelector('desc')?.textContent?.length ?? 0,
            ),
          )
          expect(words.length).toBe(3)
          for (const length of words) expect(length).toBeGreaterThan(60)
        },
        addressOf(states[1]),
        { colorScheme, bypassCSP: true },
      )
    },
  )

  it('fits a narrow window, prints its state, and is not there without scripts', async () => {
    await open(
      async (page) => expect(await page.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(320),
      addressOf(states[0]),
      { viewport: { width: 320, height: 800 } },
    )
    await open(async (page) => {
      await page.emulateMedia({ media: 'print' })
      expect(await page.locator('#what-if-answer').isVisible()).toBe(true)
      expect(await page.locator('#what-if button').isVisible()).toBe(false)
    }, addressOf(states[0]))
    await open(
      async (page) => {
        expect(await page.locator('#what-if').isVisible()).toBe(false)
        expect(await page.locator('nav a[href="#what-if"]').isVisible()).toBe(false)
        expect(await page.locator('#answer').isVisible()).toBe(true)
      },
      '',
      { javaScriptEnabled: false },
    )
  })
})

it('is small', () => {
  expect(script.length).toBeLessThan(60_000)
  expect(script).not.toMatch(/<\/script|eval\(|new Function|fetch\(|XMLHttpRequest/)
})
