import { crossesEast, crossesNorth } from './zoneCrossing.js'
import { holdsReference, manyZones, northOfReference, noZone, type ZoneGrid } from './zoneGridBuild.js'

export { buildZoneGrid, manyZones, noZone, type ZoneGrid } from './zoneGridBuild.js'

/** The number just below 90: the north pole belongs to a zone that reaches it from the south. */
const justBelowPole = 90 - 2 ** -46

/**
 * Zone of each point: its index; -1 in no zone; -2 in more than one. NaN is in no zone.
 * Exact for the numbers given. A point on an edge or vertex belongs to the zone just east of it, or, along an edge that
 * runs east, just north of it: zones that share their edges never both hold a point and never lose one.
 * Longitudes that differ by whole turns are the same place. Throws RangeError where the arrays differ in length.
 */
export function locateInZones(grid: ZoneGrid, lonDegrees: Float64Array, latDegrees: Float64Array): Int32Array {
  const count = lonDegrees.length
  if (latDegrees.length !== count)
    throw new RangeError(`lonDegrees has ${count} points, latDegrees has ${latDegrees.length}`)
  const { west, east } = grid.extent
  const located = new Int32Array(count)
  for (let i = 0; i < count; i++) {
    const lon = lonDegrees[i]
    const lat = latDegrees[i] === 90 ? justBelowPole : latDegrees[i]
    if (lon >= west && lon < west + 360 && lon > east - 360) {
      located[i] = locateWritten(grid, lon, lat)
      continue
    }
    let zone = noZone
    located[i] = noZone
    if (!(Math.abs(lon) < Infinity)) continue
    const lastTurn = Math.floor((east - lon) / 360)
    for (let turn = Math.ceil((west - lon) / 360); turn <= lastTurn; turn++) {
      const found = locateWritten(grid, lon + 360 * turn, lat)
      if (found !== noZone && found !== zone) zone = zone === noZone ? found : manyZones
    }
    located[i] = zone
  }
  return located
}

/** The zone at longitude x as written, latitude y. */
function locateWritten(grid: ZoneGrid, x: number, y: number): number {
  const { edges, edgeZone, extent, columns, rows, cellStart, entryEdge, entryBits, background } = grid
  if (!(x >= extent.west && x <= extent.east && y >= extent.south && y <= extent.north)) return noZone
  const column = Math.min(columns - 1, Math.floor((x - grid.west) / grid.cellWidth))
  const row = Math.min(rows - 1, Math.floor((y - grid.south) / grid.cellHeight))
  const cell = row * columns + column
  const westSide = grid.west + column * grid.cellWidth
  const end = cellStart[cell + 1]
  let found = background[cell]
  let entry = cellStart[cell]
  while (entry < end) {
    const zone = edgeZone[entryEdge[entry]]
    let isInside = (entryBits[entry] & holdsReference) !== 0
    for (; entry < end && edgeZone[entryEdge[entry]] === zone; entry++) {
      const edge = entryEdge[entry]
      // from the reference point along the west side to the point's latitude, then east to the point
      if (crossesNorth(edges, edge, westSide, y) !== (entryBits[entry] & northOfReference) > 0) isInside = !isInside
      if (crossesEast(edges, edge, westSide, y) !== crossesEast(edges, edge, x, y)) isInside = !isInside
    }
    if (isInside) found = found === noZone ? zone : manyZones
  }
  return found
}
