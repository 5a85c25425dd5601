/**
 * Places points.bin against edges.bin and zones.bin of a folder, with so many threads, in a process of its own: zone,
 * nearest edge, foot, distance on the ellipsoid and position along the border. Prints the units in a zone and the sum of
 * the distances. Runs what `npm run build` made.
 */
import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { edgeLengthMetres } from '../../dist/borders/geodesy.js'
import { measureUnits } from '../../dist/borders/measured.js'
import { buildSegmentTree } from '../../dist/borders/segmentTreeBuild.js'
import { buildZoneGrid } from '../../dist/borders/zoneGrid.js'

const [folder, workers] = process.argv.slice(2)
const numbersOf = (name) => {
  const bytes = readFileSync(join(folder, name))
  return new Float64Array(bytes.buffer, bytes.byteOffset, bytes.byteLength / 8)
}
const column = (numbers, width, at) => {
  const values = new Float64Array(numbers.length / width)
  for (let i = 0; i < values.length; i++) values[i] = numbers[width * i + at]
  return values
}
const points = numbersOf('points.bin')
const [lon, lat] = [0, 1].map((at) => column(points, 2, at))
const numbers = numbersOf('edges.bin')
const [lon0, lat0, lon1, lat1] = [0, 1, 2, 3].map((at) => column(numbers, 4, at))
const edges = { lon0, lat0, lon1, lat1 }
const border = borderOf(edges, zonesOf(numbersOf('zones.bin')))
const measured =
  workers === '1'
    ? measureUnits(border, lon, lat)
    : await (await import('../../dist/cli/ground.js')).inWorkers(
        (await import('../../dist/cli/groundParts.js')).sharedBorder(border),
        lon,
        lat,
        Number(workers),
      )
let inZones = 0
for (const zone of measured.zone) if (zone >= 0) inZones++
let metres = 0
for (const distance of measured.distanceMetres) metres += distance
console.log(inZones, metres.toFixed(3))

/** Rings, each a count and as many positions: one zone each. */
function zonesOf(rings) {
  const zones = []
  for (let at = 0; at < rings.length; at += 1 + 2 * rings[at])
    zones.push([[Array.from({ length: rings[at] }, (_, k) => [rings[at + 1 + 2 * k], rings[at + 2 + 2 * k]])]])
  return zones
}

/** Thirty-two edges are a piece, all of one border. */
function borderOf(edges, zones) {
  const count = edges.lon0.length
  const lengthMetres = Float64Array.from(edges.lon0, (lon, e) =>
    edgeLengthMetres(lon, edges.lat0[e], edges.lon1[e], edges.lat1[e]),
  )
  return {
    names: zones.map((_, zone) => `${zone}`),
    outsideZone: -1,
    edges,
    tree: buildSegmentTree(edges),
    grid: buildZoneGrid(zones),
    pieceOfEdge: Int32Array.from(edges.lon0, (_, e) => e >> 5),
    untreatedOfPiece: new Int32Array(count),
    treatedOfPiece: new Int32Array(count).fill(1),
    positionMetres: new Float64Array(count),
    lengthMetres,
  }
}
