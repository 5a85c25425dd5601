/**
 * The bias-aware interval of all lines on one distance. Source: METHODS sections 6, 8 and 9.
 * With line fixed effects, smoothness and bandwidth are chosen on y − γ̂ from the pilot bandwidth and the interval is made on
 * y − γ̂ from the bandwidth chosen, as for the pooled estimate. The class of curves bounds the curve that is left when each
 * line's level is taken out, in common to all lines.
 */
import { type BiasAwareEstimated, type BiasAwareOptions, biasAware, type Sample } from '../jump/index.js'
import { freeAtPilot, freeOfEffects } from './pool.js'

/** `sample` carries `group`, the line of each entry, with codes below `lines`. */
export function poolBiasAware(
  sample: Sample,
  lines: number,
  options: BiasAwareOptions & { readonly fixedEffects: boolean; readonly covariates?: readonly Float64Array[] },
): BiasAwareEstimated {
  const { fixedEffects, covariates = [] } = options
  if (!fixedEffects && covariates.length === 0) return biasAware(sample, options)
  const pilot = freeAtPilot(sample, lines, options)
  if (!pilot.ok) return pilot
  return biasAware(pilot.sample, { ...options, hasLineLevels: fixedEffects }, (h) =>
    freeOfEffects(sample, h, lines, options),
  )
}
