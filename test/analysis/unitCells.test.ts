/** Counts of units on a grid: whole, without small squares, and the same whatever the order and across 180°. */
import { describe, expect, it } from 'vitest'
import { unitCells, unitPoints } from '../../src/analysis/unitCells.js'
import { seededRandom } from '../../src/math/index.js'

function town(count: number, lon0: number, lat0: number): { lon: Float64Array; lat: Float64Array } {
  const random = seededRandom(5)
  const lon = Float64Array.from({ length: count }, () => {
    const value = lon0 + 0.05 * random.normal()
    return value > 180 ? value - 360 : value
  })
  return { lon, lat: Float64Array.from({ length: count }, () => lat0 + 0.03 * random.normal()) }
}

describe('units on a grid', () => {
  const { lon, lat } = town(4000, 12.4, 51.3)
  const found = unitCells(lon, lat, [12.4, 51.3], 10)

  it('are counted in squares with units enough, which hold most of them', () => {
    expect(found?.units).toBe(4000)
    expect(found?.shown).toBeGreaterThan(3200)
    expect(found?.shown).toBe(found?.cells.reduce((sum, { units }) => sum + units, 0))
    for (const { west, south, east, north, units } of found?.cells ?? []) {
      expect(units).toBeGreaterThanOrEqual(10)
      const inside = lon.filter((value, i) => value >= west && value < east && lat[i] >= south && lat[i] < north)
      expect(inside.length).toBe(units)
      // squares on the ground: a degree of latitude is 111.2 km on the sphere of 6371 km
      expect(((north - south) * 111.195).toFixed(6)).toBe(((found?.sideMetres ?? 0) / 1000).toFixed(6))
      expect(((east - west) * Math.cos((51 * Math.PI) / 180)) / (north - south)).toBeCloseTo(1, 6)
    }
  })

  it('do not depend on the order of rows', () => {
    expect(unitCells(lon.slice().reverse(), lat.slice().reverse(), [12.4, 51.3], 10)).toEqual(found)
  })

  it('run on past the 180th meridian', () => {
    const there = town(4000, 179.99, -17)
    const cells = unitCells(there.lon, there.lat, [180, -17], 10)
    expect(cells?.shown).toBeGreaterThan(3200)
    expect(Math.max(...(cells?.cells.map(({ east }) => east) ?? []))).toBeGreaterThan(180)
  })

  it('are not drawn where no square has enough', () => {
    expect(unitCells(lon.slice(0, 5), lat.slice(0, 5), [12.4, 51.3], 10)).toBe(undefined)
    expect(unitCells(new Float64Array(0), new Float64Array(0), [12.4, 51.3], 10)).toBe(undefined)
  })
})

describe('units one by one', () => {
  it('are each place once, in an order that says nothing of rows', () => {
    const lon = Float64Array.of(3, 1, 3, 2, 1)
    const lat = Float64Array.of(5, 4, 5, 6, 3)
    expect(unitPoints(lon, lat)).toEqual([
      [1, 3],
      [1, 4],
      [2, 6],
      [3, 5],
    ])
  })
})
