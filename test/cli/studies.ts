/** Small invented studies, written to a folder of their own, and the built command to run on them. */
import { type ChildProcess, fork, spawn } from 'node:child_process'
import { createHash } from 'node:crypto'
import { existsSync, mkdirSync, mkdtempSync, readdirSync, readFileSync, realpathSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'

const command = new URL('../../dist/cli/main.js', import.meta.url).pathname

export interface Said {
  readonly code: number | null
  readonly stdout: string
  readonly stderr: string
}

export interface SpawnOptions {
  readonly cwd: string
  readonly env?: Record<string, string>
  /** Given the running process; what it returns is called when the process has ended. */
  readonly watch?: (child: ChildProcess) => () => void
}

const server = new URL('commandServer.mjs', import.meta.url).pathname
/** Processes that have the command loaded and are free. */
const free: ChildProcess[] = []

/**
 * Runs the built command on a command line: in a process that may have run others before, or, with `env` or `watch`, in one of its
 * own as a user would.
 */
export function scarp(words: readonly string[], options: SpawnOptions): Promise<Said> {
  if (!existsSync(command)) throw new Error('dist/ is missing: npm run build')
  return options.env || options.watch ? scarpAlone(words, options) : scarpAgain(words, options)
}

function scarpAgain(words: readonly string[], { cwd }: SpawnOptions): Promise<Said> {
  const child = free.pop() ?? fork(server, { stdio: ['ignore', 'ignore', 'inherit', 'ipc'] })
  child.ref()
  return new Promise((done, fail) => {
    const ended = (code: number | null) => fail(new Error(`scarp ${words.join(' ')}: ended with ${code}`))
    child.once('exit', ended)
    child.once('message', (said: Said) => {
      child.off('exit', ended)
      child.unref()
      child.channel?.unref()
      free.push(child)
      done(said)
    })
    child.channel?.ref()
    child.send({ words, cwd })
  })
}

/** Runs the built command in a process of its own. */
export function scarpAlone(words: readonly string[], options: SpawnOptions): Promise<Said> {
  return new Promise((done, fail) => {
    const child = spawn(process.execPath, [command, ...words], {
      cwd: options.cwd,
      env: { ...process.env, ...options.env },
      stdio: ['ignore', 'pipe', 'pipe'],
    })
    let stdout = ''
    let stderr = ''
    child.stdout.setEncoding('utf8').on('data', (text) => (stdout += text))
    child.stderr.setEncoding('utf8').on('data', (text) => (stderr += text))
    const ended = options.watch?.(child)
    child.on('error', fail)
    child.on('close', (code) => {
      ended?.()
      done({ code, stdout, stderr })
    })
  })
}

/** Runs `work` over `items`, two at a time: the machine the tests are meant for has two cores. */
export async function twoAtATime<T>(items: readonly T[], work: (item: T) => Promise<void>): Promise<void> {
  let next = 0
  const worker = async () => {
    while (next < items.length) await work(items[next++])
  }
  await Promise.all([worker(), worker()])
}

export function newRoom(): string {
  return realpathSync(mkdtempSync(join(tmpdir(), 'scarp-test-')))
}

export type Files = Readonly<Record<string, string>>

export function writeFiles(folder: string, files: Files): void {
  mkdirSync(folder, { recursive: true })
  for (const [name, text] of Object.entries(files)) writeFileSync(join(folder, name), text)
}

/** Path and SHA-256 of every file under a folder. */
export function bytesUnder(folder: string): Record<string, string> {
  const entries = readdirSync(folder, { recursive: true, withFileTypes: true }).filter((entry) => entry.isFile())
  const paths = entries.map((entry) => join(entry.parentPath, entry.name)).sort()
  return Object.fromEntries(
    paths.map((path) => [path.slice(folder.length + 1), createHash('sha256').update(readFileSync(path)).digest('hex')]),
  )
}

/** Mulberry32: a seeded stream of numbers in [0, 1), good enough to scatter units. */
export function scatter(seed: number): () => number {
  let state = seed
  return () => {
    state = (state + 0x6d2b79f5) | 0
    let t = Math.imul(state ^ (state >>> 15), 1 | state)
    t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296
  }
}

const rows = 400

/** A grant for households below an income of 50; the outcome jumps by 1. */
export function scoreStudy(): Files {
  const random = scatter(1)
  const lines = ['household,income,region,spending,visits']
  for (let i = 1; i <= rows; i++) {
    const income = Math.round(random() * 10_000) / 100
    const spending = 10 + income / 20 + (income < 50 ? 1 : 0) + random() - 0.5
    lines.push(
      `h${i},${income},${random() < 0.5 ? 'north' : 'south'},${spending.toFixed(4)},${Math.floor(random() * 5)}`,
    )
  }
  return {
    'study.yaml': `title: Grants in Marrowdale
records:
  file: households.csv
  id: household
outcomes: [spending]
line:
  score: income
  cutoff: 50
  treated: below
checks: none
`,
    'households.csv': `${lines.join('\n')}\n`,
  }
}

/** A grade that decides on a course, with cutoffs by year and region; the outcome jumps by 2. */
export function scheduleStudy(): Files {
  const random = scatter(2)
  const cutoffs: Record<string, number> = { '2001 north': 40, '2001 south': 50, '2002 north': 45, '2002 south': 55 }
  const lines = ['grade,year,region,wage']
  for (let i = 1; i <= rows * 2; i++) {
    const grade = Math.round(random() * 10_000) / 100
    const year = random() < 0.5 ? 2001 : 2002
    const region = random() < 0.5 ? 'north' : 'south'
    const wage = 20 + grade / 10 + (grade >= cutoffs[`${year} ${region}`] ? 2 : 0) + random()
    lines.push(`${grade},${year},${region},${wage.toFixed(4)}`)
  }
  const schedule = Object.entries(cutoffs).map(([key, cutoff]) => `${key.replace(' ', ',')},${cutoff}`)
  return {
    'study.yaml': `title: Courses in Marrowdale
records:
  file: pupils.csv
outcomes: [wage]
line:
  score: grade
  cutoff: {schedule: cutoffs.csv, by: [year, region], value: cutoff}
  treated: at-or-above
checks: none
`,
    'pupils.csv': `${lines.join('\n')}\n`,
    'cutoffs.csv': `year,region,cutoff\n${schedule.join('\n')}\n`,
  }
}

/** Two zones side by side, each about 1.4 km wide and 2.2 km high, with a levy in the eastern one; rents fall by 1. */
export function borderStudy(): Files {
  const random = scatter(3)
  const lines = ['lease,lon,lat,rent']
  for (let i = 1; i <= rows; i++) {
    const lon = 10 + (random() - 0.5) * 0.0398
    const lat = 50 + random() * 0.0198 + 0.0001
    lines.push(`L${i},${lon.toFixed(7)},${lat.toFixed(7)},${(8 - (lon > 10 ? 1 : 0) + random()).toFixed(4)}`)
  }
  return {
    'study.yaml': `title: Levy in Marrowdale
records:
  file: leases.csv
  id: lease
  position: [lon, lat]
outcomes: [rent]
line:
  zones: zones.geojson
  treated: [East]
  piece: 1200
  barriers: [{file: river.geojson, within: 10}]
checks: none
`,
    'leases.csv': `${lines.join('\n')}\n`,
    'zones.geojson': layer(
      zone('West', [
        [9.98, 50],
        [10, 50],
        [10, 50.02],
        [9.98, 50.02],
        [9.98, 50],
      ]),
      zone('East', [
        [10, 50],
        [10.02, 50],
        [10.02, 50.02],
        [10, 50.02],
        [10, 50],
      ]),
    ),
    'river.geojson': layer({
      type: 'Feature',
      properties: { name: 'Sill' },
      geometry: {
        type: 'LineString',
        coordinates: [
          [10.01, 49.99],
          [10.01, 50.03],
        ],
      },
    }),
  }
}

const zone = (name: string, ring: number[][]) => ({
  type: 'Feature',
  properties: { name },
  geometry: { type: 'Polygon', coordinates: [ring] },
})

/** A feature a line, so that a test can change one by its text. */
export function layer(...features: object[]): string {
  return `{"type": "FeatureCollection", "features": [\n${features.map((feature) => JSON.stringify(feature)).join(',\n')}\n]}\n`
}
