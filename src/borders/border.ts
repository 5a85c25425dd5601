/** From zones to the border between treated and untreated ones: shared stretches, pieces, barriers. */
import { distance } from 'fastest-levenshtein'
import type { Checked, Problem } from '../problem.js'
import { type LineLayer, setAsideAlong } from './barriers.js'
import { type Boundaries, boundariesOf, edgeArrays, setEdge } from './boundaries.js'
import { joinPaths } from './chains.js'
import { smallestGap } from './gap.js'
import { listed, placeText, shown } from './geojson.js'
import { coincidentMetres, measureNearness } from './nearness.js'
import { overlapProblems } from './overlaps.js'
import { cutIntoPieces, type Piece, stepMetres } from './pieces.js'
import { buildSegmentTree, type Edges, type SegmentTree } from './segmentTree.js'
import { type SharedPath, sharedPaths } from './sharedBorders.js'
import { withoutWhiskers } from './whiskers.js'
import { buildZoneGrid, type ZoneGrid } from './zoneGrid.js'
import type { Zones } from './zones.js'

export interface BorderOptions {
  /** Names of the treated zones, or the property and value that mark them. */
  readonly treated: readonly string[] | { readonly property: string; readonly equals: string | number | boolean }
  /** Boundaries no farther apart than this are one border; at least a millimetre is used. */
  readonly snapMetres: number
  readonly pieceMetres: number
  readonly barriers: readonly { readonly layer: LineLayer; readonly withinMetres: number }[]
}

/** What is left of the border after a step. */
export interface BorderStep {
  readonly step: string
  readonly pieces: number
  readonly km: number
  /** Pairs of zones. */
  readonly pairs: number
}

/** The border between treated and untreated zones. Edges run piece after piece, in the order of `pieces`. */
export interface Border {
  readonly zones: Zones
  /** 1 for a treated zone; in the order of `zones`. */
  readonly treatedZone: Uint8Array
  /** By pair of names, then along the pair's border; those set aside among them. */
  readonly pieces: readonly Piece[]
  readonly edges: Edges
  readonly tree: SegmentTree
  readonly grid: ZoneGrid
  readonly pieceOfEdge: Int32Array
  /** Where each edge begins along its pair's border. */
  readonly positionMetres: Float64Array
  /** Length of each edge. */
  readonly lengthMetres: Float64Array
  readonly waterfall: readonly BorderStep[]
}

/**
 * Finds the border. Nothing in it depends on the order of features or rings, on where a ring starts or which way it
 * runs; only `treatedZone` follows the file. Problems: a treated name that is no zone, nothing treated or nothing
 * untreated, zones that overlap by more than snap, no shared border at all.
 * Throws RangeError where snap is negative or the piece length not positive.
 */
export function prepareBorder(zones: Zones, options: BorderOptions): Checked<Border> {
  const { snapMetres, pieceMetres } = options
  if (!(snapMetres >= 0)) throw new RangeError(`snapMetres must be 0 or more: got ${snapMetres}`)
  if (!(pieceMetres > 0)) throw new RangeError(`pieceMetres must be above 0: got ${pieceMetres}`)
  const metres = Math.max(snapMetres, coincidentMetres)
  const problems: Problem[] = []
  const treatedZone = treatedZones(zones, options.treated, problems)
  const order = zones.names.map((_, i) => i).sort((a, b) => (zones.names[a] < zones.names[b] ? -1 : 1))
  const polygons = order.map((zone) => zones.polygons[zone])
  const names = order.map((zone) => zones.names[zone])
  const isTreated = Uint8Array.from(order, (zone) => treatedZone[zone])
  const boundaries = boundariesOf(polygons)
  const nearness = measureNearness(boundaries, metres)
  problems.push(...overlapProblems(boundaries, nearness, polygons, names, zones.file, metres))
  if (problems.length > 0) return { ok: false, problems }
  const paths = sharedPaths(boundaries, nearness, (own, other) => isTreated[own] > isTreated[other], metres)
    .map((path) => withoutWhiskers(boundaries, path, metres))
    .filter((path) => path !== undefined)
  if (paths.length === 0) return { ok: false, problems: [noBorder(zones.file, boundaries, isTreated, snapMetres)] }
  let pieces = piecesOfPairs(paths, names, pieceMetres)
  const waterfall = [stepOf('shared borders', pieces)]
  for (const { layer, withinMetres } of options.barriers) {
    pieces = setAsideAlong(pieces, layer, withinMetres)
    waterfall.push(stepOf(`barrier ${layer.file}`, pieces))
  }
  const grid = buildZoneGrid(zones.polygons)
  return { ok: true, value: { zones, treatedZone, pieces, ...edgesOfPieces(pieces), grid, waterfall } }
}

/** Pieces by pair, pairs by untreated and then treated name. Zones are numbered in the order of their names. */
function piecesOfPairs(paths: readonly SharedPath[], names: readonly string[], pieceMetres: number): Piece[] {
  const sorted = [...paths].sort((a, b) => a.untreated - b.untreated || a.treated - b.treated)
  const pieces: Piece[] = []
  for (let from = 0, to = 0; from < sorted.length; from = to) {
    const { untreated, treated } = sorted[from]
    while (to < sorted.length && sorted[to].untreated === untreated && sorted[to].treated === treated) to++
    const chains = joinPaths(sorted.slice(from, to).map((path) => path.points))
    pieces.push(...cutIntoPieces(chains, [names[untreated], names[treated]], pieceMetres))
  }
  return pieces
}

function stepOf(step: string, pieces: readonly Piece[]): BorderStep {
  const left = pieces.filter((piece) => piece.setAside === undefined)
  const km = left.reduce((sum, piece) => sum + piece.lengthMetres, 0) / 1000
  return { step, pieces: left.length, km, pairs: new Set(left.map((piece) => JSON.stringify(piece.zones))).size }
}

function treatedZones(zones: Zones, treated: BorderOptions['treated'], problems: Problem[]): Uint8Array {
  const { file, names, properties } = zones
  const say = (what: string, found: string, todo: string) => problems.push({ file, what, found, todo })
  let isTreated: Uint8Array
  if ('property' in treated) {
    const { property, equals } = treated
    isTreated = Uint8Array.from(properties, (own) => (own[property] === equals ? 1 : 0))
    const values = [...new Set(properties.map((own) => own[property]).filter((value) => value !== undefined))]
    if (values.length === 0) {
      const existing = listed([...new Set(properties.flatMap((own) => Object.keys(own)))])
      say(`treated.property: no zone has ${shown(property)}`, 'nothing', `name one that exists: ${existing}`)
      return isTreated
    }
    if (!isTreated.includes(1)) {
      const todo = `name a value that exists: ${listed(values.map(shown))}`
      say(`treated.equals: no zone has this ${property}`, shown(equals), todo)
      return isTreated
    }
  } else {
    const known = new Set(names)
    for (const name of treated) {
      if (known.has(name)) continue
      const near = nearestName(name, names)
      say('treated: no zone has this name', shown(name), near ? `did you mean ${shown(near)}?` : 'name a zone')
    }
    isTreated = Uint8Array.from(names, (name) => (treated.includes(name) ? 1 : 0))
    if (problems.length > 0) return isTreated
    if (!isTreated.includes(1)) say('treated: no zone is treated', 'an empty list', `name zones: ${listed(names)}`)
  }
  if (!isTreated.includes(0))
    say('treated: every zone is treated', `${names.length} zones`, 'leave at least one zone untreated')
  return isTreated
}

/** The zone name with the fewest letters to change, if that is less than half of them; case is no difference. */
function nearestName(name: string, names: readonly string[]): string | undefined {
  const wanted = name.toLowerCase()
  let best: string | undefined
  let least = Math.max(1, Math.ceil(name.length / 2))
  for (const candidate of names) {
    const changes = distance(wanted, candidate.toLowerCase())
    if (changes < least) {
      best = candidate
      least = changes
    }
  }
  return best
}

function noBorder(file: string, boundaries: Boundaries, isTreated: Uint8Array, snapMetres: number): Problem {
  const gap = smallestGap(boundaries, isTreated)
  const place = placeText(gap.lon, gap.lat)
  const what = 'treated and untreated zones share no border'
  if (gap.metres <= Math.max(snapMetres, coincidentMetres))
    return { file, what, found: `they meet only at a corner, near ${place}`, todo: 'check which zones are treated' }
  const metres = gap.metres >= 10 ? Math.ceil(gap.metres) : Number(gap.metres.toPrecision(2))
  const todo = `if they are meant to touch, set snap above ${metres}; now it is ${snapMetres}`
  return { file, what, found: `the smallest gap is ${metres} m, near ${place}`, todo }
}

/** Edges of the pieces, piece after piece, with a tree over them. */
function edgesOfPieces(pieces: readonly Piece[]) {
  const count = pieces.reduce((sum, piece) => sum + piece.coordinates.length - 1, 0)
  const edges = edgeArrays(count)
  const pieceOfEdge = new Int32Array(count)
  const positionMetres = new Float64Array(count)
  const lengthMetres = new Float64Array(count)
  let e = 0
  pieces.forEach(({ coordinates, startMetres }, p) => {
    let position = startMetres
    stepMetres(coordinates).forEach((length, i) => {
      setEdge(edges, e, coordinates[i][0], coordinates[i][1], coordinates[i + 1][0], coordinates[i + 1][1])
      pieceOfEdge[e] = p
      positionMetres[e] = position
      lengthMetres[e] = length
      position += length
      e++
    })
  })
  return { edges, tree: buildSegmentTree(edges), pieceOfEdge, positionMetres, lengthMetres }
}
