/** Quantiles of the largest |t| against equally correlated normals, by integration in base R 4.2.2 (test/golden/thresholds/largest.R). */
import { readFileSync } from 'node:fs'
import { expect, it } from 'vitest'
import { streamOf } from '../../src/math/index.js'
import { largestQuantile } from '../../src/thresholds/maximum.js'

interface Case {
  readonly k: number
  readonly rho: number
  readonly level: number
  readonly quantile: number
}
const cases = JSON.parse(
  readFileSync(new URL('../golden/thresholds/largest.json', import.meta.url), 'utf8'),
) as readonly Case[]

it.each(cases)('$k normals of correlation $rho at $level', ({ k, rho, level, quantile }) => {
  const effects = {
    ids: Array.from({ length: k }, (_, a) => `${a}`),
    estimate: new Float64Array(k),
    covariance: Float64Array.from({ length: k * k }, (_, i) => (i % (k + 1) === 0 ? 1 : rho)),
    isDiagonal: false,
  }
  // a drawn quantile's own error: √(0.05·0.95/200,000)/density, about 0.004; three of them
  expect(Math.abs(largestQuantile(effects, level, streamOf(8, k), 200_000) - quantile)).toBeLessThan(0.012)
})
