/** What the tolerance does to the border used: how far it lies from the zones' own edges, and which units that touches. */
import { booleanPointInPolygon } from '@turf/turf'
import type { Border } from './border.js'
import { boundariesOf } from './boundaries.js'
import type { Fabric, Sliver } from './fabric.js'
import { feetAlong } from './fabricSamples.js'
import { buildZoneGrid, locateInZones, manyZones, noZone } from './zoneGrid.js'

/** Untreated and treated zone, as in a piece's `zones`. */
type PairNames = readonly [untreated: string, treated: string]

export interface PairFit {
  readonly zones: PairNames
  /** The farthest any part of the pair's border lies from the untreated and from the treated zone's own edge. */
  readonly untreatedMetres: number
  readonly treatedMetres: number
}

/** Which of the border's pairs are farthest off: by distance, farthest first. The land outside has no edge of its own. */
export function borderFit(border: Border, snapMetres: number): readonly PairFit[] {
  const { zones, pieces, outsideZone } = border
  const boundaries = boundariesOf(zones.polygons)
  const reachMetres = 2 * snapMetres + 1
  const farthest = (zone: number, coordinates: readonly (readonly [number, number])[]): number => {
    if (zone === outsideZone) return 0
    let most = 0
    for (let i = 0; i + 1 < coordinates.length; i++) {
      const [[lon0, lat0], [lon1, lat1]] = [coordinates[i], coordinates[i + 1]]
      for (const { foot } of feetAlong(boundaries, [lon0, lat0, lon1, lat1], zone, reachMetres)) {
        most = Math.max(most, foot?.metres ?? reachMetres)
      }
    }
    return most
  }
  const pairs = new Map<string, { -readonly [K in keyof PairFit]: PairFit[K] }>()
  pieces.forEach(({ zones: names, coordinates }, p) => {
    const key = JSON.stringify(names)
    const pair = pairs.get(key) ?? { zones: names, untreatedMetres: 0, treatedMetres: 0 }
    pairs.set(key, pair)
    pair.untreatedMetres = Math.max(pair.untreatedMetres, farthest(border.untreatedOfPiece[p], coordinates))
    pair.treatedMetres = Math.max(pair.treatedMetres, farthest(border.treatedOfPiece[p], coordinates))
  })
  const most = (fit: PairFit) => Math.max(fit.untreatedMetres, fit.treatedMetres)
  return [...pairs.values()].sort((a, b) => most(b) - most(a))
}

export interface SideChanges {
  /** In no zone, in a gap between the two zones of a pair. */
  readonly inGaps: number
  /** In both zones of a pair. */
  readonly inOverlaps: number
  /** Both: units between the two zones' own edges, on one side of the border used and on the other of the other edge. */
  readonly between: number
  /** Most units first; pairs without such units are left out. */
  readonly pairs: readonly { readonly zones: PairNames; readonly inGaps: number; readonly inOverlaps: number }[]
}

/**
 * Counts units whose side would be another one if the border ran along the other zone's edge: those in the gaps and
 * overlaps of the border's pairs. On the map they are in no zone or in two. lon, lat: degrees, NaN where missing.
 * Throws RangeError where the lists differ in length.
 */
export function unitsChangingSide(border: Border, fabric: Fabric, lon: Float64Array, lat: Float64Array): SideChanges {
  const located = locateInZones(border.grid, lon, lat)
  const pairs = pairsOf(border)
  const slivers = fabric.slivers.filter(({ zones }) => pairs.has(keyOf(zones)))
  const rows = Int32Array.from(located.keys()).filter((i) => located[i] === noZone || located[i] === manyZones)
  const counts = new Map<string, { gap: number; overlap: number }>()
  if (slivers.length > 0 && rows.length > 0) {
    for (const kind of ['gap', 'overlap'] as const) {
      const own = slivers.filter((sliver) => sliver.kind === kind)
      const wanted = kind === 'gap' ? noZone : manyZones
      const units = rows.filter((i) => located[i] === wanted)
      for (const sliver of sliversHolding(own, lon, lat, units)) {
        const key = keyOf(sliver.zones)
        const count = counts.get(key) ?? { gap: 0, overlap: 0 }
        count[kind]++
        counts.set(key, count)
      }
    }
  }
  const listed = [...counts].map(([key, { gap, overlap }]) => ({
    zones: pairs.get(key) as PairNames,
    inGaps: gap,
    inOverlaps: overlap,
  }))
  listed.sort((a, b) => b.inGaps + b.inOverlaps - a.inGaps - a.inOverlaps || (keyOf(a.zones) < keyOf(b.zones) ? -1 : 1))
  const inGaps = listed.reduce((sum, pair) => sum + pair.inGaps, 0)
  const inOverlaps = listed.reduce((sum, pair) => sum + pair.inOverlaps, 0)
  return { inGaps, inOverlaps, between: inGaps + inOverlaps, pairs: listed }
}

/** The sliver that holds each of the units that is in one. */
function sliversHolding(slivers: readonly Sliver[], lon: Float64Array, lat: Float64Array, units: Int32Array): Sliver[] {
  if (slivers.length === 0 || units.length === 0) return []
  const grid = buildZoneGrid(slivers.map((sliver) => [[sliver.ring]]))
  const lons = Float64Array.from(units, (i) => lon[i])
  const lats = Float64Array.from(units, (i) => lat[i])
  const found = locateInZones(grid, lons, lats)
  const holds = ({ ring }: Sliver, x: number, y: number) =>
    booleanPointInPolygon([x, y], { type: 'Polygon', coordinates: [ring.map((point) => [...point])] })
  const holding: Sliver[] = []
  for (let k = 0; k < units.length; k++) {
    if (found[k] === noZone) continue
    // where slivers of several pairs meet, the first that holds the unit
    const first = found[k] === manyZones ? slivers.findIndex((sliver) => holds(sliver, lons[k], lats[k])) : found[k]
    if (first >= 0) holding.push(slivers[first])
  }
  return holding
}

function keyOf(zones: readonly [string, string]): string {
  return JSON.stringify(zones[0] < zones[1] ? zones : [zones[1], zones[0]])
}

function pairsOf({ pieces }: Border): Map<string, PairNames> {
  return new Map(pieces.map(({ zones }) => [keyOf(zones), zones]))
}
