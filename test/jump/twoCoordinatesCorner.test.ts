/**
 * A corner (CHECKS): what a distance-only fit is off by, and that the fit in two coordinates is not. One large draw of
 * each case without noise; test/long/corner.test.ts repeats it with noise and counts coverage.
 */
import { describe, expect, it } from 'vitest'
import { buildPlaneSample, buildSample, jumpAt, jumpAtPoint } from '../../src/jump/index.js'
import { cornerField, distanceOnlyBias, radiusMetres } from './cornerField.js'

const options = { order: 1, kernel: 'triangular', variance: 'hc2', reference: 't', level: 0.95 } as const
const h = { untreated: radiusMetres, treated: radiusMetres }

describe('a corner', () => {
  distanceOnlyBias.forEach(([dOverH, bias], stream) => {
    it(`${dOverH} bandwidths from it`, () => {
      const field = cornerField(dOverH, 60_000, 1e-6, stream)
      const x = field.eastMetres.map((e, i) => (field.treated[i] ? 1 : -1) * Math.hypot(e, field.northMetres[i]))
      const byDistance = jumpAt(buildSample({ ...field, x }), { h, b: h }, options)
      const inPlane = jumpAtPoint(buildPlaneSample(field), { h, b: h }, options)
      if (!byDistance.ok || !inPlane.ok) throw new Error('no estimate')
      const { estimate, standardError } = byDistance.jump.plain
      expect(standardError).toBeLessThan(0.008)
      expect(Math.abs(estimate - bias)).toBeLessThan(3.5 * standardError)
      expect(Math.abs(inPlane.jump.plain.estimate)).toBeLessThan(1e-6)
      expect(Math.abs(inPlane.jump.corrected.estimate)).toBeLessThan(1e-6)
    })
  })
})
