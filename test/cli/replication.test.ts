/** Replication folders: every exhibit again, byte for byte, with the records and without; what changed is named. */
import { createHash } from 'node:crypto'
import { appendFileSync, cpSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Jump, Results } from '../../src/results.js'
import { borderStudy, bytesUnder, newRoom, scarp, scheduleStudy, scoreStudy, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

const rebuild = (folder: string, ...words: string[]) => scarp(['rebuild', folder, ...words], { cwd: room })
const text = (...path: string[]) => readFileSync(join(room, ...path), 'utf8')
const pooled = (...folder: string[]) =>
  (JSON.parse(text(...folder, 'results.json')) as Results).outcomes.map((outcome) => outcome.pooled as Jump)

/** Changes a file of a folder and its hash in the list, as one who wants it to pass would. */
function change(folder: string, file: string, how: (text: string) => string): void {
  const changed = how(text(folder, file))
  expect(changed).not.toBe(text(folder, file))
  writeFileSync(join(room, folder, file), changed)
  const manifest = JSON.parse(text(folder, 'replication.json'))
  for (const one of manifest.files)
    if (one.file === file) one.sha256 = createHash('sha256').update(changed).digest('hex')
  writeFileSync(join(room, folder, 'replication.json'), JSON.stringify(manifest, null, 2))
}

describe('a replication folder', () => {
  beforeAll(async () => {
    writeFiles(join(room, 'pupils'), scheduleStudy())
    const study = text('pupils', 'study.yaml').replace('  file: pupils.csv', '  file: pupils.csv\n  cluster: year')
    writeFileSync(join(room, 'pupils', 'study.yaml'), study)
    for (const words of [[], ['--with-inputs', '--out', 'whole']])
      expect((await scarp(['replicate', 'pupils/study.yaml', '--quiet', ...words], { cwd: room })).code).toBe(0)
  })

  const copy = (name: string, from = 'pupils-replication') => {
    cpSync(join(room, from), join(room, name), { recursive: true })
    return name
  }

  it('has the results of an ordinary run but for when it ran, without units.csv', async () => {
    const said = await scarp(['run', 'pupils/study.yaml', '--out', 'pupils-run', '--quiet'], { cwd: room })
    expect(said.code).toBe(0)
    const timeless = (folder: string) => {
      const { started: _, seconds: __, ...rest } = JSON.parse(text(folder, 'results.json'))
      return rest
    }
    expect(timeless(join('pupils-replication', 'results'))).toEqual(timeless('pupils-run'))
    const published = bytesUnder(join(room, 'pupils-replication', 'results'))
    const ran = Object.keys(bytesUnder(join(room, 'pupils-run')))
    expect(ran.filter((file) => !(file in published))).toEqual(['units.csv'])
    expect(Object.keys(published).filter((file) => !ran.includes(file))).toEqual([])
  })

  it('that holds its inputs runs from them, and as a study too', async () => {
    const said = await rebuild('whole')
    expect(said).toMatchObject({ code: 0, stderr: '' })
    expect(said.stdout).toContain('the inputs are those of the published run')
    const ran = await scarp(['run', 'whole/inputs/study.yaml', '--out', 'ran', '--quiet'], { cwd: room })
    expect(ran.code).toBe(0)
    expect(pooled('ran')).toEqual(pooled('whole', 'results'))
  })

  it('takes inputs that are put where they belong', async () => {
    const name = copy('filled')
    for (const file of ['pupils.csv', 'cutoffs.csv'])
      cpSync(join(room, 'pupils', file), join(room, name, 'inputs', file))
    expect((await rebuild(name)).stdout).toContain('the inputs are those of the published run')
  })

  it('names an input that changed, and one that is absent', async () => {
    cpSync(join(room, 'pupils'), join(room, 'mended'), { recursive: true })
    appendFileSync(join(room, 'mended', 'pupils.csv'), '50,2001,north,20\n')
    rmSync(join(room, 'mended', 'cutoffs.csv'))
    const said = await rebuild('pupils-replication', '--inputs', 'mended', '--out', 'never')
    expect(said).toMatchObject({ code: 2, stdout: '' })
    expect(said.stderr).toMatch(
      /^mended\/pupils\.csv: input: it has changed: its SHA-256 begins [0-9a-f]{12}, and was [0-9a-f]{12}; .*\nmended\/cutoffs\.csv: input: there is no such file; .*\n$/,
    )
    expect(readdirSync(room)).not.toContain('never')
    const name = copy('stale', 'whole')
    appendFileSync(join(room, name, 'inputs', 'cutoffs.csv'), '2003,north,50\n')
    expect((await rebuild(name)).stderr).toMatch(/^stale\/inputs\/cutoffs\.csv: replication: it has changed/)
  })

  it('names a file of its own that changed or is gone, and lets the author write the README', async () => {
    const name = copy('worn')
    appendFileSync(join(room, name, 'README.md'), '\nOur paper.\n')
    rmSync(join(room, name, 'log.txt'))
    expect((await rebuild(name)).code).toBe(0)
    appendFileSync(join(room, name, 'results', 'lines.csv'), ' ')
    rmSync(join(room, name, 'drawn.json'))
    const said = await rebuild(name)
    expect(said.code).toBe(2)
    expect(said.stderr).toMatch(
      /^worn\/results\/lines\.csv: replication: it has changed.*\nworn\/drawn\.json: .* no such file;/,
    )
  })

  it('is told from one whose exhibits are others than it makes', async () => {
    const name = copy('painted')
    change(name, 'results/lines.csv', (lines) => lines.replace('2001', '2011'))
    const said = await rebuild(name)
    expect(said.code).toBe(2)
    expect(said.stderr).toMatch(/^painted-rebuilt\/lines\.csv: rebuilt: it differs from the published file; /)
    expect(said.stderr.split('\n')).toHaveLength(2)
  })

  it('is told from one whose numbers are others than its units give', async () => {
    const name = copy('adjusted')
    const { estimate } = pooled(name, 'results')[0].corrected
    change(name, 'results/results.json', (json) =>
      json.replace(`"estimate": ${estimate}`, `"estimate": ${estimate + 0.1}`),
    )
    const said = await rebuild(name)
    expect(said.code).toBe(2)
    expect(said.stderr).toContain(
      `adjusted/results/results.json: outcomes[wage].pooled.corrected.estimate: published ${estimate + 0.1}, and `,
    )
  })

  it('without units draws its exhibits again', async () => {
    const made = await scarp(['replicate', 'pupils/study.yaml', '--without-units', '--out', 'bare'], { cwd: room })
    expect(made.stdout).toContain('no units are in it')
    expect(readdirSync(join(room, 'bare'))).not.toContain('units')
    const said = await rebuild('bare')
    expect(said).toMatchObject({ code: 0, stderr: '' })
    expect(bytesUnder(join(room, 'bare-rebuilt'))).toEqual(bytesUnder(join(room, 'bare', 'results')))
  })

  it('is written over its like alone, and never over the work of the author', async () => {
    const again = (...words: string[]) => scarp(['replicate', 'pupils/study.yaml', '--quiet', ...words], { cwd: room })
    expect((await again('--out', copy('twice'))).code).toBe(0)
    appendFileSync(join(room, 'twice', 'README.md'), 'Our paper.\n')
    writeFileSync(join(room, 'twice', 'inputs', 'pupils.csv'), 'grade\n')
    const said = await again('--out', 'twice')
    expect(said.code).toBe(2)
    expect(said.stderr).toMatch(
      /^twice: replication folder: files in it were edited or added: README\.md, inputs\/pupils\.csv; /,
    )
    expect((await again('--out', 'pupils')).stderr).toMatch(/^pupils: replication folder: it holds a file of the study/)
  })

  it('of a border keeps the shares of its lines, and says what positions would be needed for', async () => {
    writeFiles(join(room, 'levy'), borderStudy())
    const shares = 'piece,people\n"West | East, piece 2",30\n"West | East, piece 1",70\n'
    writeFileSync(join(room, 'levy', 'people.csv'), shares)
    const study = `${text('levy', 'study.yaml')}pooling: {target: {shares: people.csv, line: piece, value: people}}\n`
    writeFileSync(join(room, 'levy', 'study.yaml'), study)
    const replicate = (...words: string[]) => scarp(['replicate', ...words, '--quiet'], { cwd: room })
    expect(await replicate('levy/study.yaml')).toMatchObject({ code: 0, stderr: '' })
    expect(text('levy-replication', 'units', 'shares.csv')).toBe('piece,people\n2,30\n1,70\n')
    const said = await rebuild('levy-replication')
    expect(said).toMatchObject({ code: 0, stderr: '' })
    expect(said.stdout).toMatch(/ numbers are the published ones to the last bit, 0 but for rounding, 0 are not; /)
    writeFileSync(join(room, 'levy', 'pairs.csv'), 'one,other,people\nEast,West,100\nEast,Moor,7\n')
    const byPair = study.replace('people.csv, line: piece', 'pairs.csv, line: [one, other]')
    writeFileSync(join(room, 'levy', 'pairs.yaml'), byPair)
    expect(await replicate('levy/pairs.yaml', '--out', 'pairs')).toMatchObject({ code: 0, stderr: '' })
    expect(text('pairs', 'units', 'shares.csv')).toMatch(/^one,people\n1,50(\.\d+)?\n2,(50|49\.\d+)\n3,7\n$/)
    expect((await rebuild('pairs')).stdout).toMatch(/ to the last bit, 0 but for rounding, 0 are not; /)
    writeFileSync(join(room, 'levy', 'near.yaml'), `${study}covariates: [lat]\nestimation: {spatial: 300}\n`)
    expect((await replicate('levy/near.yaml', '--out', 'near')).code).toBe(0)
    const readme = text('near', 'README.md')
    expect(readme).toContain('its estimates are not the published ones for that')
    expect(readme).toMatch(/\n- column lat\n/)
    expect(readme).toMatch(/\n- the spatial variance: /)
    const again = await rebuild('near')
    expect(again).toMatchObject({ code: 0, stderr: '' })
    expect(again.stdout).toContain('every file is the published one, byte for byte')
  })

  it('refuses to copy inputs that lie elsewhere', async () => {
    writeFileSync(
      join(room, 'pupils', 'other.yaml'),
      text('pupils', 'study.yaml')
        .replace('pupils.csv', '../pupils/pupils.csv')
        .replace('cutoffs.csv', '../stale/units/schedule.csv'),
    )
    const said = await scarp(['replicate', 'pupils/other.yaml', '--with-inputs', '--out', 'far'], { cwd: room })
    expect(said.code).toBe(2)
    expect(said.stderr).toMatch(
      /--with-inputs: \.\.\/stale\/units\/schedule\.csv lies outside the folder of the study; /,
    )
  })

  it('of a study without any estimate is made all the same, and says so', async () => {
    const few = { ...scoreStudy(), 'households.csv': 'household,income,spending\na,10,1\nb,60,2\n' }
    writeFiles(join(room, 'few'), few)
    const said = await scarp(['replicate', 'few/study.yaml', '--quiet'], { cwd: room })
    expect(said).toMatchObject({ code: 3, stdout: '' })
    expect(said.stderr).toMatch(/^few\/study\.yaml: nothing can be estimated: .*; see few-replication\n$/)
    expect(await rebuild('few-replication')).toMatchObject({ code: 0, stderr: '' })
  })

  it.each([
    ['nowhere', /^nowhere: replication folder: there is no such folder; .*\n$/],
    ['pupils', /^pupils\/replication\.json: replication folder: there is no such file; .*\n$/],
  ])('is not %s', async (name, message) => {
    const said = await rebuild(name)
    expect(said).toMatchObject({ code: 2, stdout: '' })
    expect(said.stderr).toMatch(message)
  })
})

describe('a replication that is stopped while it writes', () => {
  it('leaves nothing half, and nothing at all after the next one', async () => {
    const folder = join(room, 'stopped')
    writeFiles(folder, scoreStudy())
    const replicate = (signal?: NodeJS.Signals) =>
      scarp(['replicate', 'study.yaml', '--quiet'], {
        cwd: folder,
        watch: (child) => {
          const before = readdirSync(folder)
          const poll = setInterval(() => {
            const begun = readdirSync(folder).filter((name) => !before.includes(name))
            if (signal === undefined || begun.length === 0) return
            clearInterval(poll)
            child.kill(signal)
          }, 1)
          return () => clearInterval(poll)
        },
      })
    expect((await replicate('SIGKILL')).code).toBe(null)
    expect(readdirSync(folder)).not.toContain('stopped-replication')
    expect((await replicate('SIGTERM')).code).toBe(null)
    expect(readdirSync(folder).sort()).toEqual(['households.csv', 'study.yaml'])
    expect((await replicate()).code).toBe(0)
    expect(readdirSync(folder).sort()).toEqual(['households.csv', 'stopped-replication', 'study.yaml'])
  })
})
