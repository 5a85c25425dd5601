/** Points along a border, metres around a place, and the units near a place. */
import geographic from 'geographiclib-geodesic'
import { describe, expect, it } from 'vitest'
import { geodesicMetres, indexUnits, localMetres, type Piece, pointsAlong, unitsNear } from '../../src/borders/index.js'
import { seededRandom } from '../../src/math/index.js'
import { borderOf, box, closed, metresAround, multiZone, type Point, zone } from './makeZones.js'

const wgs84 = geographic.Geodesic.WGS84

describe('local metres', () => {
  const places: [number, number][] = [
    [23.7, 38],
    [-100, 49],
    [179.99, -17],
    [10, 0],
    [33, 89.8],
    [0, -90],
  ]
  // Karney's inverse problem gives distance and direction to about 15 nm (GeographicLib).
  for (const [lon0, lat0] of places) {
    it(`distance within 1e-9 and direction within 1e-7 of the geodesic, up to 50 km from ${lon0}, ${lat0}`, () => {
      for (const metres of [0.01, 1, 500, 5_000, 50_000]) {
        for (let azimuth = 0; azimuth < 360; azimuth += 37) {
          const end = wgs84.Direct(lat0, lon0, azimuth, metres) as unknown as { lat2: number; lon2: number }
          const { eastMetres, northMetres } = localMetres(lon0, lat0, [end.lon2], [end.lat2])
          const [east, north] = [eastMetres[0], northMetres[0]]
          // degrees of a position are rounded to about 1e-9 m of ground
          expect(Math.abs(Math.hypot(east, north) - metres)).toBeLessThan(1e-9 * metres + 1e-8)
          const radians = (azimuth * Math.PI) / 180
          const aside = east * Math.cos(radians) - north * Math.sin(radians)
          expect(Math.abs(aside)).toBeLessThan(1e-7 * metres + 1e-8)
        }
      }
    })
  }

  it('the place itself is the origin, other turns of longitude are the same, missing stays missing', () => {
    const { eastMetres, northMetres } = localMetres(-179.999, 60, [-179.999, 180.011, Number.NaN], [60, 60.01, 60])
    expect([eastMetres[0], northMetres[0]]).toEqual([0, 0])
    expect(Math.hypot(eastMetres[1], northMetres[1])).toBeCloseTo(geodesicMetres(-179.999, 60, -179.989, 60.01), 5)
    expect(eastMetres[1]).toBeGreaterThan(0)
    expect(eastMetres[2]).toBeNaN()
    expect(() => localMetres(0, 0, [1, 2], [1])).toThrow(RangeError)
  })
})

describe('units near a place', () => {
  const scattered = (lon0: number, lat0: number, spread: number, count: number) => {
    const random = seededRandom(lon0 * 1000 + lat0)
    const lon = new Float64Array(count)
    const lat = new Float64Array(count)
    for (let i = 0; i < count; i++) {
      lat[i] = Math.max(-90, Math.min(90, lat0 + spread * random.normal()))
      lon[i] = lon0 + (spread / Math.max(0.01, Math.cos((lat0 * Math.PI) / 180))) * random.normal()
    }
    return { lon, lat }
  }
  for (const [lon0, lat0] of [
    [12, 45],
    [179.97, -35],
    [-180, 66],
    [80, 89.95],
    [-20, -89.99],
  ]) {
    it(`equals trying every unit, around ${lon0}, ${lat0}`, () => {
      const { lon, lat } = scattered(lon0, lat0, 0.1, 3000)
      const index = indexUnits(lon, lat)
      for (const radius of [0.5, 700, 4000, 15_000]) {
        for (const [aroundLon, aroundLat] of [
          [lon0, lat0],
          [lon[7], lat[7]],
          [lon0 + 360, lat0],
        ]) {
          const near = unitsNear(index, aroundLon, aroundLat, radius)
          const wanted: number[] = []
          lon.forEach((_, i) => {
            if (geodesicMetres(aroundLon, aroundLat, lon[i], lat[i]) <= radius) wanted.push(i)
          })
          expect([...near.index].sort((a, b) => a - b)).toEqual(wanted)
          near.index.forEach((i, at) => {
            const metres = geodesicMetres(aroundLon, aroundLat, lon[i], lat[i])
            expect(Math.abs(Math.hypot(near.eastMetres[at], near.northMetres[at]) - metres)).toBeLessThan(1e-5)
          })
        }
      }
    })
  }

  it('nothing from nothing, and a missing position is refused', () => {
    expect(unitsNear(indexUnits(new Float64Array(0), new Float64Array(0)), 0, 0, 1000).index).toHaveLength(0)
    expect(() => indexUnits(Float64Array.of(1, Number.NaN), Float64Array.of(1, 1))).toThrow(/unit 1/)
  })
})

describe('points along the border', () => {
  const at = metresAround(11, 47)
  const west = zone('West', box(at, -4000, 0, 0, 10_000))
  const east = zone('East', box(at, 0, 0, 4000, 10_000))

  it('equally spaced, centred, none at an end, in the order of the position', () => {
    const border = borderOf([west, east], ['East'], { pieceMetres: 3000 })
    const points = pointsAlong(border, 900)
    expect(points).toHaveLength(11)
    const total = border.pieces.reduce((sum, piece) => sum + piece.lengthMetres, 0)
    points.forEach(({ lon, lat, positionMetres, lengthMetres, piece, runStartMetres }, k) => {
      expect(lengthMetres).toBeCloseTo(total / 11, 6)
      expect(positionMetres).toBeCloseTo(((k + 0.5) * total) / 11, 6)
      expect(lon).toBeCloseTo(11, 12)
      expect(geodesicMetres(11, 47, lon, lat)).toBeCloseTo(positionMetres, 2)
      expect(piece).toBe(Math.min(2, Math.floor(positionMetres / border.pieces[0].lengthMetres)))
      expect(runStartMetres).toBe(0)
    })
  })

  it('one point in the middle where the spacing is longer than the border', () => {
    const points = pointsAlong(borderOf([west, east], ['East']), 50_000)
    expect(points).toHaveLength(1)
    expect(points[0].positionMetres).toBeCloseTo(5000, 0)
  })

  it('the same points under any order and direction of zones and rings', () => {
    const known = pointsAlong(borderOf([west, east], ['East']), 700)
    const reversed = zone('West', [...(west.geometry.coordinates[0] as Point[])].reverse())
    expect(pointsAlong(borderOf([east, reversed], ['East']), 700)).toEqual(known)
  })

  it('round a corner the steps are measured along the border', () => {
    const inner = zone('Inner', box(at, 0, 0, 2000, 2000))
    const outer = zone(
      'Outer',
      closed([at(-2000, 0), at(0, 0), at(0, 2000), at(2000, 2000), at(2000, 4000), at(-2000, 4000)]),
    )
    const points = pointsAlong(borderOf([inner, outer], ['Inner'], { pieceMetres: 1500 }), 1000)
    expect(points).toHaveLength(4)
    const places = points.map(({ lon, lat }) => localMetres(11, 47, [lon], [lat]))
    const wanted = [
      [0, 500],
      [0, 1500],
      [500, 2000],
      [1500, 2000],
    ]
    places.forEach(({ eastMetres, northMetres }, k) => {
      expect(Math.abs(eastMetres[0] - wanted[k][0])).toBeLessThan(1)
      expect(Math.abs(northMetres[0] - wanted[k][1])).toBeLessThan(1)
    })
  })

  it('pieces set aside have no point, and what is left on either side is spaced anew', () => {
    const { pieces } = borderOf([west, east], ['East'], { pieceMetres: 1000 })
    const kept = pieces.map((piece, p): Piece => (p === 3 ? { ...piece, setAside: 'barrier river.geojson' } : piece))
    const points = pointsAlong({ pieces: kept }, 800)
    expect(points.map(({ piece }) => piece)).not.toContain(3)
    const length = pieces[0].lengthMetres
    const left = points.filter(({ piece }) => piece < 3)
    const right = points.filter(({ piece }) => piece > 3)
    expect(left).toHaveLength(4)
    expect(left[0].lengthMetres).toBeCloseTo((3 * length) / 4, 6)
    expect(right).toHaveLength(8)
    expect(right[0].runStartMetres).toBeCloseTo(4 * length, 6)
    expect(right[0].positionMetres).toBeCloseTo(4 * length + (3 * length) / 8, 6)
    const lengths = points.reduce((sum, point) => sum + point.lengthMetres, 0)
    expect(lengths).toBeCloseTo(9 * length, 5)
  })

  it('a border in two parts is spaced part by part, never across the gap', () => {
    const parts = multiZone('East', [box(at, 0, 0, 4000, 3000)], [box(at, 0, 6000, 4000, 10_000)])
    const points = pointsAlong(borderOf([west, parts], ['East'], { pieceMetres: 900 }), 2500)
    expect(points).toHaveLength(3)
    const places = points.map(({ lon, lat }) => localMetres(11, 47, [lon], [lat]).northMetres[0])
    ;[1500, 7000, 9000].forEach((north, k) => {
      expect(Math.abs(places[k] - north)).toBeLessThan(2)
    })
    expect(points.map(({ runStartMetres }) => Math.round(runStartMetres / 10))).toEqual([0, 300, 300])
  })

  it('a closed border, across 180°, and a long edge along a parallel', () => {
    const pacific = metresAround(180, -17)
    const island = zone('Island', box(pacific, -1000, -1000, 1000, 1000))
    const sea = zone('Sea', box(pacific, -5000, -5000, 5000, 5000), box(pacific, -1000, -1000, 1000, 1000))
    const round = pointsAlong(borderOf([island, sea], ['Island']), 500)
    expect(round).toHaveLength(16)
    for (const { lon } of round) expect(lon >= -180 && lon < 180).toBe(true)
    const gaps = round.map(({ lon, lat }, k) =>
      geodesicMetres(lon, lat, round[(k + 1) % 16].lon, round[(k + 1) % 16].lat),
    )
    for (const gap of gaps) expect(gap).toBeLessThan(501)
    const north = zone(
      'North',
      closed([
        [-123, 49],
        [-95, 49],
        [-95, 50],
        [-123, 50],
      ]),
    )
    const south = zone(
      'South',
      closed([
        [-123, 48],
        [-95, 48],
        [-95, 49],
        [-123, 49],
      ]),
    )
    const parallel = pointsAlong(borderOf([north, south], ['North'], { pieceMetres: 50_000 }), 200_000)
    expect(parallel).toHaveLength(10)
    parallel.forEach(({ lon, lat }, k) => {
      expect(lat).toBeCloseTo(49, 12)
      expect(lon).toBeCloseTo(-123 + 2.8 * (k + 0.5), 7)
    })
  })

  it('throws where the spacing is none', () => {
    expect(() => pointsAlong({ pieces: [] }, 0)).toThrow(RangeError)
    expect(() => pointsAlong({ pieces: [] }, Number.NaN)).toThrow(RangeError)
    expect(pointsAlong({ pieces: [] }, 5)).toEqual([])
  })
})
