/**
 * The study's `estimation.spatial`, from the file to the standard errors: against the sum over all pairs of the influence
 * values, with distances from geographiclib (Karney 2013). Conley 1999; METHODS section 4.
 */
import geodesic from 'geographiclib-geodesic'
import { describe, expect, it } from 'vitest'
import { entriesOf } from '../../src/analysis/entries.js'
import { estimateMain, hasReason, type LineEstimate } from '../../src/analysis/estimating.js'
import { placeStudy } from '../../src/analysis/placing.js'
import { seededRandom } from '../../src/math/index.js'
import { box, metresAround, type Point, zone } from '../borders/makeZones.js'
import { groundStudy } from './groundStudies.js'

const at = metresAround(8, 50)
const zones = [zone('west', box(at, 0, 0, 2000, 4000)), zone('east', box(at, 2000, 0, 4000, 4000))]

function studied() {
  const random = seededRandom(5)
  const points: Point[] = []
  const y = new Float64Array(500)
  for (let i = 0; i < y.length; i++) {
    const [east, north] = [4000 * random.next(), 4000 * random.next()]
    points.push(at(east, north))
    y[i] = Math.sin(north / 300) + Math.cos(east / 300) + 0.3 * random.normal()
  }
  const { study, inputs } = groundStudy(zones, ['east'], points, y, {
    lines: ['unit: km', 'piece: 2'],
    rest: ['estimation: {spatial: 0.7, bandwidth: 1.2}'],
  })
  const placed = placeStudy(study, inputs)
  if (!placed.ok) throw new Error('not placed')
  const made = estimateMain(study, placed.value, entriesOf(study, inputs.table, placed.value, 'y'), undefined)
  return { made, points }
}

describe('the spatial variance of a study', () => {
  const { made, points } = studied()

  const summed = ({ jump: a }: LineEstimate, { jump: b }: LineEstimate) => {
    let sum = 0
    a.influence.key.forEach((row, i) => {
      b.influence.key.forEach((other, j) => {
        const [[lon, lat], [otherLon, otherLat]] = [points[row], points[other]]
        const metres = geodesic.Geodesic.WGS84.Inverse(lat, lon, otherLat, otherLon).s12 as number
        sum += a.influence.psi[i] * b.influence.psi[j] * Math.max(0, 1 - metres / 700)
      })
    })
    return sum
  }
  const [pooled, ...lines] = [made.pooled, ...made.lines].map((estimate) => {
    if (hasReason(estimate)) throw new Error(estimate.reason)
    return estimate
  })

  it('is that of the pooled estimate and of every piece', () => {
    expect(made).toMatchObject({ lineVariance: 'spatial', pooledVariance: 'spatial' })
    expect(lines).toHaveLength(2)
    for (const estimate of [pooled, ...lines]) {
      expect(estimate.jump.influence.key.length).toBeGreaterThan(100)
      expect(estimate.jump.corrected.standardError ** 2 / summed(estimate, estimate)).toBeCloseTo(1, 9)
    }
  })

  it('holds between neighbouring pieces, which share no unit', () => {
    const { covariance, isDiagonal } = made.effects
    expect(isDiagonal).toBe(false)
    expect(covariance[1] / summed(lines[0], lines[1])).toBeCloseTo(1, 8)
  })
})
