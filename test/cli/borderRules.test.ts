/** The rules of a border study through the command line, on the invented town of boundaries/quillhaven. */
import { cpSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Jump, Results } from '../../src/results.js'
import { newRoom, scarp } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))
const study = readFileSync('boundaries/quillhaven/study.yaml', 'utf8')
  .replace('checks: standard', 'estimation: {bandwidth: 400}\nchecks: none')
  .replace('[log_rent, vacant]', '[log_rent]')

async function run(name: string, change: (text: string) => string): Promise<Results> {
  writeFileSync(join(room, 'quillhaven', `${name}.yaml`), change(study))
  const said = await scarp(['run', `quillhaven/${name}.yaml`, '--out', name, '--quiet'], { cwd: room })
  expect(said).toEqual({ code: 0, stdout: '', stderr: '' })
  return JSON.parse(readFileSync(join(room, name, 'results.json'), 'utf8'))
}

beforeAll(() => {
  cpSync('boundaries/quillhaven', join(room, 'quillhaven'), { recursive: true })
  const zones = JSON.parse(readFileSync('boundaries/quillhaven/zones.geojson', 'utf8'))
  for (const { properties } of zones.features) properties.rate = properties.levy === 'none' ? 0 : 2
  writeFileSync(join(room, 'quillhaven', 'rates.geojson'), JSON.stringify(zones))
})

describe('rules of a border', () => {
  it('counts what each rule leaves, down to the units placed, and says what else changes', async () => {
    const results = await run('rules', (text) =>
      text.replace(
        '  barriers:',
        '  overlaps: [{file: river.geojson, within: 400}]\n  corner: 60\n  position_error: 4\n  largest_turn: 170\n  barriers:',
      ),
    )
    const waterfall = results.border?.waterfall ?? []
    expect(waterfall.map(({ rule }) => rule)).toEqual([
      'shared borders',
      'barrier river.geojson',
      'overlap river.geojson',
      'turns by more than 170 degrees',
      'corners',
    ])
    expect(waterfall.at(-1)?.units).toBe(results.placement.placed)
    for (const key of ['pieces', 'km', 'pairs', 'units'] as const) {
      const values = waterfall.map((step) => step[key])
      expect(values).toEqual([...values].sort((a, b) => b - a))
    }
    expect(Object.keys(results.placement.set_aside)).toEqual(
      expect.arrayContaining(['within position error', 'near a corner where three zones meet']),
    )
    expect(results.border?.what_else_changes?.layers).toEqual(['river.geojson', 'river.geojson'])
    const page = readFileSync(join(room, 'rules', 'report.html'), 'utf8')
    expect(page).toContain('What else changes here')
    expect(results.border?.corners).toMatchObject({ points: 7, turn: 45 })
    expect(page).toContain('Near a corner an estimate by distance alone is biased')
    expect(results.outcomes[0].variants?.map(({ variant }) => variant)).toEqual([
      'barriers kept',
      'overlaps kept',
      'turning pieces kept',
      'corners kept',
    ])
  })

  it('estimates along the border, band outside interval, no coordinate in the page', async () => {
    const results = await run('along', (text) => text.replace('  barriers:', '  along: 500\n  barriers:'))
    const [outcome] = results.outcomes
    const points = outcome.along ?? []
    const length = results.lines.reduce((sum, { length_m }) => sum + (length_m as number), 0)
    expect(Math.abs(points.length - length / 500)).toBeLessThan(8)
    for (const point of points) {
      expect(results.lines.map(({ line }) => line)).toContain(point.piece)
      if (point.estimate === null) expect(point.reason).toBeTruthy()
      else {
        expect(point.uniform_low as number).toBeLessThanOrEqual(point.low as number)
        expect(point.uniform_high as number).toBeGreaterThanOrEqual(point.high as number)
      }
    }
    const average = outcome.along_average?.length as { low: number; high: number }
    expect(average.low).toBeLessThan(0.08)
    expect(average.high).toBeGreaterThan(0.08)
    const page = readFileSync(join(room, 'along', 'report.html'), 'utf8')
    expect(page).toContain('along the border')
    expect(page).not.toContain(String(points[0].lon))
  })

  it('gives a border between doses the units and estimates of the same border between treated zones', async () => {
    const byName = await run('by-name', (text) => text)
    const byDose = await run('by-dose', (text) =>
      text.replace(/ {2}treated: .*\n/, '  dose: rate\n').replace('zones.geojson', 'rates.geojson'),
    )
    const lines = ({ lines: all }: Results) => new Map(all.map(({ line, length_m }) => [line, length_m]))
    expect(lines(byDose)).toEqual(lines(byName))
    expect(byDose.lines.every(({ dose }) => dose === 2)).toBe(true)
    const jump = byDose.outcomes[0].pooled as Jump
    expect(Math.abs(jump.corrected.estimate - (byName.outcomes[0].pooled as Jump).corrected.estimate)).toBeLessThan(
      0.03,
    )
  })

  it('believes the record or the map as the study says, and cross-tabulates where they differ', async () => {
    const rows = readFileSync(join(room, 'quillhaven', 'leases.csv'), 'utf8')
      .trimEnd()
      .split('\n')
    // units without a placement have no zone on record here: a missing record contradicts nothing
    const units = readFileSync(join(room, 'by-name', 'units.csv'), 'utf8')
      .trimEnd()
      .split('\n')
      .slice(1)
    const zoneOf = new Map(
      units.map((row) => [row.split(',')[0], /,(?:un)?treated,[^,]*,([^,]*),/.exec(row)?.[1] ?? '']),
    )
    const zones = [...new Set(zoneOf.values())].sort()
    let wrong = 0
    const recorded = rows.map((row, i) => {
      if (i === 0) return `${row},zone_on_record`
      const zone = zoneOf.get(row.split(',')[0])
      if (zone === undefined) return `${row},`
      const isWrong = i % 50 === 0
      if (isWrong) wrong++
      return `${row},${isWrong ? zones[(zones.indexOf(zone) + 1) % zones.length] : zone}`
    })
    writeFileSync(join(room, 'quillhaven', 'recorded.csv'), `${recorded.join('\n')}\n`)
    const runs = await Promise.all(
      ['set-aside', 'map', 'record'].map((choice) =>
        run(choice, (text) =>
          text
            .replace('leases.csv', 'recorded.csv')
            .replace('  barriers:', `  side: zone_on_record\n  on_conflict: ${choice}\n  barriers:`),
        ),
      ),
    )
    const [setAside, map] = runs
    for (const { border } of runs) {
      const named = (border?.conflicts ?? []).filter(({ record }) => record !== '(missing)')
      expect(named.reduce((sum, { units }) => sum + units, 0)).toBe(wrong)
    }
    expect(setAside.placement.set_aside['record and map disagree']).toBe(wrong)
    expect(map.placement.placed - setAside.placement.placed).toBe(wrong)
    // each run has the other two beside it, as they are alone
    const asRun = new Map(
      runs.map((results, i) => [['conflicts set aside', 'conflicts by map', 'conflicts by record'][i], results]),
    )
    for (const [own, results] of asRun) {
      const beside = results.outcomes[0].variants?.filter(({ variant }) => variant.startsWith('conflicts')) ?? []
      expect([own, ...beside.map(({ variant }) => variant)].sort()).toEqual([...asRun.keys()].sort())
      for (const { variant, pooled } of beside) expect(pooled).toEqual(asRun.get(variant)?.outcomes[0].pooled)
    }
  })

  it('caps or clusters units that share a position', async () => {
    const [head, ...rows] = readFileSync(join(room, 'quillhaven', 'leases.csv'), 'utf8')
      .trimEnd()
      .split('\n')
    const [lon, lat] = [head.split(',').indexOf('lon'), head.split(',').indexOf('lat')]
    const first = rows.map((row) => row.split(','))
    const stacked = first.map((cells, i) => {
      const anchor = first[i - (i % 4)]
      return cells.map((cell, at) => (at === lon || at === lat ? anchor[at] : cell)).join(',')
    })
    writeFileSync(join(room, 'quillhaven', 'stacked.csv'), `${[head, ...stacked].join('\n')}\n`)
    const change = (rule: string) => (text: string) =>
      text
        .replace('leases.csv', 'stacked.csv')
        .replace(/ {2}cluster: block\n/, '')
        .replace('  barriers:', `  repeated_points: ${rule}\n  barriers:`)
    const capped = await run('capped', change('{cap: 1}'))
    const clustered = await run('clustered', change('cluster'))
    expect(capped.placement.set_aside['repeated point beyond the cap']).toBeGreaterThan(1000)
    expect((clustered.outcomes[0].pooled as Jump).variance).toBe('clusters')
    expect(clustered.border?.repeated_points.repeated_share).toBeGreaterThan(0.9)
  })
})
