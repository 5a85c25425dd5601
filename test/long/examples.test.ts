/**
 * The example studies over many seeds of their generators, analysed in process: how often corrected 95% intervals cover
 * what was planted. The files in boundaries/ are one seed each; this is the evidence that they are not a lucky one.
 */
import { mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { dirname, join } from 'node:path'
import { describe, expect, it } from 'vitest'
import { analyze, type LayerInput, wantedColumns } from '../../src/analyze.js'
import { readTable } from '../../src/records/files.js'
import type { Jump, Results } from '../../src/results.js'
import { readStudy } from '../../src/study/index.js'
import { trueEffects as grantEffects, hedgerowFiles } from '../examples/hedgerows/farms.js'
import { trueEffects as levyEffects, quillhavenFiles } from '../examples/quillhaven/leases.js'

async function run(example: string, files: Record<string, string>): Promise<Results> {
  const folder = mkdtempSync(join(tmpdir(), 'examples-'))
  try {
    for (const [path, text] of Object.entries(files)) {
      mkdirSync(dirname(join(folder, path)), { recursive: true })
      writeFileSync(join(folder, path), text)
    }
    const study = readStudy(readFileSync(`boundaries/${example}/study.yaml`, 'utf8'), `${example}/study.yaml`)
    if (!study.ok) throw new Error(study.problems[0].what)
    const { records, line } = study.value
    const wanted = wantedColumns(study.value)
    const read = async (file: string, columns = wanted.records, keep?: string) => {
      const table = await readTable(join(folder, example, file), { wanted: columns, keep, shownAs: file })
      if (!table.ok) throw new Error(table.problems[0].what)
      return table.value
    }
    const layer = (file: string): LayerInput => ({
      file,
      content: JSON.parse(files[`${example}/${file}`]),
      sha256: '',
    })
    const table = await read(records.file, wanted.records, records.keep)
    const inputs =
      line.kind === 'border'
        ? { table, zones: layer(line.zones.file), barriers: line.barriers.map(({ file }) => layer(file)) }
        : { table, schedule: await read('cutoffs.csv', wanted.schedule) }
    const analysis = analyze(study.value, inputs, { version: 'test', started: '' })
    if (!analysis.ok) throw new Error(analysis.problems[0].what)
    return analysis.value.results
  } finally {
    rmSync(folder, { recursive: true, force: true })
  }
}

const seeds = Array.from({ length: 40 }, (_, i) => 1000 + i)

/** Of 40 intervals of level 95%, fewer than 33 cover with probability below 0.001 (binomial). */
function report(name: string, estimates: readonly Jump['corrected'][], truths: readonly number[]): void {
  const covered = estimates.filter(({ low, high }, i) => low <= truths[i] && truths[i] <= high).length
  const errors = estimates.map(({ estimate }, i) => estimate - truths[i])
  const mean = errors.reduce((sum, error) => sum + error, 0) / errors.length
  const sd = Math.sqrt(errors.reduce((sum, error) => sum + (error - mean) ** 2, 0) / (errors.length - 1))
  const error = (sd / Math.sqrt(errors.length)).toFixed(4)
  console.log(`${name}: ${covered} of ${estimates.length} intervals cover; mean error ${mean.toFixed(4)} (${error})`)
  expect(covered).toBeGreaterThanOrEqual(33)
}

describe('planted effects over 40 seeds', () => {
  it('Quillhaven', async () => {
    const found: Results[] = []
    const fixed = quillhavenFiles()
    for (const seed of seeds) found.push(await run('quillhaven', { ...fixed, ...quillhavenFiles(seed) }))
    for (const [i, name] of (['log_rent', 'vacant'] as const).entries()) {
      const pooled = found.map(({ outcomes }) => (outcomes[i].pooled as Jump).corrected)
      report(
        `${name}, pooled`,
        pooled,
        pooled.map(() => levyEffects[name]),
      )
    }
  })
  it('Hedgerows', async () => {
    const found: Results[] = []
    for (const seed of seeds) found.push(await run('hedgerows', hedgerowFiles(seed)))
    const truthOf = (results: Results, weights: Readonly<Record<string, number>>) =>
      results.lines.reduce((sum, { line }) => {
        const known = grantEffects.soil_kept.lines.find(({ year, region }) => line === `${year}, ${region}`)
        return sum + weights[line] * (known as { effect: number }).effect
      }, 0)
    const soil = found.map(({ outcomes }) => outcomes[0].pooled as Jump & { weights: Record<string, number> })
    report(
      'soil_kept, pooled',
      soil.map(({ corrected }) => corrected),
      soil.map(({ weights }, i) => truthOf(found[i], weights)),
    )
    const replanted = found.map(({ outcomes }) => (outcomes[1].pooled as Jump).corrected)
    report(
      'replanted, pooled',
      replanted,
      replanted.map(() => grantEffects.replanted),
    )
  })
})
