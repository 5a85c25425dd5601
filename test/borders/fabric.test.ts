import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { boundariesOf } from '../../src/borders/boundaries.js'
import { type Fabric, fabricOf, widestSlivers } from '../../src/borders/fabric.js'
import { facingApartProblems } from '../../src/borders/fabricApart.js'
import { edgeLengthMetres, type Zones } from '../../src/borders/index.js'
import { measureNearness } from '../../src/borders/nearness.js'
import { sharedPaths } from '../../src/borders/sharedBorders.js'
import { problemText } from '../../src/problem.js'
import {
  borderOf,
  box,
  closed,
  lengths,
  metresAround,
  multiZone,
  type Point,
  problemsOf,
  type ZoneFeature,
  zone,
  zonesOf,
} from './makeZones.js'

/** Zones in metres east and north of a place: name to polygons, rings, corners. */
interface Case {
  readonly title: string
  readonly snap_metres: number
  readonly zones: Readonly<Record<string, Point[][][]>>
  /** By zone and label. */
  readonly metres: Readonly<Record<string, Partial<Record<string, number>>>>
  /** Kind, greatest width in metres, square metres; widest first. */
  readonly slivers: readonly (readonly ['gap' | 'overlap', number, number])[]
  /** Metres of border where T is treated. */
  readonly border?: number
  /** The pair named in the refusal. */
  readonly refused?: string
}

const cases: Case[] = JSON.parse(readFileSync(new URL('../fixtures/borders/fabric.json', import.meta.url), 'utf8'))
const at = metresAround(5, 47)

function featuresOf(zones: Case['zones']): ZoneFeature[] {
  const drawn = (ring: Point[]) => closed(ring.map(([x, y]) => at(x, y)))
  return Object.entries(zones).map(([name, polygons]) => multiZone(name, ...polygons.map((rings) => rings.map(drawn))))
}

function boundaryMetres({ names, polygons }: Zones, name: string): number {
  let sum = 0
  for (const ring of polygons[names.indexOf(name)].flat()) {
    for (let i = 0; i + 1 < ring.length; i++) {
      sum += edgeLengthMetres(ring[i][0], ring[i][1], ring[i + 1][0], ring[i + 1][1])
    }
  }
  return sum
}

/** What each zone has of each label, without the labels it has nothing of. */
function metresByLabel(fabric: Fabric): Record<string, Record<string, number>> {
  const some = (metres: Readonly<Record<string, number>>) =>
    Object.fromEntries(Object.entries(metres).filter(([, length]) => length > 0))
  return Object.fromEntries(fabric.zones.map(({ zone: name, metres }) => [name, some(metres)]))
}

describe.each(cases)('$title', ({ snap_metres, zones, metres, slivers, border, refused }) => {
  const read = zonesOf(...featuresOf(zones))
  const fabric = fabricOf(read, snap_metres)

  it('has every stretch of every boundary labelled, and the lengths add up', () => {
    for (const { zone: name, boundaryMetres: whole } of fabric.zones) {
      const own = fabric.stretches.filter((stretch) => stretch.zone === name)
      const sum = own.reduce((total, stretch) => total + stretch.lengthMetres, 0)
      expect(Math.abs(sum - boundaryMetres(read, name))).toBeLessThan(1e-5)
      expect(Math.abs(whole - sum)).toBeLessThan(1e-5)
    }
    const found = metresByLabel(fabric)
    for (const [name, labels] of Object.entries(metres)) {
      expect(Object.keys(found[name]).sort()).toEqual(Object.keys(labels).sort())
      // the drawing shrinks by 0.17% over 10 km of latitude; ends of stretches may move by the width of a gap
      for (const [label, length] of Object.entries(labels)) {
        expect(Math.abs(found[name][label] - (length ?? 0))).toBeLessThan(0.003 * (length ?? 0) + 45)
      }
    }
  })

  it('has its gaps and overlaps, with width and area', () => {
    const found = fabric.slivers.filter(({ widestMetres }) => widestMetres > 0.01)
    expect(found.map(({ kind }) => kind)).toEqual(slivers.map(([kind]) => kind))
    found.forEach((sliver, i) => {
      const [, width, area] = slivers[i]
      expect(Math.abs(sliver.widestMetres / width - 1)).toBeLessThan(0.004)
      expect(Math.abs(sliver.squareMetres / area - 1)).toBeLessThan(0.004)
      expect(sliver.zones).toEqual(['T', 'U'])
      expect(sliver.isWithinSnap).toBe(width <= snap_metres)
    })
  })

  it('has the border it should have, or a refusal', () => {
    const features = featuresOf(zones)
    if (border !== undefined) {
      const found = lengths(borderOf(features, ['T'], { snapMetres: snap_metres, pieceMetres: 1e6 }))['U | T']
      expect(Math.abs(found / border - 1)).toBeLessThan(0.01)
    }
    const said = apart(features, ['T'], snap_metres)
    if (refused === undefined) expect(said).toEqual([])
    else {
      expect(said).toHaveLength(1)
      expect(said[0]).toMatch(`zones ${refused} face each other over`)
      expect(problemsOf(features, ['T'], { snapMetres: snap_metres })).toMatch(/40 m/)
    }
  })
})

/** What is refused of zones that face each other apart. */
function apart(features: ZoneFeature[], treated: string[], metres: number): string[] {
  const { names, polygons } = zonesOf(...features)
  const order = names.map((_, i) => i).sort((a, b) => (names[a] < names[b] ? -1 : 1))
  const sorted = order.map((i) => names[i])
  const boundaries = boundariesOf(order.map((i) => polygons[i]))
  const isRelevant = (own: number, other: number) => treated.includes(sorted[own]) && !treated.includes(sorted[other])
  const paths = sharedPaths(boundaries, measureNearness(boundaries, metres), isRelevant, metres)
  return facingApartProblems(boundaries, isRelevant, paths, sorted, 'zones.geojson', metres).map(problemText)
}

describe('zones that face each other beyond snap', () => {
  const left = zone('T', box(at, 0, 0, 10_000, 10_000))
  const near = zone('U', box(at, 10_000, 0, 20_000, 10_000))

  it('are refused by name, with the gap and the snap it takes, although other pairs share borders', () => {
    const far = zone('V', box(at, -10_000, 0, -40, 10_000))
    expect(apart([left, near, far], ['T'], 20)).toEqual([
      expect.stringMatching(
        /^zones\.geojson: zones T and V face each other over 10\.0 km and share no border: up to 40 m apart, beyond snap \(20 m\), near \(.*\); if they are meant to touch, set snap above 40; if not, leave one of them out$/,
      ),
    ])
    expect(apart([left, near, far], ['T'], 50)).toEqual([])
    expect(apart([left, near, far], ['T', 'V'], 20)).toEqual([])
  })

  it('are left alone where they are too far apart, only meet at a corner, or share a part', () => {
    expect(apart([left, near, zone('V', box(at, -10_000, 0, -120, 10_000))], ['T'], 20)).toEqual([])
    expect(apart([left, near, zone('V', box(at, -10_000, 10_030, -30, 20_000))], ['T'], 20)).toEqual([])
    expect(apart([left, near, zone('V', box(at, -10_000, 9950, -40, 20_000))], ['T'], 20)).toEqual([])
    const wedge = closed([at(0, 0), at(-60, 10_000), at(-10_000, 10_000), at(-10_000, 0)])
    expect(apart([left, near, zone('V', wedge)], ['T'], 20)).toEqual([])
  })
})

describe('a fabric', () => {
  it('does not depend on the order of zones, on where rings begin or which way they run', () => {
    const { zones, snap_metres } = cases[cases.length - 1]
    const features = featuresOf(zones)
    const disturbed = [...features].reverse().map(({ geometry, ...rest }) => {
      const turned = (ring: number[][]) => {
        const open = [...ring.slice(0, -1)].reverse()
        return [...open.slice(2), ...open.slice(0, 2), open[2]]
      }
      const polygons = geometry.coordinates as number[][][][]
      return { ...rest, geometry: { ...geometry, coordinates: polygons.map((rings) => rings.map(turned)).reverse() } }
    }) as ZoneFeature[]
    const given = fabricOf(zonesOf(...features), snap_metres)
    expect(JSON.stringify(fabricOf(zonesOf(...disturbed), snap_metres))).toBe(JSON.stringify(given))
  })

  it('knows a cut at the antimeridian for a seam', () => {
    const part = (west: number, east: number): Point[] =>
      closed([
        [west, 0],
        [east, 0],
        [east, 1],
        [west, 1],
      ])
    const fabric = fabricOf(
      zonesOf(multiZone('T', [part(179, 180)], [part(-180, -179)]), zone('U', part(-179, -178))),
      5,
    )
    const { metres } = fabric.zones[0]
    expect(Math.abs(metres.seam - 2 * edgeLengthMetres(180, 0, 180, 1))).toBeLessThan(1e-6)
    expect(Math.abs(metres.shared - edgeLengthMetres(-179, 0, -179, 1))).toBeLessThan(1e-6)
  })

  it('says where a gap is: halfway along and halfway across', () => {
    const fabric = fabricOf(zonesOf(...featuresOf(cases[0].zones)), 50)
    const [lon, lat] = at(10_020, 5000)
    const { slivers } = fabric
    expect(edgeLengthMetres(lon, lat, slivers[0].lon, slivers[0].lat)).toBeLessThan(3)
    expect(slivers[0].lengthMetres / 10_000).toBeCloseTo(1, 3)
  })

  it('lists the widest slivers and counts the others', () => {
    const fabric = fabricOf(zonesOf(...featuresOf(cases[4].zones)), 10)
    const { listed, others } = widestSlivers(fabric, 1)
    expect(listed.map(({ widestMetres }) => Math.round(widestMetres))).toEqual([5])
    expect(others.count).toBe(fabric.slivers.length - 1)
    expect(Math.abs(others.squareMetres / 13_000 - 1)).toBeLessThan(0.004)
  })

  it('tells how much of each pair is shared and how much only faces', () => {
    const wedge = cases.find(({ title }) => title.startsWith('a wedge')) as Case
    const [pair] = fabricOf(zonesOf(...featuresOf(wedge.zones)), 20).pairs
    expect(pair.zones).toEqual(['T', 'U'])
    expect(Math.abs(pair.sharedMetres - 3333)).toBeLessThan(10)
    expect(Math.abs(pair.beyondMetres - 6667)).toBeLessThan(15)
    expect(pair.largestSharedGapMetres).toBeCloseTo(20, 1)
    expect(Math.abs(pair.largestBeyondGapMetres - 60)).toBeLessThan(0.2)
  })

  it('refuses a tolerance that is none', () => {
    expect(() => fabricOf(zonesOf(...featuresOf(cases[0].zones)), Number.NaN)).toThrow(RangeError)
  })
})
