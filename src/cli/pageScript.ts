/** The script of the report's page, which `npm run build` bundles from `src/report/client`. */
import { existsSync, readFileSync } from 'node:fs'

const file = new URL('../report/pageScript.js', import.meta.url)

/** Undefined where it was not bundled: the page then has no panel. */
export function pageScript(): string | undefined {
  return existsSync(file) ? readFileSync(file, 'utf8').trimEnd() : undefined
}
