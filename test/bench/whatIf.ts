/**
 * The panel of a study with 500 lines in the browser: milliseconds of one step of its slider, with all figures laid out, and
 * the size of the page. Needs Chromium.
 */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { launch, openPage } from '../report/browser.js'
import { analysisOf, inputsOf, inventUnits, pageOf, pageScript, studyOf } from '../report/whatIfStudies.js'

export async function benchWhatIf(lines = 500, units = 300_000): Promise<void> {
  const folder = mkdtempSync(join(tmpdir(), 'bench-what-if-'))
  const browser = await launch()
  try {
    const study = studyOf('')
    const page = pageOf(study, analysisOf(study, inputsOf(inventUnits(units, lines, 1))), pageScript())
    writeFileSync(join(folder, 'page.html'), page)
    await openPage(browser, folder, 'page', {}, async (tab) => {
      const steps = await tab.evaluate(() => {
        const slider = document.getElementById('what-if-bandwidth') as HTMLInputElement
        return Array.from({ length: 30 }, (_, i) => {
          const begun = performance.now()
          slider.value = String(i % (Number(slider.max) + 1))
          slider.dispatchEvent(new Event('input'))
          document.getElementById('what-if-forest-title')?.getBoundingClientRect()
          return performance.now() - begun
        })
      })
      const [first] = steps
      const rest = steps.slice(1).sort((a, b) => a - b)
      const shown = [first, rest[14], rest[28]].map((ms) => ms.toFixed(1)).join(', ')
      console.log(
        `what if: ${lines} lines, page of ${(page.length / 1e6).toFixed(2)} MB; ms of a step (first, middle, slowest): ${shown}`,
      )
    })
  } finally {
    await browser.close()
    rmSync(folder, { recursive: true, force: true })
  }
}
