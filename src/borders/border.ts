/** From zones to the border between treated and untreated ones, or between zones of different dose. */
import type { Checked, Problem } from '../problem.js'
import { type Boundaries, boundariesOf, edgeArrays, setEdge } from './boundaries.js'
import { joinPaths } from './chains.js'
import { type BorderEnd, type Corner, cornersAt } from './corners.js'
import { splitsByDose } from './dose.js'
import { facingApartProblems } from './fabricApart.js'
import { coincidentMetres, measureNearness, type Nearness } from './nearness.js'
import { noBorder } from './noBorder.js'
import { outsidePaths } from './outside.js'
import { overlapProblems } from './overlaps.js'
import { factsOfPiece } from './pieceFacts.js'
import { cutIntoPieces, type Piece, stepMetres } from './pieces.js'
import { outsideName, type Roles, rolesOf, sortedRoles } from './roles.js'
import { buildSegmentTree, type Edges, type SegmentTree } from './segmentTree.js'
import { type Relevance, type SharedPath, sharedPaths } from './sharedBorders.js'
import type { Treated } from './treated.js'
import { withoutWhiskers } from './whiskers.js'
import { buildZoneGrid, type ZoneGrid } from './zoneGrid.js'
import type { Zones } from './zones.js'

/** Either `treated` or `dose`. */
export interface BorderOptions {
  /** Names of the treated zones, or the property and value that mark them. */
  readonly treated?: Treated
  /** A numeric property: borders are those between zones where it differs, the higher dose being the treated side. */
  readonly dose?: string
  /** `untreated`: the land outside every zone is an untreated zone named `outside`. By default it is none. */
  readonly outside?: 'set-aside' | 'untreated'
  /** Boundaries no farther apart than this are one border; at least a millimetre is used. */
  readonly snapMetres: number
  readonly pieceMetres: number
}

/** The border, its geometry and facts; what counts of it is decided later (`eligible`). */
export interface Border {
  /** As read. */
  readonly zones: Zones
  /** Names of the zones in the order of `zones`; last among them `outside` where the land outside is one. */
  readonly names: readonly string[]
  /** Index of the zone that the land outside is, or -1. */
  readonly outsideZone: number
  /** By `names`: 1 for a treated zone; with doses, 1 for a dose above the lowest. */
  readonly treatedZone: Uint8Array
  /** By `names`, where the border is between zones of different dose. */
  readonly doses?: Float64Array
  /** Units serve the borders of their own zone alone, the piece tells their side: set where zones of equal status meet. */
  readonly isEqualStatus?: boolean
  /** By pair of zones, then along the pair's border. */
  readonly pieces: readonly Piece[]
  /** Indices of each piece's two zones. */
  readonly untreatedOfPiece: Int32Array
  readonly treatedOfPiece: Int32Array
  readonly corners: readonly Corner[]
  /** Edges run piece after piece, in the order of `pieces`. */
  readonly edges: Edges
  readonly tree: SegmentTree
  readonly grid: ZoneGrid
  readonly pieceOfEdge: Int32Array
  /** Where each edge begins along its pair's border. */
  readonly positionMetres: Float64Array
  /** Length of each edge. */
  readonly lengthMetres: Float64Array
}

/**
 * Finds the border. Nothing in it depends on the order of features or rings, on where a ring starts or which way it
 * runs; only what is indexed by zone follows the file. Problems: a treated name that is no zone, nothing treated or
 * nothing untreated, doses missing or all the same, zones that overlap by more than snap, no shared border at all, a pair
 * that faces each other a little beyond snap and shares none.
 * Throws RangeError where snap is negative, the piece length not positive, or not one of treated and dose is given.
 */
export function prepareBorder(zones: Zones, options: BorderOptions): Checked<Border> {
  const prepared = prepareZones(zones, options)
  if (!prepared.ok) return prepared
  const { roles, order, boundaries, nearness, metres } = prepared.value
  const sortedNames = order.map((zone) => zones.names[zone])
  const sorted = sortedRoles(roles, order)
  const paths = pairPaths(boundaries, nearness, sorted, roles.outsideZone, metres)
  if (paths.length === 0) {
    const splits = roles.doses ? splitsByDose(roles.doses) : [roles.treatedZone]
    const who = roles.doses ? 'zones whose dose differs' : 'treated and untreated zones'
    const sortedSplits = splits.map((split) => Uint8Array.from(order, (zone) => split[zone]))
    return { ok: false, problems: [noBorder(zones.file, boundaries, who, sortedSplits, options.snapMetres)] }
  }
  const problems = facingApartProblems(boundaries, sorted.isRelevant, paths, sortedNames, zones.file, metres)
  if (problems.length > 0) return { ok: false, problems }
  return { ok: true, value: borderOfPaths(zones, prepared.value, options.pieceMetres, paths) }
}

/** What borders are found in. */
export interface PreparedZones {
  readonly roles: Roles
  /** As `Border` has them. */
  readonly names: readonly string[]
  /** Zones by name: their indices in the file. */
  readonly order: readonly number[]
  /** Zones in the order of their names. */
  readonly boundaries: Boundaries
  readonly nearness: Nearness
  /** The tolerance. */
  readonly metres: number
}

/** The roles of the zones and how near their boundaries are; the problems and errors are those of `prepareBorder`. */
export function prepareZones(zones: Zones, options: BorderOptions): Checked<PreparedZones> {
  const { snapMetres, pieceMetres } = options
  if (!(snapMetres >= 0)) throw new RangeError(`snapMetres must be 0 or more: got ${snapMetres}`)
  if (!(pieceMetres > 0)) throw new RangeError(`pieceMetres must be above 0: got ${pieceMetres}`)
  const metres = Math.max(snapMetres, coincidentMetres)
  const problems: Problem[] = []
  const roles = rolesOf(zones, options, problems)
  const order = zones.names.map((_, i) => i).sort((a, b) => (zones.names[a] < zones.names[b] ? -1 : 1))
  const polygons = order.map((zone) => zones.polygons[zone])
  const sortedNames = order.map((zone) => zones.names[zone])
  const boundaries = boundariesOf(polygons)
  const nearness = measureNearness(boundaries, metres)
  problems.push(...overlapProblems(boundaries, nearness, polygons, sortedNames, zones.file, metres))
  if (problems.length > 0) return { ok: false, problems }
  const names = namesOf(zones, roles)
  return { ok: true, value: { roles, names, order, boundaries, nearness, metres } }
}

/** Names of the zones, and of the land outside where that is one. */
export function namesOf(zones: Zones, { outsideZone }: Roles): readonly string[] {
  return outsideZone < 0 ? zones.names : [...zones.names, outsideName]
}

/** The border along the paths, or along those that are wanted; the others only make corners where they end. */
export function borderOfPaths(
  zones: Zones,
  { roles, names, order, metres }: Pick<PreparedZones, 'roles' | 'names' | 'order' | 'metres'>,
  pieceMetres: number,
  paths: readonly PairPath[],
  isWanted: (path: PairPath) => boolean = () => true,
): Border {
  const zoneOf = [...order, roles.outsideZone]
  const { pieces, ends } = piecesOfPairs(paths, isWanted, names, zoneOf, roles.doses, pieceMetres, metres)
  return borderOfPieces(zones, roles, names, pieces, cornersAt(ends, names, metres))
}

/** The border that pieces make. */
export function borderOfPieces(
  zones: Zones,
  roles: Roles,
  names: readonly string[],
  pieces: readonly Piece[],
  corners: readonly Corner[],
): Border {
  const index = new Map(names.map((name, zone) => [name, zone]))
  return {
    zones,
    names,
    ...roles,
    pieces,
    untreatedOfPiece: Int32Array.from(pieces, (piece) => index.get(piece.zones[0]) as number),
    treatedOfPiece: Int32Array.from(pieces, (piece) => index.get(piece.zones[1]) as number),
    corners,
    ...edgesOfPieces(pieces),
    grid: buildZoneGrid(zones.polygons),
  }
}

/** A stretch of border of a pair of zones, numbered in the order of their names; the land outside comes last. */
export type PairPath = Pick<SharedPath, 'treated' | 'untreated' | 'points'>

function pairPaths(
  boundaries: Boundaries,
  nearness: Nearness,
  { isTreated, isRelevant }: ReturnType<typeof sortedRoles>,
  outsideZone: number,
  metres: number,
): PairPath[] {
  const paths = pathsWhere(boundaries, nearness, isRelevant, metres)
  if (outsideZone < 0) return paths
  const all = [...paths, ...pathsWhere(boundaries, nearness, (own) => isTreated[own] === 1, metres)]
  const outside = outsidePaths(boundaries, nearness, isTreated, all)
  return [...paths, ...outside.map((path) => ({ ...path, untreated: outsideZone }))]
}

/** Shared stretches of the pairs that are wanted, without whiskers. */
export function pathsWhere(
  boundaries: Boundaries,
  nearness: Nearness,
  isWanted: Relevance,
  metres: number,
): SharedPath[] {
  return sharedPaths(boundaries, nearness, isWanted, metres)
    .map((path) => withoutWhiskers(boundaries, path, metres))
    .filter((path) => path !== undefined)
}

/** Pieces by pair, pairs by untreated and then treated name, and where the borders of pairs end. */
function piecesOfPairs(
  paths: readonly PairPath[],
  isWanted: (path: PairPath) => boolean,
  names: readonly string[],
  zoneOf: readonly number[],
  doses: Float64Array | undefined,
  pieceMetres: number,
  metres: number,
): { pieces: Piece[]; ends: BorderEnd[] } {
  const sorted = [...paths].sort((a, b) => a.untreated - b.untreated || a.treated - b.treated)
  const pieces: Piece[] = []
  const ends: BorderEnd[] = []
  for (let from = 0, to = 0; from < sorted.length; from = to) {
    const { untreated, treated } = sorted[from]
    while (to < sorted.length && sorted[to].untreated === untreated && sorted[to].treated === treated) to++
    const chains = joinPaths(sorted.slice(from, to).map((path) => path.points))
    const zones = [zoneOf[untreated], zoneOf[treated]] as const
    for (const { points } of chains) {
      const [first, last] = [points[0], points[points.length - 1]]
      if (first[0] === last[0] && first[1] === last[1]) continue
      for (const [lon, lat] of [first, last]) ends.push({ lon, lat, zones })
    }
    if (!isWanted(sorted[from])) continue
    const dose = doses && doses[zones[1]] - doses[zones[0]]
    for (const piece of cutIntoPieces(chains, [names[zones[0]], names[zones[1]]], pieceMetres)) {
      const facts = factsOfPiece(piece.coordinates, metres)
      pieces.push(dose === undefined ? { ...piece, ...facts } : { ...piece, ...facts, dose })
    }
  }
  return { pieces, ends }
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
