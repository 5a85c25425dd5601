import { spawn } from 'node:child_process'
import { once } from 'node:events'
import { readFileSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { inWorkers } from '../../dist/cli/ground.js'
import { sharedBorder } from '../../dist/cli/groundParts.js'
import { type Border, type Measured, measureUnits, prepareBorder, readZones } from '../../src/borders/index.js'
import { borderStudy, type Files, newRoom, scarp, scatter, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

/** The leases, and after them what has no answer or more than one: no position, off the earth, outside, on the border, twice. */
function files(): Files {
  const study = borderStudy()
  const odd = ['X1,,50.01,8', 'X2,400,95,8', 'X3,11,50.01,8', 'X4,10,50.01,8', 'X5,10,50.02,8', 'X6,9.99,50.01,8']
  return {
    ...study,
    'leases.csv': `${study['leases.csv']}${[...odd, ...odd].join('\n')}\n`,
    'zones.geojson': study['zones.geojson']
      .replace('"name":"East"', '"name":"East","rate":2')
      .replace('"name":"West"', '"name":"West","rate":1'),
  }
}

describe('threads that measure', () => {
  beforeAll(() => writeFiles(room, files()))

  it.each([
    ['treated zones', ['--treated', 'East'], [1, 2, 3, 5]],
    ['a dose', ['--dose', 'rate'], [1, 3]],
  ])('write the same bytes whatever their number: %s', async (_name, rule, counts) => {
    const words = ['measure', 'leases.csv', '--zones', 'zones.geojson', '--position', 'lon,lat', ...rule]
    const written: string[] = []
    for (const count of counts) {
      const out = `placed-${count}.csv`
      expect(await scarp([...words, '--workers', `${count}`, '--out', out], { cwd: room })).toMatchObject({ code: 0 })
      written.push(readFileSync(join(room, out), 'utf8'))
    }
    expect(written[0].split('\n')).toHaveLength(414)
    for (const other of written.slice(1)) expect(other).toBe(written[0])
  })

  it('change nothing in a run, nor in what inspect says', async () => {
    const said: string[] = []
    for (const count of [1, 3]) {
      const words = ['study.yaml', '--workers', `${count}`]
      expect(await scarp(['run', ...words, '--out', `out-${count}`, '--quiet'], { cwd: room })).toMatchObject({
        code: 0,
      })
      const results = JSON.parse(readFileSync(join(room, `out-${count}`, 'results.json'), 'utf8'))
      const inspected = await scarp(['inspect', ...words], { cwd: room })
      said.push(
        JSON.stringify({ ...results, seconds: 0, started: '' }),
        readFileSync(join(room, `out-${count}`, 'units.csv'), 'utf8'),
        inspected.stdout,
      )
    }
    for (const [i, text] of said.entries()) expect(text).toBe(said[i % 3])
  })

  it('are as many as a whole number says', async () => {
    for (const text of ['0', '2.5', 'many', '65']) {
      const said = await scarp(['inspect', 'study.yaml', '--workers', text], { cwd: room })
      expect(said).toMatchObject({ code: 2, stdout: '' })
      expect(said.stderr).toContain('--workers')
    }
  })
})

/** A chequerboard of zones, treated where row and column add up to an even number. */
function chequerboard(side: number): Border {
  const features = Array.from({ length: side * side }, (_, k) => {
    const [x, y] = [10 + 0.1 * Math.floor(k / side), 50 + 0.1 * (k % side)]
    const corners = [
      [x, y],
      [x + 0.1, y],
      [x + 0.1, y + 0.1],
      [x, y + 0.1],
      [x, y],
    ].map((position) => position.map((degrees) => Number(degrees.toFixed(6))))
    const isTreated = (Math.floor(k / side) + (k % side)) % 2 === 0
    const geometry = { type: 'Polygon', coordinates: [corners] }
    return { type: 'Feature', properties: { name: `${k}`, rate: isTreated ? 1 : 0 }, geometry }
  })
  const zones = readZones({ type: 'FeatureCollection', features }, 'zones.geojson', 'name')
  if (!zones.ok) throw new Error(zones.problems[0].what)
  const border = prepareBorder(zones.value, { dose: 'rate', snapMetres: 0, pieceMetres: 5000 })
  if (!border.ok) throw new Error(border.problems[0].what)
  return border.value
}

describe('inWorkers', () => {
  const border = chequerboard(6)
  const random = scatter(5)
  const lon = Float64Array.from({ length: 30_000 }, () => 9.9 + 0.8 * random())
  const lat = Float64Array.from({ length: 30_000 }, () => 49.9 + 0.8 * random())

  it('gives every bit that one thread gives, and tells how far it has come', async () => {
    const alone = measureUnits(border, lon, lat)
    for (const threads of [1, 2, 5]) {
      const told: number[] = []
      const measured = await inWorkers(sharedBorder(border), lon, lat, threads, (done) => told.push(done))
      for (const key of Object.keys(alone) as (keyof Measured)[]) {
        expect(measured[key].length).toBe(lon.length)
        expect(bytesOf(measured[key]).equals(bytesOf(alone[key]))).toBe(true)
      }
      expect(told.length).toBeGreaterThanOrEqual(4 * threads)
      expect(told).toEqual([...told].sort((a, b) => a - b))
      expect(told.at(-1)).toBe(lon.length)
    }
  })

  it('shares the memory of the border with its threads', () => {
    const { tree, grid } = sharedBorder(border)
    for (const { buffer } of [tree.pieces, tree.edges.lon0, grid.edges.x0, grid.cellStart])
      expect(buffer).toBeInstanceOf(SharedArrayBuffer)
  })

  it('measures no units at all', async () => {
    const none = new Float64Array(0)
    expect((await inWorkers(sharedBorder(border), none, none, 2)).zone).toHaveLength(0)
  })

  it('throws the fault of a thread, and ends the others', async () => {
    const broken = { ...sharedBorder(border), grid: undefined } as unknown as Border
    await expect(inWorkers(broken, lon, lat, 3)).rejects.toThrow(TypeError)
  })

  it('dies of a stop signal at once, threads and all', async () => {
    const program = `
      import { readFileSync } from 'node:fs'
      import { prepareBorder, readZones } from '${built('borders/index.js')}'
      import { inWorkers } from '${built('cli/ground.js')}'
      import { sharedBorder } from '${built('cli/groundParts.js')}'
      const zones = readZones(JSON.parse(readFileSync('zones.geojson', 'utf8')), 'zones.geojson', 'name')
      const border = prepareBorder(zones.value, { treated: ['East'], snapMetres: 0, pieceMetres: 500 })
      const lon = Float64Array.from({ length: 5_000_000 }, (_, i) => 9.98 + (i % 40_000) / 1e6)
      const lat = lon.map((_, i) => 50 + (i % 20_011) / 1e6)
      await inWorkers(sharedBorder(border.value), lon, lat, 2, () => console.log('measuring'))
      console.log('done')
    `
    writeFiles(room, { ...files(), 'endless.mjs': program })
    const child = spawn(process.execPath, ['endless.mjs'], { cwd: room, stdio: ['ignore', 'pipe', 'inherit'] })
    let said = ''
    child.stdout.setEncoding('utf8').on('data', (text) => {
      if (said === '') child.kill('SIGINT')
      said += text
    })
    const [code, signal] = await once(child, 'close')
    expect([code, signal]).toEqual([null, 'SIGINT'])
    expect(said).toMatch(/^(measuring\n)+$/)
  })
})

function bytesOf({ buffer, byteOffset, byteLength }: Measured[keyof Measured]): Buffer {
  return Buffer.from(buffer, byteOffset, byteLength)
}

function built(file: string): string {
  return new URL(`../../dist/${file}`, import.meta.url).href
}
