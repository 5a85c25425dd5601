/** A target whose weights come from a file: the numbers of the same weights as a column, and what is refused. */
import { rmSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, expect, it } from 'vitest'
import { seededRandom } from '../../src/math/index.js'
import type { Results, Target } from '../../src/results.js'
import { newRoom, scarp, writeFiles } from './studies.js'

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
  expect(Object.values(got.weights)).toEqual([0.1, 0.7, 0.2])
  expect(two.inputs).toContainEqual({ file: 'people.csv', sha256: expect.any(String), rows: 3 })
})

it('refuses a line without a share, one given twice, one that is none, and a share below 0, all at once', async () => {
  const { code, stderr } = await run('bad', byFile, 'valley,people\nCorrish,200\nCorrish,10\nBrenow,700\nAldmoor,-1\n')
  expect(code).toBe(2)
  expect(stderr.trim().split('\n')).toEqual([
    'people.csv:3: valley: line given twice: Corrish; keep one of the rows',
    'people.csv:4: valley: no line of the study: Brenow; write Aldmoor',
    'people.csv:5: people: must be 0 or more: -1; give every line a share of 0 or more',
    'people.csv: valley: no row for a line of the study: Brennow; give it a share, 0 to leave it out',
  ])
})

it('names a file that is not there, and a column that it has not', async () => {
  const gone = await run('gone', '{shares: persons.csv, line: valley, value: people}', good)
  expect(gone).toMatchObject({ code: 2, stderr: expect.stringMatching(/persons\.csv/) })
  const other = await run('other', '{shares: people.csv, line: valley, value: persons}', good)
  expect(other).toMatchObject({ code: 2, stderr: expect.stringMatching(/persons/) })
})
