/** How zones fit together: every stretch of their boundaries with what lies beyond it, and every gap and overlap. */
import { type Boundaries, boundariesOf, pointOfEdge } from './boundaries.js'
import { type Part, partsOfRing, pathsByRing, type Reaches, runsOf, type StretchLabel } from './fabricParts.js'
import { gapOf, samplesAlong } from './fabricSamples.js'
import { type SliverShape, sliversAlong } from './fabricSlivers.js'
import { coincidentMetres, measureNearness } from './nearness.js'
import { sharedPaths } from './sharedBorders.js'
import { withoutWhiskers } from './whiskers.js'
import { partMetres } from './zoneFoot.js'
import type { Zones } from './zones.js'

/** An unbroken stretch of one zone's boundary with one label (`StretchLabel`). */
export interface Stretch {
  readonly zone: string
  readonly label: StretchLabel
  readonly lengthMetres: number
  /** [longitude, latitude] in degrees, along the zone's own boundary; no vertex is moved. */
  readonly points: readonly (readonly [number, number])[]
  /** Where it is shared, or another zone faces it beyond the tolerance. */
  readonly beside?: {
    readonly zone: string
    /** How much of the stretch coincides with that zone's boundary, to a millimetre. */
    readonly exactMetres: number
    /** Distance to that zone's boundary. */
    readonly largestGapMetres: number
    readonly meanGapMetres: number
  }
}

/** A gap or overlap between two zones, in the order of their names. */
export interface Sliver extends SliverShape {
  readonly zones: readonly [string, string]
  readonly isWithinSnap: boolean
}

/** Metres of a zone's boundary by label; the labels' metres add up to the whole. */
export interface ZoneBoundary {
  readonly zone: string
  readonly boundaryMetres: number
  readonly metres: Readonly<Record<StretchLabel, number>>
}

/** Two zones that share a border or face each other beyond the tolerance, in the order of their names. */
export interface ZonePair {
  readonly zones: readonly [string, string]
  /** Means of what is measured along both boundaries. */
  readonly sharedMetres: number
  readonly beyondMetres: number
  /** On any shared stretch, and on any beyond the tolerance; 0 where there is none. */
  readonly largestSharedGapMetres: number
  readonly largestBeyondGapMetres: number
}

export interface Fabric extends Reaches {
  readonly zones: readonly ZoneBoundary[]
  readonly pairs: readonly ZonePair[]
  readonly stretches: readonly Stretch[]
  /** Widest first. */
  readonly slivers: readonly Sliver[]
}

/** Zones that face each other farther apart than the tolerance are looked for as far as this many tolerances ... */
const reachTolerances = 5
/** ... and at least this far: boundaries of one official file were found 108 m apart. */
const leastReachMetres = 250

/**
 * Labels and measures the boundaries of all zones, by name of zone and place, whatever the order of the file.
 * Errors: lengths are those of straight lon/lat edges to 1e-10; gaps are distances in a local plane, right to a
 * millionth of themselves up to 250 m (outside 80° S to 80° N: worse). Throws RangeError where snap is negative.
 */
export function fabricOf(zones: Zones, snapMetres: number): Fabric {
  if (!(snapMetres >= 0)) throw new RangeError(`snapMetres must be 0 or more: got ${snapMetres}`)
  const metres = Math.max(snapMetres, coincidentMetres)
  const reaches = { snapMetres: metres, reachMetres: Math.max(reachTolerances * metres, leastReachMetres) }
  const order = zones.names.map((_, i) => i).sort((a, b) => (zones.names[a] < zones.names[b] ? -1 : 1))
  const names = order.map((zone) => zones.names[zone])
  const boundaries = boundariesOf(order.map((zone) => zones.polygons[zone]))
  const nearness = measureNearness(boundaries, metres)
  const paths = sharedPaths(boundaries, nearness, (own, other) => own !== other, metres)
    .map((path) => withoutWhiskers(boundaries, path, metres))
    .filter((path) => path !== undefined)
  const stretches: Stretch[] = []
  const slivers: Sliver[] = []
  pathsByRing(boundaries, paths).forEach((shared, ring) => {
    const parts = partsOfRing(boundaries, ring, shared, reaches)
    for (const run of runsOf(parts)) stretches.push(stretchOf(boundaries, run, names, reaches))
    slivers.push(...sliversOfRing(boundaries, parts, names, reaches))
  })
  slivers.sort((a, b) => b.widestMetres - a.widestMetres || b.squareMetres - a.squareMetres || a.lon - b.lon)
  return { ...reaches, zones: byZone(names, stretches), pairs: byPair(stretches), stretches, slivers }
}

/** The first `most` of the slivers, and what the others come to. */
export function widestSlivers(
  { slivers }: Fabric,
  most = 100,
): { readonly listed: readonly Sliver[]; readonly others: { readonly count: number; readonly squareMetres: number } } {
  const others = slivers.slice(most)
  const squareMetres = others.reduce((sum, sliver) => sum + sliver.squareMetres, 0)
  return { listed: slivers.slice(0, most), others: { count: others.length, squareMetres } }
}

function stretchOf(boundaries: Boundaries, run: readonly Part[], names: readonly string[], reaches: Reaches): Stretch {
  const [{ edge, label, other }] = run
  const points = run.map((part) => pointOfEdge(boundaries.edges, part.edge, part.from))
  const end = run[run.length - 1]
  points.push(pointOfEdge(boundaries.edges, end.edge, end.to))
  const lengths = run.map((part) => partMetres(boundaries, part.edge, part.from, part.to))
  const total = (wanted: (part: Part) => boolean) =>
    lengths.reduce((sum, length, i) => (wanted(run[i]) ? sum + length : sum), 0)
  const stretch = { zone: names[boundaries.zoneOfEdge[edge]], label, lengthMetres: total(() => true), points }
  if (other < 0) return stretch
  const { largestMetres, meanMetres } = gapOf(samplesAlong(boundaries, run, other, reaches), reaches.reachMetres)
  const exactMetres = total((part) => part.isExact)
  return {
    ...stretch,
    beside: { zone: names[other], exactMetres, largestGapMetres: largestMetres, meanGapMetres: meanMetres },
  }
}

/** Between a ring's zone and each zone after it in order, along stretches that join whatever their label. */
function sliversOfRing(
  boundaries: Boundaries,
  parts: readonly Part[],
  names: readonly string[],
  reaches: Reaches,
): Sliver[] {
  const own = boundaries.zoneOfEdge[parts[0].edge]
  return runsOf(parts, (a, b) => a.other === b.other).flatMap((run) => {
    const { other } = run[0]
    if (other <= own || run.every((part) => part.isExact)) return []
    const samples = samplesAlong(boundaries, run, other, reaches)
    return sliversAlong(boundaries, samples, own, other, reaches.reachMetres).map((shape) => ({
      ...shape,
      zones: [names[own], names[other]] as const,
      isWithinSnap: shape.widestMetres <= 1.001 * reaches.snapMetres,
    }))
  })
}

function byZone(names: readonly string[], stretches: readonly Stretch[]): ZoneBoundary[] {
  const sums = new Map<string, Record<StretchLabel, number>>()
  for (const zone of names) sums.set(zone, { shared: 0, 'beyond tolerance': 0, hole: 0, outer: 0, seam: 0 })
  for (const { zone, label, lengthMetres } of stretches) {
    const metres = sums.get(zone)
    if (metres) metres[label] += lengthMetres
  }
  return [...sums].map(([zone, metres]) => ({
    zone,
    boundaryMetres: Object.values(metres).reduce((sum, length) => sum + length, 0),
    metres,
  }))
}

function byPair(stretches: readonly Stretch[]): ZonePair[] {
  const pairs = new Map<string, { -readonly [K in keyof ZonePair]: ZonePair[K] }>()
  for (const { zone, label, lengthMetres, beside } of stretches) {
    if (!beside) continue
    const zones = zone < beside.zone ? ([zone, beside.zone] as const) : ([beside.zone, zone] as const)
    const key = JSON.stringify(zones)
    const empty = { zones, sharedMetres: 0, beyondMetres: 0, largestSharedGapMetres: 0, largestBeyondGapMetres: 0 }
    const pair = pairs.get(key) ?? empty
    pairs.set(key, pair)
    if (label === 'shared') {
      pair.sharedMetres += lengthMetres / 2
      pair.largestSharedGapMetres = Math.max(pair.largestSharedGapMetres, beside.largestGapMetres)
    } else {
      pair.beyondMetres += lengthMetres / 2
      pair.largestBeyondGapMetres = Math.max(pair.largestBeyondGapMetres, beside.largestGapMetres)
    }
  }
  return [...pairs.values()].sort((a, b) => (JSON.stringify(a.zones) < JSON.stringify(b.zones) ? -1 : 1))
}
