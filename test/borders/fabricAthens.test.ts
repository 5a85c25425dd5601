import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { boundariesOf } from '../../src/borders/boundaries.js'
import { fabricOf } from '../../src/borders/fabric.js'
import { borderFit, unitsChangingSide } from '../../src/borders/fabricBorder.js'
import { buildSegmentTree, nearestEdges, prepareBorder, readZones } from '../../src/borders/index.js'
import { ringSquareMetres } from '../../src/borders/polygonArea.js'
import { buildZoneGrid, locateInZones } from '../../src/borders/zoneGrid.js'
import { problemText } from '../../src/problem.js'
import { columns } from './makeZones.js'

interface Golden {
  /** Square metres and metres in the Greek grid by GEOS, and on the ellipsoid by PROJ. */
  readonly districts: readonly {
    readonly name: string
    readonly gridArea: number
    readonly geodesicArea: number
    readonly geodesicLength: number
  }[]
  readonly pairs: readonly {
    readonly zones: readonly [string, string]
    readonly metres: number
    readonly overlap: number | null
  }[]
  readonly holes: readonly { readonly zones: readonly string[]; readonly area: number }[]
  readonly borderOf1: number
  readonly flats: readonly {
    readonly id: string
    readonly in: readonly string[]
    readonly to: readonly number[]
    readonly border: number
  }[]
}

const folder = new URL('../fixtures/athens-flats/', import.meta.url)
const golden: Golden = JSON.parse(readFileSync(new URL('../golden/borders/athens.json', import.meta.url), 'utf8'))
const read = readZones(JSON.parse(readFileSync(new URL('districts.geojson', folder), 'utf8')), 'districts', 'district')
if (!read.ok) throw new Error('the districts must be readable')
const zones = read.value
const flats = readFileSync(new URL('flats.csv', folder), 'utf8')
  .trim()
  .split(/\r?\n/)
  .slice(1)
  .map((line) => line.split(','))
const [lon, lat] = columns(flats.map((cells) => [Number(cells[1]), Number(cells[2])]))

/** Of the data set, in the Greek grid (test/fixtures/SOURCES.md): districts 1 to 7. */
const publishedKm2 = [7.205019, 4.835935, 5.618766, 4.50597, 4.022963, 3.98682, 7.764333]

/**
 * Metres of the Greek grid (EPSG:2100) in one on the ground of WGS 84, near the middle of the districts, 23.735° E,
 * 38.0° N: a transverse Mercator with 0.9996 at 24° E, k0·(1 + x²/2R²), Snyder (1987), Map Projections: A Working
 * Manual, p. 57; on an ellipsoid (GGRS87) that passes 31.4 m above that of WGS 84 there (the height PROJ gives by its
 * shift of 199.87, -74.79, -246.62 m). In the grid areas are 0.078% smaller.
 */
const radiusMetres = 6_371_000
const eastMetres = (24 - 23.735) * 111_320 * Math.cos((38 * Math.PI) / 180)
const gridScale = 0.9996 * (1 + eastMetres ** 2 / (2 * radiusMetres ** 2)) * (1 + 31.4 / radiusMetres)

/** Within half a metre and 0.2%; and within a centimetre and 5 millionths when the grid's scale is taken out. */
function expectDistance(found: number, grid: number): void {
  expect(Math.abs(found - grid)).toBeLessThan(0.5 + 0.002 * grid)
  expect(Math.abs(found * gridScale - grid)).toBeLessThan(0.01 + 5e-6 * grid)
}

describe('districts of Athens', () => {
  const fabric = fabricOf(zones, 15)

  it('are as large as published when the scale of the grid is taken out, and as PROJ has them on the ellipsoid', () => {
    zones.polygons.forEach((polygons, k) => {
      const { name, geodesicArea } = golden.districts[k]
      expect(name).toBe(zones.names[k])
      const signs = polygons.flatMap((rings) =>
        rings.map((ring, r) => (r === 0 ? 1 : -1) * Math.abs(ringSquareMetres(ring))),
      )
      const area = signs.reduce((sum, part) => sum + part, 0)
      expect(Math.abs(area / geodesicArea - 1)).toBeLessThan(1e-6)
      expect(Math.abs((area * gridScale ** 2) / (1e6 * publishedKm2[k]) - 1)).toBeLessThan(1e-5)
    })
  })

  it('have boundaries as long as PROJ has them, with every stretch labelled', () => {
    for (const { name, geodesicLength } of golden.districts) {
      const own = fabric.stretches.filter(({ zone }) => zone === name)
      const sum = own.reduce((total, { lengthMetres }) => total + lengthMetres, 0)
      expect(Math.abs(sum / geodesicLength - 1)).toBeLessThan(1e-9)
    }
    expect(fabric.zones.every(({ metres }) => metres.hole + metres.seam + metres['beyond tolerance'] === 0)).toBe(true)
  })

  it('share as much as GEOS finds within 5 cm, which adds as much of the coast at the ends', () => {
    const found = new Map(fabric.pairs.map((pair) => [pair.zones.join(), pair.sharedMetres]))
    const wanted = golden.pairs.filter(({ zones: [a, b] }) => a < b)
    expect([...found.keys()]).toEqual(wanted.map(({ zones: pair }) => pair.join()))
    for (const { zones: pair, metres } of wanted) {
      expect(Math.abs((found.get(pair.join()) ?? 0) * gridScale - metres)).toBeLessThan(0.3)
    }
  })

  it('have no gap or overlap wider than a millimetre: those of GEOS are hair lines', () => {
    expect(fabric.slivers).toEqual([])
    const areas = [...golden.holes.map(({ area }) => area), ...golden.pairs.map(({ overlap }) => overlap ?? 0)]
    expect(Math.max(...areas)).toBeLessThan(0.13)
  })

  it('hold the flats that GEOS and the record put in them', () => {
    const located = locateInZones(buildZoneGrid(zones.polygons), lon, lat)
    golden.flats.forEach((flat, i) => {
      expect([flat.id, flat.in]).toEqual([flats[i][0], [zones.names[located[i]]]])
      expect(flats[i][8]).toBe(zones.names[located[i]])
    })
  })

  it('lie as far from the flats as GEOS says in the grid', () => {
    zones.polygons.forEach((polygons, k) => {
      const tree = buildSegmentTree(boundariesOf([polygons]).edges)
      const { distanceMetres } = nearestEdges(tree, lon, lat)
      golden.flats.forEach(({ to }, i) => {
        expectDistance(distanceMetres[i], to[k])
      })
    })
  })

  it('have a border, at snap 15, as far from the flats and as long as that of GEOS, and no flat beside it lost', () => {
    const border = prepareBorder(zones, { treated: ['1'], snapMetres: 15, pieceMetres: 500 })
    if (!border.ok) throw new Error(border.problems.map(problemText).join('\n'))
    const { distanceMetres } = nearestEdges(border.value.tree, lon, lat)
    golden.flats.forEach((flat, i) => {
      // a twentieth of a metre is what the buffer of GEOS adds at the ends
      expect(Math.abs(distanceMetres[i] - flat.border)).toBeLessThan(0.5 + 0.002 * flat.border)
      expect(Math.abs(distanceMetres[i] * gridScale - flat.border)).toBeLessThan(0.06 + 5e-6 * flat.border)
    })
    const length = border.value.pieces.reduce((sum, { lengthMetres }) => sum + lengthMetres, 0)
    expect(Math.abs(length * gridScale - golden.borderOf1)).toBeLessThan(0.5)
    const [fit] = borderFit(border.value, 15)
    expect(Math.max(fit.treatedMetres, fit.untreatedMetres)).toBeLessThan(0.001)
    expect(unitsChangingSide(border.value, fabric, lon, lat).between).toBe(0)
  })
})
