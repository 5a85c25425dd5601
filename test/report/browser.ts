/** Chromium with the network off, for pages in a folder. */
import { join } from 'node:path'
import { pathToFileURL } from 'node:url'
import { type Browser, type BrowserContextOptions, chromium, type Page } from 'playwright-core'

export interface Seen {
  readonly requests: string[]
  readonly messages: string[]
}

export function launch(): Promise<Browser> {
  return chromium.launch({
    executablePath: '/usr/bin/chromium',
    args: [
      '--no-sandbox',
      '--disable-gpu',
      '--disable-quic',
      '--no-first-run',
      '--disable-background-networking',
      '--disable-component-update',
      '--disable-sync',
    ],
  })
}

/** Opens `name`.html (with an address within it), hands it over with what it asks for and says, and closes it. */
export async function openPage(
  browser: Browser,
  folder: string,
  name: string,
  options: BrowserContextOptions,
  use: (page: Page, seen: Seen) => Promise<void>,
  hash = '',
): Promise<void> {
  const context = await browser.newContext({ offline: true, ...options })
  const url = pathToFileURL(join(folder, `${name}.html`)).href
  const seen: Seen = { requests: [], messages: [] }
  const isPage = (asked: string) => asked.split('#')[0] === url
  await context.route(
    (asked) => !isPage(asked.href),
    (route) => route.abort(),
  )
  const page = await context.newPage()
  page.on(
    'request',
    (request) => !isPage(request.url()) && !request.url().startsWith('data:') && seen.requests.push(request.url()),
  )
  page.on('console', (message) => seen.messages.push(message.text()))
  page.on('pageerror', (error) => seen.messages.push(String(error)))
  await page.goto(`${url}${hash}`, { waitUntil: 'load' })
  await use(page, seen)
  await context.close()
}
