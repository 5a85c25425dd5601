import { crossesEast, crossesNorth, type UpwardEdges } from './zoneCrossing.js'

/** No zone, and more than one zone. */
export const noZone = -1
export const manyZones = -2

/** Bits of an entry: its zone holds the cell's reference point; its edge crosses the ray north of the reference point. */
export const holdsReference = 1
export const northOfReference = 2

/**
 * A grid of cells over the zones, in degrees. Each cell knows the edges that come into it and which zones hold its
 * reference point, the middle of its west side; a point is then settled by the edges between the two.
 */
export interface ZoneGrid {
  readonly edges: UpwardEdges
  /** Zone of each edge. */
  readonly edgeZone: Int32Array
  readonly columns: number
  readonly rows: number
  readonly west: number
  readonly south: number
  readonly cellWidth: number
  readonly cellHeight: number
  /** Extent of the zones' vertices. */
  readonly extent: { readonly west: number; readonly east: number; readonly south: number; readonly north: number }
  /** Entries of cell c (row by row from the south-west): cellStart[c] to cellStart[c + 1] - 1, by zone. */
  readonly cellStart: Int32Array
  readonly entryEdge: Int32Array
  readonly entryBits: Uint8Array
  /** For each cell, of the zones that have no edge in it, the one that covers it; or noZone, or manyZones. */
  readonly background: Int32Array
}

type Position = readonly number[]
type MultiPolygon = readonly (readonly (readonly Position[])[])[]

/** Cells for each edge; edges between two zones are there twice. */
const cellsPerEdge = 2.5
const mostCells = 16_000_000

/**
 * Builds the grid. zones: GeoJSON MultiPolygon coordinates of each zone, degrees; a zone across 180° is either split
 * there or written past it (lon 181); longitudes are taken as written. Inside is even-odd over all rings of a zone,
 * so winding does not matter. An open ring is closed. Throws RangeError where a coordinate is not finite.
 */
export function buildZoneGrid(zones: readonly MultiPolygon[]): ZoneGrid {
  const { edges, edgeZone, extent } = collectEdges(zones)
  const count = edgeZone.length
  const width = Math.max(extent.east - extent.west, 1e-6)
  const height = Math.max(extent.north - extent.south, 1e-6)
  const cells = Math.max(1, Math.min(mostCells, cellsPerEdge * count))
  const columns = Math.max(1, Math.min(cells, Math.round(Math.sqrt((cells * width) / height))))
  const rows = Math.max(1, Math.floor(cells / columns))
  // the margin puts every reference point of the first column west of all zones
  const frame = {
    edges,
    edgeZone,
    columns: Math.floor(columns),
    rows,
    west: extent.west - 0.01 * width,
    south: extent.south - 0.01 * height,
    cellWidth: (1.02 * width) / Math.floor(columns),
    cellHeight: (1.02 * height) / rows,
    extent,
  }
  const { cellStart, entryEdge } = listEntries(frame)
  return { ...frame, cellStart, entryEdge, ...settleReferences(frame, zones.length, cellStart, entryEdge) }
}

type Frame = Omit<ZoneGrid, 'cellStart' | 'entryEdge' | 'entryBits' | 'background'>

function collectEdges(zones: readonly MultiPolygon[]): Pick<ZoneGrid, 'edges' | 'edgeZone' | 'extent'> {
  let most = 0
  for (const polygons of zones) for (const rings of polygons) for (const ring of rings) most += ring.length
  const x0 = new Float64Array(most)
  const y0 = new Float64Array(most)
  const x1 = new Float64Array(most)
  const y1 = new Float64Array(most)
  const edgeZone = new Int32Array(most)
  let count = 0
  const extent = { west: Infinity, east: -Infinity, south: Infinity, north: -Infinity }
  const add = (zone: number, from: Position, to: Position): void => {
    const [fromX, fromY] = from
    const [toX, toY] = to
    if (!(Number.isFinite(fromX) && Number.isFinite(fromY)))
      throw new RangeError(`zone ${zone} has a vertex at (${fromX}, ${fromY})`)
    extent.west = Math.min(extent.west, fromX)
    extent.east = Math.max(extent.east, fromX)
    extent.south = Math.min(extent.south, fromY)
    extent.north = Math.max(extent.north, fromY)
    if (fromX === toX && fromY === toY) return
    const isUpward = fromY < toY || (fromY === toY && fromX < toX)
    x0[count] = isUpward ? fromX : toX
    y0[count] = isUpward ? fromY : toY
    x1[count] = isUpward ? toX : fromX
    y1[count] = isUpward ? toY : fromY
    edgeZone[count++] = zone
  }
  for (let zone = 0; zone < zones.length; zone++)
    for (const rings of zones[zone])
      for (const ring of rings) for (let k = 0; k < ring.length; k++) add(zone, ring[k], ring[(k + 1) % ring.length])
  if (count === 0) Object.assign(extent, { west: 0, east: 0, south: 0, north: 0 })
  const edges = {
    x0: x0.slice(0, count),
    y0: y0.slice(0, count),
    x1: x1.slice(0, count),
    y1: y1.slice(0, count),
  }
  return { edges, edgeZone: edgeZone.slice(0, count), extent }
}

/** Lists, for each cell, the edges that touch it or come within rounding of it, in the order of the edges. */
function listEntries(frame: Frame): Pick<ZoneGrid, 'cellStart' | 'entryEdge'> {
  const cellStart = new Int32Array(frame.columns * frame.rows + 1)
  visitCells(frame, (cell) => {
    cellStart[cell + 1]++
  })
  for (let cell = 0; cell < frame.columns * frame.rows; cell++) cellStart[cell + 1] += cellStart[cell]
  const next = cellStart.slice()
  const entryEdge = new Int32Array(cellStart[frame.columns * frame.rows])
  visitCells(frame, (cell, edge) => {
    entryEdge[next[cell]++] = edge
  })
  return { cellStart, entryEdge }
}

function visitCells(frame: Frame, visit: (cell: number, edge: number) => void): void {
  const { columns, rows, west, south, cellWidth, cellHeight } = frame
  const { x0, y0, x1, y1 } = frame.edges
  const padX = 1e-9 * cellWidth + 1e-12
  const padY = 1e-9 * cellHeight + 1e-12
  for (let edge = 0; edge < x0.length; edge++) {
    const startX = x0[edge]
    const startY = y0[edge]
    const endX = x1[edge]
    const endY = y1[edge]
    const lowX = Math.min(startX, endX)
    const highX = Math.max(startX, endX)
    const slant = endY > startY ? (endX - startX) / (endY - startY) : 0
    const firstRow = Math.max(0, Math.floor((startY - padY - south) / cellHeight))
    const lastRow = Math.min(rows - 1, Math.floor((endY + padY - south) / cellHeight))
    for (let row = firstRow; row <= lastRow; row++) {
      let fromX = lowX
      let toX = highX
      if (slant !== 0) {
        const bottom = Math.max(startY, south + row * cellHeight - padY)
        const top = Math.min(endY, south + (row + 1) * cellHeight + padY)
        const bottomX = startX + (bottom - startY) * slant
        const topX = startX + (top - startY) * slant
        fromX = Math.max(lowX, Math.min(bottomX, topX))
        toX = Math.min(highX, Math.max(bottomX, topX))
      }
      const firstColumn = Math.max(0, Math.floor((fromX - padX - west) / cellWidth))
      const lastColumn = Math.min(columns - 1, Math.floor((toX + padX - west) / cellWidth))
      for (let column = firstColumn; column <= lastColumn; column++) visit(row * columns + column, edge)
    }
  }
}

/** Walks each row from west to east through the reference points and notes which zones hold each. */
function settleReferences(
  frame: Frame,
  zoneCount: number,
  cellStart: Int32Array,
  entryEdge: Int32Array,
): Pick<ZoneGrid, 'entryBits' | 'background'> {
  const { edges, edgeZone, columns, rows, west, south, cellWidth, cellHeight } = frame
  const entryBits = new Uint8Array(entryEdge.length)
  const background = new Int32Array(columns * rows)
  const seenIn = new Int32Array(zoneCount).fill(-1)
  for (let row = 0; row < rows; row++) {
    const y = south + (row + 0.5) * cellHeight
    const inside = new Set<number>()
    for (let column = 0; column < columns; column++) {
      const cell = row * columns + column
      const x = west + column * cellWidth
      const nextX = west + (column + 1) * cellWidth
      const from = cellStart[cell]
      const to = cellStart[cell + 1]
      for (let entry = from; entry < to; entry++) {
        const edge = entryEdge[entry]
        const zone = edgeZone[edge]
        seenIn[zone] = cell
        if (inside.has(zone)) entryBits[entry] |= holdsReference
        if (crossesNorth(edges, edge, x, y)) entryBits[entry] |= northOfReference
      }
      let covering = noZone
      for (const zone of inside) if (seenIn[zone] !== cell) covering = covering === noZone ? zone : manyZones
      background[cell] = covering
      for (let entry = from; entry < to; entry++) {
        const edge = entryEdge[entry]
        if (crossesEast(edges, edge, x, y) === crossesEast(edges, edge, nextX, y)) continue
        const zone = edgeZone[edge]
        if (!inside.delete(zone)) inside.add(zone)
      }
    }
  }
  return { entryBits, background }
}
