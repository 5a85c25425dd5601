/**
 * Units counted in the squares of a grid, for a map that shows where they are and no one of them. The grid starts at a
 * round distance from the equator and the prime meridian, so that no unit's place decides an edge.
 */
import type { UnitCells } from '../results.js'

const metresPerDegree = 111_195
/** Sides tried, in metres: the finest whose squares show this share of the units. */
const sides = [50, 100, 200, 500, 1000, 2000, 5000, 10_000, 20_000, 50_000, 100_000]
const shareShown = 0.8
/** A map has at most about this many squares across. */
const mostAcross = 60

/**
 * lon, lat of units in degrees; `near`: a place among them, to a degree, from which longitudes run on past the 180th
 * meridian and the width of a degree is taken. Undefined where no square of any side has `smallestCell` units.
 */
export function unitCells(
  lon: Float64Array,
  lat: Float64Array,
  near: readonly [lon: number, lat: number],
  smallestCell: number,
): UnitCells | undefined {
  if (lon.length === 0) return undefined
  const least = Math.max(smallestCell, 1)
  const [lon0, lat0] = near.map(Math.round)
  const around = lon.map((value) => value + 360 * Math.round((lon0 - value) / 360))
  const [south, north] = ends(lat)
  const [west, east] = ends(around)
  const degree = metresPerDegree * Math.max(0.01, Math.cos((lat0 * Math.PI) / 180))
  const across = Math.max((north - south) * metresPerDegree, (east - west) * degree)
  let best: UnitCells | undefined
  for (const side of sides.filter((one) => one * mostAcross >= across || one === sides[sides.length - 1])) {
    const made = countOnGrid(around, lat, side / degree, side, least)
    if (!best || made.shown > best.shown) best = made
    if (made.shown >= shareShown * lon.length) break
  }
  return best && best.cells.length > 0 ? best : undefined
}

/** Each place once, in an order that says nothing of rows. */
export function unitPoints(lon: Float64Array, lat: Float64Array): (readonly [number, number])[] {
  const places = Array.from(lon, (value, i) => [value, lat[i]] as const).sort((a, b) => a[0] - b[0] || a[1] - b[1])
  return places.filter(([x, y], i) => i === 0 || x !== places[i - 1][0] || y !== places[i - 1][1])
}

function ends(values: Float64Array): [number, number] {
  let [low, high] = [Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY]
  for (const value of values) {
    low = Math.min(low, value)
    high = Math.max(high, value)
  }
  return [low, high]
}

/** Squares `side` metres high and `wide` degrees wide. */
function countOnGrid(lon: Float64Array, lat: Float64Array, wide: number, side: number, least: number): UnitCells {
  const up = side / metresPerDegree
  const counts = new Map<number, { column: number; row: number; units: number }>()
  for (let i = 0; i < lon.length; i++) {
    const [column, row] = [Math.floor(lon[i] / wide), Math.floor(lat[i] / up)]
    const key = row * 2 ** 26 + column
    const found = counts.get(key)
    if (found) found.units++
    else counts.set(key, { column, row, units: 1 })
  }
  const kept = [...counts.values()]
    .filter(({ units }) => units >= least)
    .sort((a, b) => a.row - b.row || a.column - b.column)
  return {
    sideMetres: side,
    shown: kept.reduce((sum, { units }) => sum + units, 0),
    units: lon.length,
    cells: kept.map(({ column, row, units }) => ({
      west: column * wide,
      south: row * up,
      east: (column + 1) * wide,
      north: (row + 1) * up,
      units,
    })),
  }
}
