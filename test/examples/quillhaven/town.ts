/**
 * The map of Quillhaven, an invented town on an invented bay: zones that share their edges vertex by vertex,
 * and a river that follows part of the levy border. Plans are in metres east and north of the middle of town.
 */
import { type Draws, drawsFrom } from '../random.js'

export type Plan = readonly [eastMetres: number, northMetres: number]
export type LonLat = readonly [lonDegrees: number, latDegrees: number]

export interface Town {
  readonly zones: readonly { readonly name: string; readonly levied: boolean; readonly ring: readonly LonLat[] }[]
  readonly river: readonly LonLat[]
  /** Middle of the stretch of border that the river follows. */
  readonly bankMiddle: Plan
}

/** Cells of a bent grid, north at the top and the bay below the last row; cells of one name are one zone. */
const CELLS = [
  ['Upfell', 'Upfell', 'Thornlow', 'Cranemoor', 'Cranemoor'],
  ['Millrow', 'Orchard', 'Thornlow', 'Kiln', 'Eastmoor'],
  ['Millrow', 'Weir', 'Market', 'Foundry', 'Eastmoor'],
  ['Gullside', 'Ropewalk', 'Harbour', 'Tidegate', 'Spit'],
] as const
export const LEVIED: readonly string[] = ['Weir', 'Market', 'Foundry', 'Ropewalk', 'Harbour']

const COLUMNS = 5
const ROWS = 4
const CELL_METRES = 2300
const MIDDLE: LonLat = [-17.62, 47.21]
const METRES_PER_DEGREE_LAT = 111_180
const METRES_PER_DEGREE_LON = 75_740

export function lonLatOf([east, north]: Plan): LonLat {
  const round = (degrees: number) => Math.round(degrees * 1e6) / 1e6
  return [round(MIDDLE[0] + east / METRES_PER_DEGREE_LON), round(MIDDLE[1] + north / METRES_PER_DEGREE_LAT)]
}

export function planOf([lon, lat]: LonLat): Plan {
  return [(lon - MIDDLE[0]) * METRES_PER_DEGREE_LON, (lat - MIDDLE[1]) * METRES_PER_DEGREE_LAT]
}

export function drawTown(seed = 41): Town {
  const draws = drawsFrom(seed)
  const nodes = drawNodes(draws)
  const edges = new Map<string, readonly Plan[]>()
  for (let row = 0; row <= ROWS; row++)
    for (let column = 0; column <= COLUMNS; column++) {
      if (column < COLUMNS) {
        const isCoast = row === ROWS
        const bends = isCoast ? 17 : draws.whole(6, 11)
        const edge = bentEdge(nodes[row][column], nodes[row][column + 1], bends, isCoast ? 170 : 120, draws)
        edges.set(edgeKey(row, column, row, column + 1), edge.map(swept))
      }
      if (row < ROWS) {
        const edge = bentEdge(nodes[row][column], nodes[row + 1][column], draws.whole(6, 11), 120, draws)
        edges.set(edgeKey(row, column, row + 1, column), edge.map(swept))
      }
    }
  const names = [...new Set<string>(CELLS.flat())].sort()
  const zones = names.map((name) => ({
    name,
    levied: LEVIED.includes(name),
    ring: ringOf(name, edges).map(lonLatOf),
  }))
  const bank = edges.get(edgeKey(2, 1, 3, 1)) as readonly Plan[]
  return { zones, river: drawRiver(bank, draws).map(lonLatOf), bankMiddle: bank[Math.floor(bank.length / 2)] }
}

/** Corners of the grid, row 0 in the north, each moved a little. */
function drawNodes(draws: Draws): Plan[][] {
  return Array.from({ length: ROWS + 1 }, (_, row) =>
    Array.from({ length: COLUMNS + 1 }, (_, column): Plan => {
      const east = (column - COLUMNS / 2) * CELL_METRES + (draws.uniform() - 0.5) * 1000
      const north = (ROWS / 2 - row) * CELL_METRES + (draws.uniform() - 0.5) * 1000
      return [east, north]
    }),
  )
}

/** The grid as the ground bends it: streets that sweep, and a bay that reaches into the middle of the south shore. */
function swept([east, north]: Plan): Plan {
  const bay = 1500 * Math.exp(-(((east - 300) / 2400) ** 2)) * Math.max(0, 0.5 - north / 9200)
  return [east + 650 * Math.sin(north / 2300 + 0.6), north + 450 * Math.sin(east / 2100) + bay]
}

/** From one corner to another in bends that fade towards both, so that edges which meet there do not cross. */
function bentEdge(from: Plan, to: Plan, bends: number, metres: number, draws: Draws): Plan[] {
  const points: Plan[] = [from]
  const length = Math.hypot(to[0] - from[0], to[1] - from[1])
  for (let bend = 1; bend <= bends; bend++) {
    const along = (bend + 0.4 * (draws.uniform() - 0.5)) / (bends + 1)
    const across = (metres * 4 * along * (1 - along) * (2 * draws.uniform() - 1)) / length
    const east = from[0] + along * (to[0] - from[0]) - across * (to[1] - from[1])
    const north = from[1] + along * (to[1] - from[1]) + across * (to[0] - from[0])
    points.push([east, north])
  }
  return [...points, to]
}

function edgeKey(rowA: number, columnA: number, rowB: number, columnB: number): string {
  return `${rowA},${columnA}>${rowB},${columnB}`
}

/** The outer ring of the cells of one name, anticlockwise: their edges without those between two of them. */
function ringOf(name: string, edges: ReadonlyMap<string, readonly Plan[]>): Plan[] {
  const next = new Map<string, { to: string; points: readonly Plan[] }>()
  const walk = (a: readonly [number, number], b: readonly [number, number]) => {
    const forward = edges.get(edgeKey(...a, ...b))
    const points = forward ?? [...(edges.get(edgeKey(...b, ...a)) as readonly Plan[])].reverse()
    next.set(String(a), { to: String(b), points })
  }
  for (let row = 0; row < ROWS; row++)
    for (let column = 0; column < COLUMNS; column++) {
      if (CELLS[row][column] !== name) continue
      if (CELLS[row + 1]?.[column] !== name) walk([row + 1, column], [row + 1, column + 1])
      if (CELLS[row][column + 1] !== name) walk([row + 1, column + 1], [row, column + 1])
      if (CELLS[row - 1]?.[column] !== name) walk([row, column + 1], [row, column])
      if (CELLS[row][column - 1] !== name) walk([row, column], [row + 1, column])
    }
  const start = [...next.keys()][0]
  const ring: Plan[] = []
  let at = start
  do {
    const side = next.get(at) as { to: string; points: readonly Plan[] }
    ring.push(...side.points.slice(0, -1))
    at = side.to
  } while (at !== start)
  return [...ring, ring[0]]
}

/** From the hills in the north, 20 to 60 metres west of the border along `bank`, and through Gullside to the bay. */
function drawRiver(bank: readonly Plan[], draws: Draws): Plan[] {
  const follow = bank.map(([east, north]): Plan => [east - 20 - 40 * draws.uniform(), north])
  const [headEast, headNorth] = follow[0]
  const [footEast, footNorth] = follow[follow.length - 1]
  const upstream = [5, 4, 3, 2, 1].map(
    (step): Plan => [headEast - 140 * step - 250 * draws.uniform(), headNorth + 900 * step],
  )
  const downstream = [1, 2, 3, 4].map(
    (step): Plan => [footEast - 330 * step - 120 * draws.uniform(), footNorth - 750 * step],
  )
  return [...upstream, ...follow, ...downstream]
}
