/** A target whose weights come from a file: the numbers of the same weights as a column, and what is refused. */
import { readFileSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, expect, it } from 'vitest'
import { seededRandom } from '../../src/math/index.js'
import type { Results, Target } from '../../src/results.js'
import { borderStudy, newRoom, scarp, scheduleStudy, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

const residents = { Aldmoor: 100, Brennow: 700, Corrish: 200 }
const study = (target: string) => `title: Bursaries in three valleys
records: {file: r.csv}
outcomes: [y]
line: {score: score, cutoff: {column: cut}, treated: at-or-above, compare_by: [valley]}
pooling: {target: ${target}}
checks: none
`

const random = seededRandom(5)
const rows = Object.entries(residents).flatMap(([valley, count], k) =>
  Array.from({ length: 300 }, () => {
    const score = 100 * random.next()
    const y = score / 50 + (score >= 40 + k ? k : 0) + random.normal()
    return [valley, count, 40 + k, score.toFixed(4), y.toFixed(4)].join(',')
  }),
)
const files = { 'r.csv': `valley,residents,cut,score,y\n${rows.join('\n')}\n` }
const good = 'valley,people\nCorrish,200\nAldmoor,100\nBrennow,700\n'
const byFile = '{shares: people.csv, line: valley, value: people}'

async function run(name: string, target: string, shares: string) {
  writeFiles(join(room, name), { ...files, 'study.yaml': study(target), 'people.csv': shares })
  return scarp(['run', `${name}/study.yaml`, '--out', `${name}-out`, '--json'], { cwd: room })
}

it('gives the numbers of a column, and names the file among the inputs', async () => {
  const [column, file] = [await run('column', '{column: residents}', good), await run('file', byFile, good)]
  expect(file).toMatchObject({ code: 0, stderr: '' })
  const [one, two] = [column, file].map(({ stdout }) => JSON.parse(stdout) as Results)
  const [wanted, got] = [one, two].map(
    ({ outcomes }) => outcomes[0].target as Exclude<Target, { not_estimated: string }>,
  )
  expect(got).toEqual({ ...wanted, kind: 'people' })
  expect(got.covers).toBe(1)
  expect(two.target_population).toEqual({ name: 'people', file: 'people.csv', total: 1000 })
  expect(Object.values(got.weights)).toEqual([0.1, 0.7, 0.2])
  expect(two.inputs).toContainEqual({ file: 'people.csv', sha256: expect.any(String), rows: 3 })
})

it('refuses a line without a share, one given twice, and a share below 0, all at once', async () => {
  const { code, stderr } = await run('bad', byFile, 'valley,people\nCorrish,200\nCorrish,10\nBrenow,700\nAldmoor,-1\n')
  expect(code).toBe(2)
  expect(stderr.trim().split('\n')).toEqual([
    'people.csv:3: valley: line given twice: Corrish on lines 2 and 3; keep one of the rows',
    'people.csv:5: people: must be 0 or more: -1; give every line a share of 0 or more',
    'people.csv: valley: no row for a line of the study: Brennow, while Brenow is no line; give it a share, 0 to leave it out',
  ])
})

it('names a file that is not there, and a column that it has not', async () => {
  const gone = await run('gone', '{shares: persons.csv, line: valley, value: people}', good)
  expect(gone).toMatchObject({ code: 2, stderr: expect.stringMatching(/persons\.csv/) })
  const other = await run('other', '{shares: people.csv, line: valley, value: persons}', good)
  expect(other).toMatchObject({ code: 2, stderr: expect.stringMatching(/persons/) })
})

it('passes over rows for other lines, and says so', async () => {
  const more = `${good}Dunmere,1000\n`
  const { code, stdout } = await run('more', byFile, more)
  expect(code).toBe(0)
  const { target_population: population, outcomes } = JSON.parse(stdout) as Results
  expect(population).toMatchObject({ total: 1000, rows_passed_over: 1, passed_over: 1000 })
  expect(outcomes[0].target).toMatchObject({ weights: { Aldmoor: 0.1, Brennow: 0.7, Corrish: 0.2 } })
  const page = readFileSync(join(room, 'more-out', 'report.html'), 'utf8')
  expect(page).toContain(
    'Its population: people of people.csv, 1,000 in all; 1 row there for no cutoff of the study left out.',
  )
  const said = await scarp(['inspect', 'more/study.yaml'], { cwd: room })
  expect(said.stdout).toMatch(/^doubtful\n {2}1 row of people\.csv for no line of the study: 50% of all people$/m)
})

it('is refused by inspect as by run', async () => {
  writeFiles(join(room, 'early'), {
    ...files,
    'study.yaml': study(byFile),
    'people.csv': 'valley,people\nCorrish,200\n',
  })
  const said = await scarp(['inspect', 'early/study.yaml'], { cwd: room })
  expect(said).toMatchObject({ code: 2, stdout: '' })
  expect(said.stderr.trim().split('\n')).toHaveLength(2)
})

async function targetOf(name: string, files: Record<string, string>, target: string, shares: string) {
  const text = files['study.yaml'].replace('checks: none', `checks: none\npooling: {target: ${target}}`)
  writeFiles(join(room, name), { ...files, 'study.yaml': text, 'people.csv': shares })
  const { stdout, stderr } = await scarp(['run', `${name}/study.yaml`, '--out', `${name}-out`, '--json'], { cwd: room })
  expect(stderr).toBe('')
  const resolved = readFileSync(join(room, `${name}-out`, 'study.resolved.yaml'), 'utf8')
  const results = JSON.parse(stdout) as Results
  return { results, resolved, target: results.outcomes[0].target as Exclude<Target, { not_estimated: string }> }
}

it('joins the columns of a key, and survives being written out', async () => {
  const shares = 'region,year,people\nnorth,2001,1\nsouth,2001,2\nnorth,2002,3\nsouth,2002,4\n'
  const made = await targetOf(
    'keys',
    scheduleStudy(),
    '{shares: people.csv, line: [year, region], value: people}',
    shares,
  )
  expect(made.target.weights).toEqual({
    '2001, north': 0.1,
    '2001, south': 0.2,
    '2002, north': 0.3,
    '2002, south': 0.4,
  })
  writeFiles(join(room, 'keys'), { 'study.yaml': made.resolved })
  const again = await scarp(['run', 'keys/study.yaml', '--out', 'again', '--json'], { cwd: room })
  expect((JSON.parse(again.stdout) as Results).outcomes).toEqual(made.results.outcomes)
})

it('divides the share of a pair of zones among its pieces by length', async () => {
  const made = await targetOf(
    'pair',
    borderStudy(),
    '{shares: people.csv, line: [one, other], value: people}',
    'one,other,people\nEast,West,60\n',
  )
  const { lines } = made.results
  expect(lines.length).toBeGreaterThan(1)
  const metres = lines.reduce((sum, line) => sum + (line.length_m as number), 0)
  for (const line of lines) expect(made.target.weights[line.line]).toBeCloseTo((line.length_m as number) / metres, 12)
  expect(made.results.target_population?.total).toBeCloseTo(60, 10)
})
