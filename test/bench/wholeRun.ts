/**
 * One line from a CSV of a million rows to results, in one process: seconds for reading, placing and estimating.
 * The file is made in a temporary folder from a seeded generator and removed.
 */
import { createWriteStream, mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { analyze, wantedColumns } from '../../src/analyze.js'
import { seededRandom } from '../../src/math/index.js'
import { readTable } from '../../src/records/files.js'
import { readStudy } from '../../src/study/index.js'

async function writeRecords(path: string, rows: number): Promise<void> {
  const random = seededRandom(rows)
  const out = createWriteStream(path)
  out.write('id,score,outcome,weight\n')
  for (let start = 0; start < rows; start += 10_000) {
    let text = ''
    for (let i = start; i < Math.min(rows, start + 10_000); i++) {
      const score = 40_000 * random.next()
      const outcome = Math.cos(score / 20_000) + (score < 21_000 ? 0.3 : 0) + 0.5 * random.next()
      text += `${i},${score.toFixed(3)},${outcome.toFixed(5)},${(0.5 + random.next()).toFixed(3)}\n`
    }
    if (!out.write(text)) await new Promise<void>((done) => out.once('drain', () => done()))
  }
  await new Promise<void>((done) => out.end(() => done()))
}

export async function benchWholeRun(sizes: readonly number[] = [1e5, 1e6]): Promise<void> {
  const folder = mkdtempSync(join(tmpdir(), 'bench-'))
  const read = readStudy(
    'records: {file: records.csv}\noutcomes: [outcome]\nline: {score: score, cutoff: 21000, treated: below}\nchecks: none\n',
    'study.yaml',
  )
  if (!read.ok) throw new Error(read.problems[0].what)
  console.log('CSV to results, one line, mse bandwidth: wall seconds')
  console.log('rows         reading  placing and estimating')
  try {
    for (const rows of sizes) {
      const path = join(folder, 'records.csv')
      await writeRecords(path, rows)
      const marks = [performance.now()]
      const table = await readTable(path, { wanted: wantedColumns(read.value).records, shownAs: 'records.csv' })
      if (!table.ok) throw new Error(table.problems[0].what)
      marks.push(performance.now())
      const analysis = analyze(read.value, { table: table.value }, { version: 'bench', started: '' })
      if (!analysis.ok) throw new Error(analysis.problems[0].what)
      marks.push(performance.now())
      const [reading, estimating] = marks.slice(1).map((mark, i) => ((mark - marks[i]) / 1000).toFixed(3))
      console.log(`${String(rows).padEnd(10)} ${reading.padStart(9)} ${estimating.padStart(10)}`)
    }
  } finally {
    rmSync(folder, { recursive: true, force: true })
  }
}
