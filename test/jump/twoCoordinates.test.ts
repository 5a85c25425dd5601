/**
 * The jump at a point from fits in two coordinates, against weighted least squares with sandwich variances by base R
 * (test/golden/jump/two-coordinates.R). Tolerance 1e-9 relative: both are dense double computations of one formula.
 */
import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import {
  buildPlaneSample,
  jumpAtPoint,
  type Kernel,
  type PlaneEntries,
  type PlaneOptions,
  type PointJump,
} from '../../src/jump/index.js'
import { seededRandom } from '../../src/math/index.js'

const golden = JSON.parse(readFileSync(new URL('../golden/jump/two-coordinates.json', import.meta.url), 'utf8'))
const close = (got: number, wanted: number) =>
  expect(Math.abs(got - wanted)).toBeLessThanOrEqual(1e-9 * Math.abs(wanted))
const options: PlaneOptions = { order: 1, kernel: 'triangular', variance: 'hc2', reference: 't', level: 0.95 }
const both = (value: number) => ({ untreated: value, treated: value })

const goldenEntries: PlaneEntries = {
  eastMetres: Float64Array.from(golden.east),
  northMetres: Float64Array.from(golden.north),
  treated: Uint8Array.from(golden.treated),
  unit: Int32Array.from(golden.east, (_, i) => i as number),
  y: Float64Array.from(golden.y),
  cluster: Int32Array.from(golden.cluster),
}

function jumpOf(entries: PlaneEntries, h: number, b = h, changed: Partial<PlaneOptions> = {}): PointJump {
  const estimated = jumpAtPoint(buildPlaneSample(entries), { h: both(h), b: both(b) }, { ...options, ...changed })
  if (!estimated.ok) throw new Error(estimated.reason)
  return estimated.jump
}

function reasonOf(entries: PlaneEntries, h: number, changed: Partial<PlaneOptions> = {}): string {
  const estimated = jumpAtPoint(buildPlaneSample(entries), { h: both(h), b: both(h) }, { ...options, ...changed })
  return estimated.ok ? '' : estimated.reason
}

/** The entries at the places picked, each with its own unit number. */
function picked(entries: PlaneEntries, rows: readonly number[]): PlaneEntries {
  const numbers = (values: Float64Array) => Float64Array.from(rows, (i) => values[i])
  return {
    eastMetres: numbers(entries.eastMetres),
    northMetres: numbers(entries.northMetres),
    treated: Uint8Array.from(rows, (i) => entries.treated[i]),
    unit: Int32Array.from(rows, (_, i) => i),
    y: numbers(entries.y),
    w: entries.w && numbers(entries.w),
    cluster: entries.cluster && Int32Array.from(rows, (i) => (entries.cluster as Int32Array)[i]),
  }
}
const rows = Array.from(goldenEntries.y, (_, i) => i)

describe('one point, against base R', () => {
  for (const known of golden.cases) {
    const { order, h, b, weighted } = known
    const kernel: Kernel = known.kernel
    it(`${kernel}, order ${order}, h ${h}, b ${b}${weighted ? ', weighted' : ''}`, () => {
      const entries = weighted ? { ...goldenEntries, w: Float64Array.from(golden.w) } : goldenEntries
      for (const variance of ['hc0', 'hc1', 'hc2', 'hc3', 'clusters'] as const) {
        const jump = jumpOf(entries, h, b, { order, kernel, variance })
        close(jump.plain.estimate, known.plain)
        close(jump.corrected.estimate, known.corrected)
        close(jump.plain.standardError ** 2, known.plainVariance[variance])
        close(jump.corrected.standardError ** 2, known.correctedVariance[variance])
        const dof = variance === 'clusters' ? 'G' : 'dof'
        close(jump.plain.degreesOfFreedom, known.plainVariance[dof] - (dof === 'G' ? 1 : 0))
        close(jump.corrected.degreesOfFreedom, known.correctedVariance[dof] - (dof === 'G' ? 1 : 0))
        expect(jump.units).toEqual({ untreated: known.untreated, treated: known.treated })
        close(jump.atPoint.untreated, known.levelUntreated)
        close(jump.atPoint.treated, known.levelTreated)
        close(jump.density, known.density)
        const sum = jump.influence.psi.reduce((total, psi) => total + psi * psi, 0)
        close(sum, known.correctedVariance[variance])
      }
    })
  }
})

describe('few clusters, against the full matrices in base R', () => {
  for (const { order, kernel, h, weighted, estimate, variance, dof, G } of golden.few) {
    it(`${kernel}, order ${order}, h ${h}${weighted ? ', weighted' : ''}`, () => {
      const entries = weighted ? { ...goldenEntries, w: Float64Array.from(golden.w) } : goldenEntries
      const reduced = { kernel, variance: 'few-clusters' } as const
      const results = []
      if (order < 3) results.push(jumpOf(entries, h, h, { ...reduced, order }).plain)
      // whatever b is asked for, the corrected estimate is the fit of the next order at h
      const { corrected, influence, clusters } = jumpOf(entries, h, 0.8 * h, { ...reduced, order: order - 1 })
      for (const result of [...results, corrected]) {
        close(result.estimate, estimate)
        close(result.standardError ** 2, variance)
        close(result.degreesOfFreedom, dof)
      }
      expect(clusters).toBe(G)
      close(
        influence.psi.reduce((total, psi) => total + psi * psi, 0),
        variance,
      )
    })
  }
})

describe('properties', () => {
  const known = jumpOf(goldenEntries, 800)
  const rotated = (degrees: number): PlaneEntries => {
    const [sine, cosine] = [Math.sin((degrees * Math.PI) / 180), Math.cos((degrees * Math.PI) / 180)]
    const { eastMetres: e, northMetres: n } = goldenEntries
    return {
      ...goldenEntries,
      eastMetres: e.map((value, i) => cosine * value - sine * n[i]),
      northMetres: e.map((value, i) => sine * value + cosine * n[i]),
    }
  }

  it('turning the map round the point changes nothing', () => {
    for (const degrees of [17, 90, 213]) {
      const turned = jumpOf(rotated(degrees), 800)
      close(turned.corrected.estimate, known.corrected.estimate)
      close(turned.corrected.standardError, known.corrected.standardError)
      close(turned.corrected.degreesOfFreedom, known.corrected.degreesOfFreedom)
      close(turned.plain.estimate, known.plain.estimate)
    }
  })

  it('with b = h the corrected estimate is the fit of the next order', () => {
    const next = jumpOf(goldenEntries, 800, 800, { order: 2 })
    close(known.corrected.estimate, next.plain.estimate)
    close(known.corrected.standardError, next.plain.standardError)
    close(known.corrected.degreesOfFreedom, next.plain.degreesOfFreedom)
  })

  it('other rows order, same bits', () => {
    const random = seededRandom(5)
    // ties in distance, outcome and cluster, at mirrored places
    const grid = rows.map((i) => ({
      e: 100 * ((i % 19) - 9),
      n: 100 * (Math.floor(i / 19) - 8),
      y: i % 3 === 0 ? 1 : 0,
      key: random.next(),
    }))
    const entriesOf = (units: typeof grid): PlaneEntries => ({
      eastMetres: Float64Array.from(units, (unit) => unit.e),
      northMetres: Float64Array.from(units, (unit) => unit.n),
      treated: Uint8Array.from(units, (unit) => (unit.n + unit.e / 3 > 50 ? 1 : 0)),
      unit: Int32Array.from(units, (_, i) => i),
      y: Float64Array.from(units, (unit) => unit.y),
    })
    const first = jumpOf(entriesOf(grid), 700)
    const second = jumpOf(entriesOf([...grid].sort((a, b) => a.key - b.key)), 700)
    expect(second.corrected).toEqual(first.corrected)
    expect(second.plain).toEqual(first.plain)
    expect(second.density).toBe(first.density)
  })

  it('swapping the sides changes the sign', () => {
    const swapped = jumpOf({ ...goldenEntries, treated: goldenEntries.treated.map((side) => 1 - side) }, 800)
    close(swapped.corrected.estimate, -known.corrected.estimate)
    close(swapped.corrected.standardError, known.corrected.standardError)
  })

  it('weight 2 gives the coefficients of a repeated row', () => {
    const doubled = rows.filter((i) => i % 4 === 0)
    const w = Float64Array.from(rows, (i) => (i % 4 === 0 ? 2 : 1))
    const weighted = jumpOf({ ...goldenEntries, w }, 800)
    const repeated = jumpOf(picked(goldenEntries, [...rows, ...doubled]), 800)
    close(weighted.plain.estimate, repeated.plain.estimate)
    close(weighted.corrected.estimate, repeated.corrected.estimate)
    close(weighted.density, repeated.density)
  })

  it('is exact for planes, and corrected for curved surfaces, whatever the shape of the border', () => {
    const { eastMetres: e, northMetres: n, treated } = goldenEntries
    const noise = Float64Array.from(rows, (i) => (i % 2 === 0 ? 1e-7 : -1e-7))
    const plane = e.map((value, i) => 3 + 0.002 * value - 0.005 * n[i] + 0.25 * treated[i] + noise[i])
    expect(jumpOf({ ...goldenEntries, y: plane }, 800).plain.estimate).toBeCloseTo(0.25, 5)
    const curved = plane.map((value, i) => value + 1e-6 * (e[i] ** 2 - 3 * e[i] * n[i] + 0.5 * n[i] ** 2))
    expect(jumpOf({ ...goldenEntries, y: curved }, 800).corrected.estimate).toBeCloseTo(0.25, 5)
    expect(jumpOf({ ...goldenEntries, y: curved }, 800, 1000).corrected.estimate).toBeCloseTo(0.25, 5)
    expect(Math.abs(jumpOf({ ...goldenEntries, y: curved }, 800).plain.estimate - 0.25)).toBeGreaterThan(0.01)
  })

  it('each side may have its own bandwidths', () => {
    const sample = buildPlaneSample(goldenEntries)
    const uneven = jumpAtPoint(
      sample,
      { h: { untreated: 600, treated: 800 }, b: { untreated: 700, treated: 900 } },
      options,
    )
    if (!uneven.ok) throw new Error(uneven.reason)
    close(uneven.jump.atPoint.untreated, jumpOf(goldenEntries, 600).atPoint.untreated)
    close(uneven.jump.atPoint.treated, jumpOf(goldenEntries, 800).atPoint.treated)
  })
})

describe('what the data cannot answer', () => {
  it('a side with too few units', () => {
    expect(reasonOf(goldenEntries, 250)).toBe('untreated side: 9 units within the bandwidth, fewer than 20')
    expect(reasonOf(goldenEntries, 800, { smallestSide: 80 })).toMatch(/^treated side: \d\d units .* fewer than 80$/)
    const none = picked(
      goldenEntries,
      rows.filter((i) => goldenEntries.treated[i] === 1),
    )
    expect(reasonOf(none, 800)).toBe('untreated side: 0 units within the bandwidth, fewer than 20')
    expect(reasonOf(picked(goldenEntries, []), 800)).toBe('untreated side: 0 units within the bandwidth, fewer than 20')
  })

  it('units on one street', () => {
    const northMetres = goldenEntries.eastMetres.map((value) => 0.5 * value)
    expect(reasonOf({ ...goldenEntries, northMetres }, 800)).toBe(
      'untreated side: units too nearly on a line for a fit of order 1 in two coordinates',
    )
  })

  it('the same outcome everywhere, and one cluster', () => {
    const y = new Float64Array(rows.length).fill(4)
    expect(reasonOf({ ...goldenEntries, y }, 800)).toBe('the fit leaves no residual on either side')
    const cluster = new Int32Array(rows.length)
    expect(reasonOf({ ...goldenEntries, cluster }, 800, { variance: 'clusters' })).toMatch(
      /only 1 cluster near the point/,
    )
  })

  it('a programmer is told at once', () => {
    expect(() => jumpOf(goldenEntries, Number.NaN)).toThrow()
    expect(() => buildPlaneSample({ ...goldenEntries, y: new Float64Array(3) })).toThrow(RangeError)
  })
})
