/** Layers of lines beside the border (rivers, railways, other jurisdictions), and how much of each piece runs along one. */
import { flattenEach, polygonToLine } from '@turf/turf'
import type { Feature, FeatureCollection, LineString, MultiLineString, MultiPolygon, Polygon } from 'geojson'
import type { Checked, Problem } from '../problem.js'
import { edgeArrays, setEdge } from './boundaries.js'
import { edgeLengthMetres } from './geodesy.js'
import { featuresOf, geometryOf, type RingCoords, shown } from './geojson.js'
import { localPlane, withinOfSegment } from './localPlane.js'
import type { CutPiece } from './pieces.js'
import { emptyExtent, rangeProblem } from './positions.js'
import { turnsTo, unwrapped } from './rings.js'
import { buildSegmentTree, type Edges, edgesNearEdge, type SegmentTree } from './segmentTree.js'
import { readPositions, sayer } from './zoneProblems.js'

/** Lines of a GeoJSON layer; polygons give their boundaries. */
export interface LineLayer {
  /** The file as the user named it. */
  readonly file: string
  /** Polylines in degrees, two positions at least; longitudes run on past 180 where one crosses the antimeridian. */
  readonly lines: readonly RingCoords[]
}

const lineTypes = ['LineString', 'MultiLineString', 'Polygon', 'MultiPolygon']

/** Checks and reads a line layer: LineString, MultiLineString, and Polygon or MultiPolygon for their boundaries. */
export function readLineLayer(content: unknown, file: string): Checked<LineLayer> {
  const problems: Problem[] = []
  const features = featuresOf(content, file, problems)
  if (!features) return { ok: false, problems }
  const extent = emptyExtent()
  const good: Feature<LineString | MultiLineString | Polygon | MultiPolygon>[] = []
  features.forEach((feature, i) => {
    const geometry = geometryOf(feature, i, file, lineTypes, problems)
    if (!geometry) return
    const before = problems.length
    const depth = { LineString: 0, MultiLineString: 1, Polygon: 1, MultiPolygon: 2 }[geometry.type as string] as number
    checkLines(geometry.coordinates, depth, i, 'line', extent, sayer(file, i, problems))
    if (problems.length === before) good.push({ type: 'Feature', properties: {}, geometry: geometry as never })
  })
  const outOfRange = rangeProblem(extent, file)
  if (outOfRange) problems.push(outOfRange)
  if (problems.length > 0) return { ok: false, problems }
  return { ok: true, value: { file, lines: linesOf(good) } }
}

function checkLines(
  coordinates: unknown,
  depth: number,
  feature: number,
  place: string,
  extent: ReturnType<typeof emptyExtent>,
  say: ReturnType<typeof sayer>,
): void {
  if (depth === 0) {
    const positions = readPositions(coordinates, feature, place, extent, say)
    if (positions && positions.length < 2)
      say(`${place} needs at least 2 positions`, `${positions.length}`, 'complete the line, or remove it')
    return
  }
  if (!Array.isArray(coordinates) || coordinates.length === 0) {
    say(`${place}: coordinates must be a list of lines`, shown(coordinates), 'give the feature its lines')
    return
  }
  coordinates.forEach((part: unknown, i) => {
    checkLines(part, depth - 1, feature, `${place} ${i}`, extent, say)
  })
}

function linesOf(features: Feature<LineString | MultiLineString | Polygon | MultiPolygon>[]): RingCoords[] {
  const collection: FeatureCollection<LineString | MultiLineString | Polygon | MultiPolygon> = {
    type: 'FeatureCollection',
    features,
  }
  const lines: RingCoords[] = []
  const add = (line: number[][]) => lines.push(unwrapped(line, false))
  flattenEach(collection, ({ geometry }) => {
    if (geometry.type === 'LineString') add(geometry.coordinates)
    if (geometry.type !== 'Polygon') return
    const boundary = polygonToLine(geometry)
    const parts = boundary.type === 'Feature' ? [boundary] : boundary.features
    for (const part of parts) {
      if (part.geometry.type === 'LineString') add(part.geometry.coordinates)
      else for (const line of part.geometry.coordinates) add(line)
    }
  })
  return lines
}

/** The lines as GeoJSON MultiLineString coordinates, for a map. */
export function linesOfLayer(layer: LineLayer): readonly RingCoords[] {
  return layer.lines
}

/** Edges are measured in planes no longer than this. */
const planeMetres = 1000

/**
 * Share of each piece's length within `withinMetres` of the layer, in the order of the pieces: the exact interval of
 * every edge within each edge of the layer, in planes of at most 1 km, merged. A layer without lines is near nothing.
 * Throws RangeError where withinMetres is negative.
 */
export function shareNear(
  { pieces }: { readonly pieces: readonly CutPiece[] },
  layer: LineLayer,
  withinMetres: number,
): Float64Array {
  if (!(withinMetres >= 0)) throw new RangeError(`withinMetres must be 0 or more: got ${withinMetres}`)
  const edges = edgesOfLines(layer.lines)
  if (edges.lon0.length === 0) return new Float64Array(pieces.length)
  const tree = buildSegmentTree(edges)
  return Float64Array.from(pieces, (piece) => shareAlong(piece, edges, tree, withinMetres))
}

function edgesOfLines(lines: readonly RingCoords[]): Edges {
  const edges = edgeArrays(lines.reduce((sum, line) => sum + line.length - 1, 0))
  let e = 0
  for (const line of lines) {
    for (let i = 0; i + 1 < line.length; i++, e++) {
      setEdge(edges, e, line[i][0], line[i][1], line[i + 1][0], line[i + 1][1])
    }
  }
  return edges
}

/** Share of a piece's length within `metres` of the edges. */
export function shareAlong(piece: CutPiece, edges: Edges, tree: SegmentTree, metres: number): number {
  let [near, total] = [0, 0]
  for (let i = 0; i + 1 < piece.coordinates.length; i++) {
    const [[lon0, lat0], [lon1, lat1]] = [piece.coordinates[i], piece.coordinates[i + 1]]
    const length = edgeLengthMetres(lon0, lat0, lon1, lat1)
    const parts = Math.max(1, Math.ceil(length / planeMetres))
    for (let part = 0; part < parts; part++) {
      const at = (t: number): [number, number] => [lon0 + t * (lon1 - lon0), lat0 + t * (lat1 - lat0)]
      near += (shareOfStretch(at(part / parts), at((part + 1) / parts), edges, tree, metres) * length) / parts
    }
    total += length
  }
  return total > 0 ? near / total : 0
}

function shareOfStretch(
  [lon0, lat0]: [number, number],
  [lon1, lat1]: [number, number],
  edges: Edges,
  tree: SegmentTree,
  metres: number,
): number {
  const candidates: number[] = []
  edgesNearEdge(tree, lon0, lat0, lon1, lat1, metres, candidates)
  const plane = localPlane((lon0 + lon1) / 2, (lat0 + lat1) / 2)
  const interval = new Float64Array(2)
  const found: [number, number][] = []
  for (const f of candidates) {
    const shift = turnsTo((edges.lon0[f] + edges.lon1[f]) / 2, plane.lon) - lon0
    const isNear = withinOfSegment(
      (lon1 - lon0) * plane.metresPerLon,
      (lat1 - lat0) * plane.metresPerLat,
      (edges.lon0[f] + shift) * plane.metresPerLon,
      (edges.lat0[f] - lat0) * plane.metresPerLat,
      (edges.lon1[f] + shift) * plane.metresPerLon,
      (edges.lat1[f] - lat0) * plane.metresPerLat,
      metres,
      interval,
    )
    if (isNear) found.push([interval[0], interval[1]])
  }
  return lengthOfUnion(found)
}

function lengthOfUnion(intervals: [number, number][]): number {
  intervals.sort((a, b) => a[0] - b[0])
  let [sum, reached] = [0, 0]
  for (const [from, to] of intervals) {
    if (to <= reached) continue
    sum += to - Math.max(from, reached)
    reached = to
  }
  return sum
}
