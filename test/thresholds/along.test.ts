/** Jumps along a border: bands, averages and blanks. */
import { describe, expect, it } from 'vitest'
import { normalQuantile, seededRandom, studentQuantile } from '../../src/math/index.js'
import { type Along, type AlongEstimate, type AlongOptions, estimateAlong } from '../../src/thresholds/index.js'
import { type Field, type FieldOptions, fieldOf, nearIn } from './alongField.js'

const base: FieldOptions = { n: 3000, pointsPerArm: 6, noise: 0.5, stream: 1, effect: () => 1 }
const bandwidth = { untreated: 1400, treated: 1400 }
const options = (changed: Partial<AlongOptions> = {}): AlongOptions => ({
  order: 1,
  kernel: 'triangular',
  variance: 'hc2',
  reference: 't',
  level: 0.95,
  bandwidths: { h: bandwidth, b: bandwidth },
  random: seededRandom(9),
  draws: 4000,
  ...changed,
})
const along = ({ points, units }: Field, changed?: Partial<AlongOptions>) =>
  estimateAlong(points, units, options(changed))
type Present = Extract<AlongEstimate, { ok: true }>
const present = (result: Along) => result.points.filter((point): point is Present => point.ok)

describe('bands', () => {
  const field = fieldOf(base)
  const result = along(field)

  it('every point of a border with units has an estimate, near the effect', () => {
    expect(present(result)).toHaveLength(12)
    for (const { jump } of present(result)) {
      expect(Math.abs(jump.corrected.estimate - 1)).toBeLessThan(4 * jump.corrected.standardError)
      expect(jump.corrected.standardError).toBeLessThan(0.5)
    }
  })

  it('the uniform band lies outside the pointwise one, and is t with each point’s own degrees of freedom', () => {
    const c = result.criticalValue as number
    // between one estimate's quantile and that of as many independent ones (Šidák 1967)
    expect(c).toBeGreaterThan(normalQuantile(0.975) + 0.3)
    expect(c).toBeLessThan(normalQuantile(1 - (1 - 0.95 ** (1 / 12)) / 2))
    for (const { jump, uniformLow, uniformHigh } of present(result)) {
      expect(uniformLow).toBeLessThan(jump.corrected.low)
      expect(uniformHigh).toBeGreaterThan(jump.corrected.high)
      const reach = uniformHigh - jump.corrected.estimate
      expect(reach).toBeGreaterThan(c * jump.corrected.standardError)
      const narrow = jump.corrected.high - jump.corrected.estimate
      const ratio = studentQuantile(0.999, jump.corrected.degreesOfFreedom) / normalQuantile(0.999)
      expect(reach / narrow).toBeLessThan((c / 1.959964) * ratio)
    }
    const normal = along(field, { reference: 'normal' })
    for (const { jump, uniformHigh } of present(normal)) {
      const { estimate, standardError } = jump.corrected
      expect(uniformHigh).toBeCloseTo(estimate + (normal.criticalValue as number) * standardError, 10)
    }
  })

  it('points far from each other are independent: the critical value is Šidák’s', () => {
    const few = fieldOf({ ...base, pointsPerArm: 1 })
    const [first, second] = present(along(few))
    expect(first.jump.influence.key.some((key) => second.jump.influence.key.includes(key))).toBe(false)
    expect(along(few).criticalValue).toBeCloseTo(normalQuantile(1 - (1 - Math.sqrt(0.95)) / 2), 12)
  })

  it('the same point twice is no more than one', () => {
    const places = [field.places[2], field.places[2]] as const
    const units = { ...field.units, near: nearIn(places, field.east, field.north) }
    const twice = estimateAlong(field.points.slice(0, 2), units, options({ draws: 40_000 }))
    expect(twice.criticalValue).toBeCloseTo(1.96, 1)
    expect(twice.criticalValue).toBeGreaterThanOrEqual(normalQuantile(0.975))
    const [one] = present(twice)
    const { length } = twice.average
    if (!length.ok) throw new Error(length.reason)
    expect(length.standardError).toBeCloseTo(one.jump.corrected.standardError, 12)
  })

  it('moving the map changes nothing, and so does another order of rows, to the bit', () => {
    const { points, places, units, east, north } = field
    const moved = places.map(([e, n]) => [e + 4096, n - 8192] as const)
    const near = nearIn(
      moved,
      east.map((e) => e + 4096),
      north.map((n) => n - 8192),
    )
    const shifted = estimateAlong(points, { ...units, near }, options())
    present(shifted).forEach(({ jump, uniformLow }, k) => {
      const known = present(result)[k]
      expect(jump.corrected.estimate).toBeCloseTo(known.jump.corrected.estimate, 8)
      expect(uniformLow).toBeCloseTo(known.uniformLow, 8)
    })
    const order = Array.from(units.y, (_, i) => i).sort((a, b) => Math.sin(a) - Math.sin(b))
    const pick = (values: Float64Array) => Float64Array.from(order, (i) => values[i])
    const shuffled = estimateAlong(
      points,
      {
        near: nearIn(places, pick(east), pick(north)),
        unit: units.unit,
        treated: Uint8Array.from(order, (i) => units.treated[i]),
        y: pick(units.y),
      },
      options(),
    )
    expect(shuffled.criticalValue).toBe(result.criticalValue)
    expect(shuffled.average).toEqual(result.average)
    present(shuffled).forEach(({ jump, uniformHigh }, k) => {
      expect(jump.corrected).toEqual(present(result)[k].jump.corrected)
      expect(uniformHigh).toBe(present(result)[k].uniformHigh)
    })
  })
})

describe('averages', () => {
  const field = fieldOf(base)
  const result = along(field)

  it('are the weighted means, with the standard error of the sum of influences', () => {
    const points = present(result)
    const weights = {
      length: points.map(() => 1 / points.length),
      density: points.map(({ jump }) => jump.density / points.reduce((sum, point) => sum + point.jump.density, 0)),
    }
    for (const by of ['length', 'density'] as const) {
      const average = result.average[by]
      if (!average.ok) throw new Error(average.reason)
      expect(average.kind).toBe(by)
      const sums = new Map<number, number>()
      let estimate = 0
      points.forEach(({ jump }, k) => {
        estimate += weights[by][k] * jump.corrected.estimate
        jump.influence.key.forEach((key, i) => {
          sums.set(key, (sums.get(key) ?? 0) + weights[by][k] * jump.influence.psi[i])
        })
      })
      expect(average.estimate).toBeCloseTo(estimate, 12)
      const variance = [...sums.values()].reduce((sum, psi) => sum + psi * psi, 0)
      expect(average.standardError).toBeCloseTo(Math.sqrt(variance), 12)
      expect(average.high - average.estimate).toBeCloseTo(normalQuantile(0.975) * average.standardError, 12)
    }
  })

  it('by length counts a longer stretch for more', () => {
    const points = field.points.map((point, k) => ({ ...point, lengthMetres: k === 0 ? 3000 : 1000 }))
    const { average } = estimateAlong(points, field.units, options())
    if (!average.length.ok) throw new Error(average.length.reason)
    expect(average.length.weights[0]).toBeCloseTo(3 / 14, 12)
  })

  it('by density leans to the stretch where more units are', () => {
    // two units of three in the east are dropped: the western arm has more
    const dense = fieldOf({ ...base, n: 9000 })
    const y = dense.units.y.map((value, i) => (dense.east[i] > -1500 && i % 3 > 0 ? Number.NaN : value))
    const { average, points } = along({ ...dense, units: { ...dense.units, y } })
    if (!average.length.ok || !average.density.ok) throw new Error('no average')
    expect(points.every((point) => point.ok)).toBe(true)
    expect(average.density.weights[1]).toBeGreaterThan(1.5 * average.density.weights[9])
    expect(average.length.weights[1]).toBeCloseTo(average.length.weights[9], 12)
  })
})

describe('blanks', () => {
  it('a stretch without enough units on a side has a reason, and the others stand', () => {
    const field = fieldOf(base)
    const y = field.units.y.map((value, i) => (field.north[i] > 2000 && field.east[i] < 0 ? Number.NaN : value))
    const { points, average } = along({ ...field, units: { ...field.units, y } })
    const last = points[11]
    if (last.ok) throw new Error('the last point has an estimate')
    expect(last.reason).toBe('treated side: 0 units within the bandwidth, fewer than 20')
    expect(last.units.untreated).toBeGreaterThan(50)
    if (!average.length.ok) throw new Error(average.length.reason)
    const estimated = points.filter((point) => point.ok).length
    expect(estimated).toBeGreaterThan(6)
    expect(estimated).toBeLessThan(12)
    expect(average.length.weights).toHaveLength(estimated)
    expect(average.length.weights[0]).toBeCloseTo(1 / estimated, 12)
  })

  it('no point at all', () => {
    const result = along(fieldOf({ ...base, n: 20 }))
    expect(present(result)).toHaveLength(0)
    expect(result.criticalValue).toBeUndefined()
    expect(result.average.length).toEqual({ ok: false, reason: 'no point has an estimate' })
    expect(estimateAlong([], fieldOf(base).units, options()).average.density.ok).toBe(false)
  })
})

describe('sides', () => {
  const field = fieldOf(base)

  it('points that name their zones see only those, on the side they name', () => {
    const zone = Int32Array.from(field.units.treated, (treated, i) => (treated === 1 ? 7 : field.north[i] < 0 ? 3 : 5))
    const points = field.points.map((point) => ({ ...point, zones: [7, 3] as const }))
    const reversed = estimateAlong(points, { ...field.units, zone }, options())
    const y = field.units.y.map((value, i) => (zone[i] === 5 ? Number.NaN : value))
    const alone = along({ ...field, units: { ...field.units, y } })
    const [a, b] = [reversed.points[0], alone.points[0]]
    if (!a.ok || !b.ok) throw new Error('no estimate')
    expect(a.jump.corrected.estimate).toBeCloseTo(-b.jump.corrected.estimate, 12)
    expect(a.jump.units).toEqual({ untreated: b.jump.units.treated, treated: b.jump.units.untreated })
    expect(() => estimateAlong(points, field.units, options())).toThrow(/point 1 names its zones/)
  })

  it('clusters that serve several points are accounted for', () => {
    const cluster = Int32Array.from(
      field.east,
      (e, i) => 20 * Math.floor((e + 5000) / 500) + Math.floor((field.north[i] + 5000) / 500),
    )
    const clustered = along({ ...field, units: { ...field.units, cluster } }, { variance: 'clusters' })
    for (const { jump } of present(clustered)) {
      expect(jump.clusters).toBeGreaterThan(5)
      expect(jump.corrected.degreesOfFreedom).toBe((jump.clusters as number) - 1)
    }
    const alone = along(field)
    if (!clustered.average.length.ok || !alone.average.length.ok) throw new Error('no average')
    expect(clustered.average.length.estimate).toBeCloseTo(alone.average.length.estimate, 10)
    expect(clustered.average.length.standardError).not.toBeCloseTo(alone.average.length.standardError, 4)
  })

  it('throws where the draws or the level are none', () => {
    expect(() => along(field, { draws: 0 })).toThrow(RangeError)
    expect(() => along(field, { level: Number.NaN })).toThrow(RangeError)
  })
})
