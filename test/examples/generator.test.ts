import { readdirSync, readFileSync, statSync } from 'node:fs'
import { kinks, polygon } from '@turf/turf'
import { describe, expect, it } from 'vitest'
import { problemText } from '../../src/problem.js'
import { readStudy } from '../../src/study/index.js'
import { exampleFiles } from './files.js'
import { trueEffects as grantEffects } from './hedgerows/farms.js'
import { BANK_REACH_METRES, isInside } from './quillhaven/leases.js'
import { drawTown, type LonLat, type Plan, planOf } from './quillhaven/town.js'

const boundaries = new URL('../../boundaries/', import.meta.url)
const files = exampleFiles()

describe('files of the example studies', () => {
  it.each(Object.keys(files))('boundaries/%s is what the generator draws, byte for byte', (path) => {
    expect(readFileSync(new URL(path, boundaries), 'utf8') === files[path]).toBe(true)
  })

  it('take less than 3 MB together', () => {
    const paths = readdirSync(boundaries, { recursive: true, encoding: 'utf8' })
    const bytes = paths.map((path) => statSync(new URL(path, boundaries))).reduce((sum, { size }) => sum + size, 0)
    expect(bytes).toBeLessThan(3_000_000)
  })

  it.each(['quillhaven', 'hedgerows'])('the study of %s can be read, and its columns are there', (name) => {
    const read = readStudy(readFileSync(new URL(`${name}/study.yaml`, boundaries), 'utf8'), `${name}/study.yaml`)
    expect(read.ok ? [] : read.problems.map(problemText)).toEqual([])
    if (!read.ok) return
    const { records, outcomes, line } = read.value
    const columns = files[`${name}/${records.file}`].split('\n')[0].split(',')
    const asked = [records.id, records.weight, records.cluster, ...(records.position ?? []), ...outcomes]
    if (line.kind === 'score') asked.push(line.score)
    expect(columns).toEqual(expect.arrayContaining(asked.filter((column) => column !== undefined)))
  })
})

describe('Quillhaven', () => {
  const town = drawTown()
  const levy = levyEdges(town.zones)
  const header = files['quillhaven/leases.csv'].split('\n')[0].split(',')
  const leases = files['quillhaven/leases.csv'].trimEnd().split('\n').slice(1)
  const places = leases.flatMap((row): LonLat[] => {
    const cells = row.split(',')
    const [lon, lat] = [cells[header.indexOf('lon')], cells[header.indexOf('lat')]]
    return lon === '' ? [] : [[Number(lon), Number(lat)]]
  })

  it('has fifteen zones that do not cross themselves or each other', () => {
    expect(town.zones.length).toBe(15)
    for (const { ring } of town.zones) expect(kinks(polygon([ring.map((point) => [...point])])).features).toEqual([])
    const zonesOfPlace = places.map((place) => town.zones.filter(({ ring }) => isInside(ring, place)).length)
    expect(Math.max(...zonesOfPlace)).toBe(1)
    const outside = zonesOfPlace.filter((zones) => zones === 0).length
    expect(outside).toBeGreaterThan(40)
    expect(outside).toBeLessThanOrEqual(70)
  })

  it('has a levy border of some 19 km, of vertices that both zones have', () => {
    const metres = levy.reduce((sum, { from, to }) => sum + apart(from, to), 0)
    expect(metres).toBeGreaterThan(17_000)
    expect(metres).toBeLessThan(22_000)
  })

  it('has a river within 100 m of the whole border of Millrow and Weir, and of little else', () => {
    const river = town.river.map(planOf)
    const near = (edge: Edge) => middles(edge).filter((point) => toPath(point, river) < 100).length / 10
    const banks = levy.filter(({ zones }) => zones.join() === 'Millrow,Weir')
    expect(banks.length).toBeGreaterThan(5)
    expect(banks.map(near)).toEqual(banks.map(() => 1))
    const others = levy.filter(({ zones }) => zones.join() !== 'Millrow,Weir')
    const metresNear = others.reduce((sum, edge) => sum + near(edge) * apart(edge.from, edge.to), 0)
    expect(metresNear).toBeLessThan(800)
  })

  it('keeps what the river does away from the pieces that are used', () => {
    const river = town.river.map(planOf)
    const used = levy.flatMap(middles).filter((point) => toPath(point, river) >= 100)
    expect(Math.min(...used.map((point) => apart(point, town.bankMiddle)))).toBeGreaterThan(BANK_REACH_METRES)
  })

  it('has leases without rent and without position, and 20,000 in all', () => {
    expect(leases.length).toBe(20_000)
    const empty = (column: string) => leases.filter((row) => row.split(',')[header.indexOf(column)] === '').length
    expect(empty('log_rent')).toBeGreaterThan(100)
    expect(empty('lon')).toBeGreaterThan(20)
    expect(empty('vacant')).toBe(0)
  })
})

describe('hedgerow grants', () => {
  it('has 24 lines of effects that differ around their mean', () => {
    const effects = grantEffects.soil_kept.lines.map(({ effect }) => effect)
    expect(effects.length).toBe(24)
    const mean = effects.reduce((sum, effect) => sum + effect, 0) / 24
    const spread = Math.sqrt(effects.reduce((sum, effect) => sum + (effect - mean) ** 2, 0) / 23)
    expect(Math.abs(mean - grantEffects.soil_kept.mean)).toBeLessThan(0.2)
    expect(spread).toBeGreaterThan(0.25)
  })

  it('has a cutoff for every farm, but for those that lack a region', () => {
    const keys = new Set(
      files['hedgerows/cutoffs.csv']
        .trimEnd()
        .split('\n')
        .slice(1)
        .map((row) => row.split(',').slice(0, 2).join()),
    )
    expect(keys.size).toBe(24)
    const farms = files['hedgerows/farms.csv'].trimEnd().split('\n').slice(1)
    expect(farms.length).toBe(15_000)
    const unknown = farms.map((row) => row.split(',').slice(1, 3)).filter((key) => !keys.has(key.join()))
    expect(unknown.length).toBeGreaterThan(5)
    expect(unknown.every(([, region]) => region === '')).toBe(true)
  })
})

interface Edge {
  readonly from: Plan
  readonly to: Plan
  readonly zones: readonly string[]
}

/** Edges that a levied and an unlevied zone share, found by their equal coordinates. */
function levyEdges(zones: ReturnType<typeof drawTown>['zones']): Edge[] {
  const shared = new Map<string, { from: Plan; to: Plan; zones: string[]; levied: number }>()
  for (const { name, levied, ring } of zones)
    for (let at = 1; at < ring.length; at++) {
      const key = [ring[at - 1], ring[at]].map(String).sort().join(' ')
      const edge = shared.get(key) ?? { from: planOf(ring[at - 1]), to: planOf(ring[at]), zones: [], levied: 0 }
      edge.zones.push(name)
      edge.levied += levied ? 1 : 0
      shared.set(key, edge)
    }
  return [...shared.values()].filter((edge) => edge.zones.length === 2 && edge.levied === 1)
}

function middles({ from, to }: Edge): Plan[] {
  return Array.from({ length: 10 }, (_, step): Plan => {
    const share = (step + 0.5) / 10
    return [from[0] + share * (to[0] - from[0]), from[1] + share * (to[1] - from[1])]
  })
}

function apart(a: Plan, b: Plan): number {
  return Math.hypot(a[0] - b[0], a[1] - b[1])
}

function toPath(point: Plan, path: readonly Plan[]): number {
  let nearest = Number.POSITIVE_INFINITY
  for (let at = 1; at < path.length; at++) {
    const [a, b] = [path[at - 1], path[at]]
    const along = ((point[0] - a[0]) * (b[0] - a[0]) + (point[1] - a[1]) * (b[1] - a[1])) / apart(a, b) ** 2
    const share = Math.min(1, Math.max(0, along))
    nearest = Math.min(nearest, apart(point, [a[0] + share * (b[0] - a[0]), a[1] + share * (b[1] - a[1])]))
  }
  return nearest
}
