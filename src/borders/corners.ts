/** Corners: places on the border where three zones meet, so that two pairs' borders end there. */
import { edgeArrays, setEdge } from './boundaries.js'
import { edgeBoxes, edgesNearby } from './edgeBoxes.js'
import { geodesicMetres } from './geodesy.js'
import { cornerTolerances } from './sharedBorders.js'

export interface Corner {
  /** Degrees. */
  readonly lon: number
  readonly lat: number
  /** Names of the zones, three or more, sorted. */
  readonly zones: readonly string[]
}

/** Where the border of a pair of zones ends. */
export interface BorderEnd {
  readonly lon: number
  readonly lat: number
  /** Numbers of the two zones. */
  readonly zones: readonly [number, number]
}

/**
 * Ends of borders where other pairs' borders end within four tolerances, so that three zones or more take part; ends
 * within four tolerances of each other are one corner, at the first of them by longitude, then latitude. An end at a
 * coast is no corner, unless the land outside is a zone.
 */
export function cornersAt(ends: readonly BorderEnd[], names: readonly string[], metres: number): Corner[] {
  if (ends.length === 0) return []
  const around = ({ lon }: BorderEnd) => ((lon + 540) % 360) - 180
  const sorted = [...ends].sort((a, b) => around(a) - around(b) || a.lat - b.lat)
  const edges = edgeArrays(sorted.length)
  sorted.forEach(({ lon, lat }, e) => {
    setEdge(edges, e, lon, lat, lon, lat)
  })
  const boxes = edgeBoxes(edges)
  const radius = cornerTolerances * metres
  const isTaken = new Uint8Array(sorted.length)
  const corners: Corner[] = []
  sorted.forEach(({ lon, lat }, i) => {
    if (isTaken[i]) return
    const near = edgesNearby(boxes, lon, lat, lon, lat, radius).filter(
      (e) => geodesicMetres(lon, lat, sorted[e].lon, sorted[e].lat) <= radius,
    )
    const zones = [...new Set(near.flatMap((e) => sorted[e].zones))]
    if (zones.length < 3) return
    for (const e of near) isTaken[e] = 1
    corners.push({ lon: around(sorted[i]), lat, zones: zones.map((zone) => names[zone]).sort() })
  })
  return corners
}
