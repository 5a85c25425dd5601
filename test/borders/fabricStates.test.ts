import { describe, expect, it } from 'vitest'
import { fabricOf } from '../../src/borders/fabric.js'
import { borderFit } from '../../src/borders/fabricBorder.js'
import { edgeLengthMetres, nearestEdges, type Zones } from '../../src/borders/index.js'
import { borderOf, columns, lengths, type Point, seeded, type ZoneFeature, zonesOf } from './makeZones.js'
import { sharedArcs, states } from './usStates.js'

const metresPerDegree = 111_195

function stateOf(name: string): ZoneFeature {
  return states.features.find((feature) => feature.properties?.name === name) as ZoneFeature
}

/** The same state with vertices added about every 500 m, and every vertex moved by up to a metre. */
function redrawn(state: ZoneFeature, seed: number): ZoneFeature {
  const random = seeded(seed)
  const jitter = ([lon, lat]: Point): Point => {
    const [distance, angle] = [Math.sqrt(random()), 2 * Math.PI * random()]
    const degrees = distance / metresPerDegree
    return [lon + (degrees * Math.cos(angle)) / Math.cos((lat * Math.PI) / 180), lat + degrees * Math.sin(angle)]
  }
  const ring = (positions: number[][]): Point[] => {
    const points: Point[] = []
    for (let i = 0; i + 1 < positions.length; i++) {
      const [[lon0, lat0], [lon1, lat1]] = [positions[i], positions[i + 1]]
      const parts = Math.ceil(edgeLengthMetres(lon0, lat0, lon1, lat1) / 500)
      for (let k = 0; k < parts; k++) {
        const share = (k + (k > 0 ? 0.4 * random() : 0)) / parts
        points.push(jitter([lon0 + share * (lon1 - lon0), lat0 + share * (lat1 - lat0)]))
      }
    }
    return [...points, points[0]]
  }
  const { geometry } = state
  const polygons = geometry.type === 'Polygon' ? [geometry.coordinates] : geometry.coordinates
  return { ...state, geometry: { type: 'MultiPolygon', coordinates: polygons.map((rings) => rings.map(ring)) } }
}

function pathMetres(points: readonly Point[]): number {
  return points.slice(1).reduce((sum, [lon, lat], i) => sum + edgeLengthMetres(points[i][0], points[i][1], lon, lat), 0)
}

/** Points of the border's own edges, moved by up to 50 km. */
function pointsAround(edges: readonly Point[], count: number): Point[] {
  const random = seeded(21)
  return Array.from({ length: count }, () => {
    const [lon, lat] = edges[Math.floor(random() * edges.length)]
    return [lon + (random() - 0.5) * 0.9, lat + (random() - 0.5) * 0.9]
  })
}

describe.each([
  ['Kentucky', 'Tennessee'],
  ['Missouri', 'Illinois'],
  ['Louisiana', 'Mississippi'],
  ['Maryland', 'Virginia'],
])('%s and %s', (first, second) => {
  const options = { snapMetres: 10, pieceMetres: 1e7 }
  const clean = borderOf([stateOf(first), stateOf(second)], [first], options)
  const arcs = sharedArcs(first, second).coordinates as Point[][]
  const points = pointsAround(arcs.flat(), 400)
  const [lon, lat] = columns(points)
  const cleanDistance = nearestEdges(clean.tree, lon, lat).distanceMetres

  const arcsMetres = arcs.reduce((sum, arc) => sum + pathMetres(arc), 0)

  it('share the arcs of the topology where nothing was moved', () => {
    expect(Math.abs(lengths(clean)[`${second} | ${first}`] - arcsMetres)).toBeLessThan(0.001)
  })

  it.each([
    ['treated', () => [redrawn(stateOf(first), 5), stateOf(second)]],
    ['untreated', () => [stateOf(first), redrawn(stateOf(second), 6)]],
  ])('share the same border with the %s one drawn apart', (_, features) => {
    const border = borderOf(features(), [first], options)
    const pair = `${second} | ${first}`
    expect(Math.abs(lengths(border)[pair] / lengths(clean)[pair] - 1)).toBeLessThan(0.001)
    const { distanceMetres } = nearestEdges(border.tree, lon, lat)
    const worst = distanceMetres.reduce((most, metres, i) => Math.max(most, Math.abs(metres - cleanDistance[i])), 0)
    expect(worst).toBeLessThan(2)
    const [fit] = borderFit(border, options.snapMetres)
    expect(fit.treatedMetres).toBeLessThan(0.001)
    expect(fit.untreatedMetres).toBeGreaterThan(0.5)
    expect(fit.untreatedMetres).toBeLessThan(1.01)
  })

  it('have every stretch labelled, and slivers no wider than the jitter', () => {
    const zones: Zones = zonesOf(redrawn(stateOf(first), 5), stateOf(second))
    const fabric = fabricOf(zones, options.snapMetres)
    const [pair] = fabric.pairs
    expect(Math.abs(pair.sharedMetres / arcsMetres - 1)).toBeLessThan(0.001)
    expect(pair.beyondMetres).toBeLessThan(1000)
    expect(pair.largestSharedGapMetres).toBeLessThan(1.01)
    const near = fabric.slivers.filter(({ isWithinSnap }) => isWithinSnap)
    expect(near[0].widestMetres).toBeLessThan(1.01)
    expect(near.length).toBeGreaterThan(100)
    for (const { boundaryMetres, metres } of fabric.zones) {
      const sum = metres.shared + metres['beyond tolerance'] + metres.hole + metres.outer + metres.seam
      expect(Math.abs(sum - boundaryMetres)).toBeLessThan(1e-3)
    }
  })
})
