/** What leaves with a replication folder: outcomes of single units, and nothing that says who or where they are. */
import { cpSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { newRoom, scarp } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

interface Unit {
  readonly lon: string
  readonly lat: string
  readonly outcome: string
}

let units: Unit[]
let feet: string[]
let files: { readonly path: string; readonly text: string }[]

beforeAll(async () => {
  cpSync('boundaries/quillhaven', join(room, 'town'), { recursive: true })
  const [head, ...all] = readFileSync(join(room, 'town', 'leases.csv'), 'utf8')
    .trimEnd()
    .split('\n')
  const names = head.split(',')
  const at = (name: string) => names.indexOf(name)
  const rows = all.slice(0, 6000).map((row) => row.split(','))
  // two rows to a tenant, so that the id ties rows together
  const marked = rows.map((cells, i) => {
    const other = cells.map((cell, k) => (k === at('block') && cell !== '' ? `street#${cell}#` : cell))
    return [...other, `tenant#${i % 3000}#`].join(',')
  })
  writeFileSync(join(room, 'town', 'leases.csv'), `${head},tenant\n${marked.join('\n')}\n`)
  units = rows.map((cells) => ({ lon: cells[at('lon')], lat: cells[at('lat')], outcome: cells[at('log_rent')] }))
  const study = readFileSync(join(room, 'town', 'study.yaml'), 'utf8').replace('id: lease', 'id: tenant')
  writeFileSync(join(room, 'town', 'study.yaml'), `${study}covariates: [floor_area, lat]\n`)
  for (const words of [['replicate'], ['run', '--out', 'ran']]) {
    const said = await scarp([...words, 'town/study.yaml', '--quiet'], { cwd: room })
    expect(said).toEqual({ code: 0, stdout: '', stderr: '' })
  }
  const [, ...placed] = readFileSync(join(room, 'ran', 'units.csv'), 'utf8')
    .trimEnd()
    .split('\n')
  feet = placed.flatMap((row) => row.split(',').slice(-3, -1))
  const folder = join(room, 'town-replication')
  files = readdirSync(folder, { recursive: true, withFileTypes: true })
    .filter((entry) => entry.isFile())
    .map((entry) => join(entry.parentPath, entry.name))
    .map((path) => ({ path: path.slice(folder.length + 1), text: readFileSync(path, 'utf8') }))
})

const unitsCsv = () => (files.find(({ path }) => path === 'units/units.csv')?.text ?? '').trimEnd().split('\n')

describe('a replication folder', () => {
  it('has neither ids nor the names of clusters', () => {
    expect(files.length).toBeGreaterThan(50)
    expect(files.filter(({ text }) => /(tenant|street)#/.test(text)).map(({ path }) => path)).toEqual([])
  })

  it('has no position of a unit, whole or to a metre, and none as a column', () => {
    const short = (value: string) => Number(value).toFixed(5)
    for (const { path, text } of files) {
      const found = text.match(/-?\d+\.\d{4,}/g) ?? []
      const whole = new Set(found)
      const pairs = new Set(found.slice(1).map((value, i) => `${short(found[i])} ${short(value)}`))
      const known = units.filter(
        ({ lon, lat }) => (whole.has(lon) && whole.has(lat)) || pairs.has(`${short(lon)} ${short(lat)}`),
      )
      expect(known, path).toEqual([])
    }
    const [head] = unitsCsv()
    expect(head).toBe('line,x,unit,block,log_rent,vacant,floor_area')
  })

  it('has no foot of a unit on the border', () => {
    const vertices = new Set(
      files.find(({ path }) => path === 'results/borders.geojson')?.text.match(/-?\d+\.\d{6,}/g) ?? [],
    )
    const telling = new Set(feet.filter((value) => /\.\d{6,}$/.test(value) && !vertices.has(value)))
    expect(telling.size).toBeGreaterThan(1000)
    for (const { path, text } of files)
      expect(
        (text.match(/-?\d+\.\d{6,}/g) ?? []).filter((value) => telling.has(value)),
        path,
      ).toEqual([])
  })

  it('has its units in an order that is not that of the records, numbered in that order', () => {
    const [head, ...rows] = unitsCsv().map((row) => row.split(','))
    const column = (name: string) => rows.map((cells) => cells[head.indexOf(name)])
    const places = (values: string[]) => values.map((value) => units.findIndex(({ outcome }) => outcome === value))
    const inOrder = places(column('log_rent')).filter((place, i, all) => i === 0 || place > all[i - 1]).length
    // of a random order one half
    expect(inOrder / rows.length).toBeLessThan(0.6)
    const firsts = [...new Set(column('unit').filter((unit) => unit !== ''))]
    expect(firsts).toEqual(firsts.map((_, i) => `${i + 1}`))
  })

  it('says that it holds units', () => {
    const readme = files.find(({ path }) => path === 'README.md')?.text ?? ''
    expect(readme).toMatch(/has one row for each of [\d,]+ units, .* Check it against the licence of the data/)
  })
})
