/** Edges by their boxes in degrees: which of them may come near a given edge? */
import Flatbush from 'flatbush'
import type { Edges } from './segmentTree.js'

export interface EdgeBoxes {
  readonly index: Flatbush
  readonly west: number
  readonly east: number
}

/** A degree of latitude is nowhere shorter. */
const leastMetresPerLat = 110_000
/** A degree of longitude at a latitude is nowhere shorter than this times its cosine. */
const leastMetresPerLon = 111_000

/** There must be at least one edge. */
export function edgeBoxes({ lon0, lat0, lon1, lat1 }: Edges): EdgeBoxes {
  const index = new Flatbush(lon0.length)
  for (let e = 0; e < lon0.length; e++) {
    index.add(
      Math.min(lon0[e], lon1[e]),
      Math.min(lat0[e], lat1[e]),
      Math.max(lon0[e], lon1[e]),
      Math.max(lat0[e], lat1[e]),
    )
  }
  index.finish()
  return { index, west: index.minX, east: index.maxX }
}

/** Degrees of longitude and latitude that are at least `metres`, anywhere near the latitudes given. */
export function roomAround(metres: number, lat0: number, lat1: number): { lon: number; lat: number } {
  const lat = metres / leastMetresPerLat
  const cosine = Math.cos((Math.min(90, Math.max(Math.abs(lat0), Math.abs(lat1)) + lat) * Math.PI) / 180)
  return { lon: Math.min(360, metres / (leastMetresPerLon * Math.max(cosine, 1e-9))), lat }
}

/**
 * All edges that come within `metres` of the straight lon/lat edge, and some that don't, in ascending order.
 * Edges written on another turn of the globe are found too.
 */
export function edgesNearby(
  { index, west, east }: EdgeBoxes,
  lon0: number,
  lat0: number,
  lon1: number,
  lat1: number,
  metres: number,
): number[] {
  const room = roomAround(metres, lat0, lat1)
  const south = Math.min(lat0, lat1) - room.lat
  const north = Math.max(lat0, lat1) + room.lat
  const from = Math.min(lon0, lon1) - room.lon
  const to = Math.max(lon0, lon1) + room.lon
  const first = Math.ceil((west - to) / 360)
  const last = Math.floor((east - from) / 360)
  if (first === 0 && last === 0) return index.search(from, south, to, north).sort((a, b) => a - b)
  const found = new Set<number>()
  for (let turn = first; turn <= last; turn++) {
    for (const e of index.search(from + 360 * turn, south, to + 360 * turn, north)) found.add(e)
  }
  return [...found].sort((a, b) => a - b)
}
