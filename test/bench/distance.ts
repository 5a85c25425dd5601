import { buildSegmentTree, type Edges, nearestEdges } from '../../src/borders/segmentTree.js'
import { buildZoneGrid, locateInZones } from '../../src/borders/zoneGrid.js'

/**
 * Distance of many points to many border edges, and their zones, in one thread.
 * The map is a square of rectangular zones with jagged borders, longitude -110 to -80, latitude 30 to 50;
 * half of the points are uniform, half lie within about 20 km of a border.
 */

/** mulberry32, from memory; good enough to scatter points. */
export function seededUniform(seed: number): () => number {
  let state = seed
  return () => {
    state = (state + 0x6d2b79f5) | 0
    let t = Math.imul(state ^ (state >>> 15), 1 | state)
    t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296
  }
}

type Position = [number, number]

/** From one corner to the next, displaced at midpoints: 2^levels edges. */
function jaggedLine(from: Position, to: Position, levels: number, uniform: () => number): Position[] {
  let line = [from, to]
  for (let level = 0; level < levels; level++) {
    const finer: Position[] = [line[0]]
    for (let k = 1; k < line.length; k++) {
      const [x0, y0] = line[k - 1]
      const [x1, y1] = line[k]
      const shift = (uniform() - 0.5) * 0.2
      finer.push([(x0 + x1) / 2 + shift * (y1 - y0), (y0 + y1) / 2 - shift * (x1 - x0)], line[k])
    }
    line = finer
  }
  return line
}

export interface JaggedMap {
  readonly zones: Position[][][][]
  readonly edges: Edges
}

/** side x side zones; each border line has 2^levels edges. */
export function jaggedMap(side: number, levels: number, seed: number): JaggedMap {
  const uniform = seededUniform(seed)
  const corner = (i: number, j: number): Position => [-110 + (30 * i) / side, 30 + (20 * j) / side]
  const east: Position[][][] = []
  const north: Position[][][] = []
  const list: number[] = []
  const keep = (line: Position[]): Position[] => {
    for (let k = 1; k < line.length; k++) list.push(...line[k - 1], ...line[k])
    return line
  }
  for (let i = 0; i <= side; i++) {
    east.push([])
    north.push([])
    for (let j = 0; j <= side; j++) {
      east[i].push(i < side ? keep(jaggedLine(corner(i, j), corner(i + 1, j), levels, uniform)) : [])
      north[i].push(j < side ? keep(jaggedLine(corner(i, j), corner(i, j + 1), levels, uniform)) : [])
    }
  }
  const zones: Position[][][][] = []
  for (let i = 0; i < side; i++) {
    for (let j = 0; j < side; j++) {
      const ring = [...east[i][j].slice(0, -1), ...north[i + 1][j].slice(0, -1)]
      ring.push(...[...east[i][j + 1]].reverse().slice(0, -1), ...[...north[i][j]].reverse())
      zones.push([[ring]])
    }
  }
  const count = list.length / 4
  const column = (at: number): Float64Array => Float64Array.from({ length: count }, (_, k) => list[4 * k + at])
  return { zones, edges: { lon0: column(0), lat0: column(1), lon1: column(2), lat1: column(3) } }
}

export function scatteredPoints(map: JaggedMap, count: number, seed: number): { lon: Float64Array; lat: Float64Array } {
  const uniform = seededUniform(seed)
  const lon = new Float64Array(count)
  const lat = new Float64Array(count)
  const { lon0, lat0 } = map.edges
  for (let i = 0; i < count; i++) {
    const edge = Math.floor(uniform() * lon0.length)
    const isNear = i % 2 === 0
    lon[i] = isNear ? lon0[edge] + (uniform() - 0.5) * 0.4 : -110 + 30 * uniform()
    lat[i] = isNear ? lat0[edge] + (uniform() - 0.5) * 0.4 : 30 + 20 * uniform()
  }
  return { lon, lat }
}

/** Least and mean milliseconds of `repeats` runs, after one to warm up. */
function timed(repeats: number, run: () => void): { least: number; mean: number } {
  run()
  let least = Infinity
  let sum = 0
  for (let k = 0; k < repeats; k++) {
    const started = performance.now()
    run()
    const passed = performance.now() - started
    least = Math.min(least, passed)
    sum += passed
  }
  return { least, mean: sum / repeats }
}

/** Prints a table: build apart from query, nanoseconds for each point, and the exponents of growth in points and edges. */
export async function benchDistance(): Promise<void> {
  const maps = [
    { side: 8, levels: 3 },
    { side: 17, levels: 4 },
    { side: 39, levels: 5 },
  ]
  const pointCounts = [1e4, 1e5, 1e6]
  console.log('Distance and zone of points, one thread (least of the runs; the mean in brackets)')
  console.log('   edges    points   build ms   nearest ns/point    zone ns/point   both, s   exponent in points')
  const atMost: { edges: number; seconds: number }[] = []
  for (const { side, levels } of maps) {
    const map = jaggedMap(side, levels, 1)
    const build = timed(2, () => {
      buildSegmentTree(map.edges)
      buildZoneGrid(map.zones)
    })
    const tree = buildSegmentTree(map.edges)
    const grid = buildZoneGrid(map.zones)
    let before = Number.NaN
    for (const count of pointCounts) {
      const { lon, lat } = scatteredPoints(map, count, 2)
      const repeats = count > 5e5 ? 2 : 4
      const nearest = timed(repeats, () => nearestEdges(tree, lon, lat))
      const zone = timed(repeats, () => locateInZones(grid, lon, lat))
      const seconds = (nearest.least + zone.least) / 1000
      const exponent = Number.isNaN(before) ? '' : Math.log10(seconds / before).toFixed(2)
      const perPoint = ({ least, mean }: { least: number; mean: number }): string =>
        `${((least * 1e6) / count).toFixed(0)} (${((mean * 1e6) / count).toFixed(0)})`
      console.log(
        `${String(map.edges.lon0.length).padStart(8)}${String(count).padStart(10)}${build.least.toFixed(0).padStart(11)}` +
          `${perPoint(nearest).padStart(19)}${perPoint(zone).padStart(17)}${seconds.toFixed(3).padStart(10)}${exponent.padStart(21)}`,
      )
      before = seconds
      if (count === 1e6) atMost.push({ edges: map.edges.lon0.length, seconds })
    }
  }
  const [first, last] = [atMost[0], atMost[atMost.length - 1]]
  const inEdges = Math.log(last.seconds / first.seconds) / Math.log(last.edges / first.edges)
  console.log(`Exponent in edges, ${first.edges} to ${last.edges}, at 1,000,000 points: ${inEdges.toFixed(2)}`)
}
