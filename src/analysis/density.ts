/** Do units pile up on one side? By score at every line and pooled; on the ground against the land there is. */
import { randomGround } from '../borders/index.js'
import {
  binnedDensityTest,
  type DensityOutcome,
  type DiscreteDensity,
  densityTest,
  discreteDensityTest,
} from '../checks/index.js'
import type { Kernel } from '../jump/index.js'
import { normalUpper, quantileOfSorted, streamOf } from '../math/index.js'
import type { CheckResult, DensityExhibit } from '../results.js'
import type { Study } from '../study/index.js'
import { type Adjusted, adjustedFor } from './adjusted.js'
import { groundExhibit, scoreExhibit } from './densityExhibit.js'
import type { Placed } from './placing.js'
import { shown } from './words.js'

/** Lines with fewer units are not tested on their own. */
const fewestAtLine = 100
/** Random points drawn on the land. */
const tries = 200_000
/** Land is looked at as far as this share of the units lies from the border. */
const shareNear = 0.9

/** Rows for the sheet of checks, and what is drawn of them where the test could be made. */
export interface DensityFound {
  readonly checks: readonly CheckResult[]
  readonly exhibit?: DensityExhibit
}

export function densityChecks(study: Study, placed: Placed): DensityFound {
  return study.line.kind === 'border' ? groundChecks(study, placed) : scoreChecks(study, placed)
}

function scoreChecks(study: Study, { placement }: Placed): DensityFound {
  const { kernel, level } = study.estimation
  const alpha = 1 - level
  const made = atLine(placement.x, placement.treated, kernel)
  const pooled = [
    rowOf('density', made, alpha),
    ...(study.checks === 'full' ? [binnedRow(placement.x, placement.treated, alpha)] : []),
  ]
  const drawn = made.ok && !('expected' in made) ? { exhibit: scoreExhibit(study, placement, made) } : {}
  if (placement.lines.length === 1) return { checks: pooled, ...drawn }
  const byLine = placement.lines.map((): number[] => [])
  placement.line.forEach((line, e) => {
    byLine[line].push(e)
  })
  const lines = placement.lines.flatMap((line, i) => {
    const entries = byLine[i]
    if (entries.length < fewestAtLine) return []
    const made = atLine(
      Float64Array.from(entries, (e) => placement.x[e]),
      Uint8Array.from(entries, (e) => placement.treated[e]),
      kernel,
    )
    return made.ok ? [{ line: line.id, made }] : []
  })
  const adjusted = adjustedFor(lines.map(({ made }) => made.p))
  const bad = lines.flatMap(({ line, made }, i) =>
    adjusted[i].p_holm < alpha ? [{ ...rowOf('density', made, alpha, adjusted[i]), line }] : [],
  )
  const tested = `${lines.length} of ${placement.lines.length} lines have units enough for a test of their own`
  const none: CheckResult =
    lines.length === 0
      ? { check: 'density, line by line', verdict: 'not possible', says: tested }
      : {
          check: 'density, line by line',
          p_holm: Math.min(...adjusted.map((one) => one.p_holm)),
          verdict: bad.length > 0 ? 'doubt' : 'fine',
          says: `${tested}: ${bad.length === 0 ? 'none jumps' : `${bad.length} jump`} after adjusting for their number`,
        }
  return { checks: [...pooled, none, ...bad], ...drawn }
}

type AtLine = DensityOutcome | DiscreteDensity

/** By the empirical distribution function; by counts at the values next to the line where those are few. */
function atLine(x: Float64Array, treated: Uint8Array, kernel: Kernel): AtLine {
  const made = densityTest(x, treated, { kernel })
  if (made.ok) return made
  const discrete = discreteDensityTest(x, treated)
  return discrete.ok ? discrete : made
}

function rowOf(check: string, made: AtLine, alpha: number, adjusted?: Adjusted): CheckResult {
  if (!made.ok) return { check, verdict: 'not possible', says: made.reason }
  const jumps = (adjusted?.p_holm ?? made.p) < alpha
  const verdict = jumps ? 'doubt' : 'fine'
  const meaning = jumps ? 'more than chance' : 'no more than chance'
  if ('expected' in made) {
    const says = `the score has few values: ${made.units[1]} units at the first treated one, ${shown(made.expected)} expected of ${made.units[0]} before it and ${made.units[2]} after: ${meaning}`
    return { check, p: made.p, ...adjusted, verdict, says }
  }
  const says = `units at the line are ${densityRatio(made.corrected.treated.density / made.corrected.untreated.density)}: ${meaning}`
  return { check, statistic: made.z, p: made.p, ...adjusted, verdict, says }
}

function densityRatio(ratio: number): string {
  return ratio > 0 && Number.isFinite(ratio)
    ? `${shown(ratio)} times as dense on the treated side`
    : 'nearly all on one side'
}

/** McCrary's test, beside the other. */
function binnedRow(x: Float64Array, treated: Uint8Array, alpha: number): CheckResult {
  const check = 'density, binned'
  const made = binnedDensityTest(x, treated)
  if (!made.ok) return { check, verdict: 'not possible', says: made.reason }
  const jumps = made.p < alpha
  const says = `bins of ${shown(made.binWidth)}: units at the line are ${densityRatio(Math.exp(made.logDifference))}: ${jumps ? 'more than chance' : 'no more than chance'}`
  return { check, statistic: made.z, p: made.p, verdict: jumps ? 'doubt' : 'fine', says }
}

/** Units per km² on the two sides: densities of units over those of random points on the same land. */
function groundChecks(study: Study, { placement, known, border, rules }: Placed): DensityFound {
  const check = 'units per km²'
  const impossible = (says: string): DensityFound => ({ checks: [{ check, verdict: 'not possible', says }] })
  if (!known || !border || !rules) return impossible('the units were not measured on the ground')
  if (placement.x.length === 0) return impossible('no unit is placed')
  const sorted = placement.x.map(Math.abs).sort()
  const radius = quantileOfSorted(sorted, shareNear)
  if (!(radius > 0)) return impossible('the units lie on the border')
  const { metresPerUnit } = rules
  const ground = randomGround(
    known.border,
    border.pieces,
    rules,
    radius * metresPerUnit,
    tries,
    streamOf(study.seed, 5),
  )
  const { kernel, level } = study.estimation
  const near = placement.x.map((_, e) => e).filter((e) => Math.abs(placement.x[e]) < radius)
  const units = densityTest(
    Float64Array.from(near, (e) => placement.x[e]),
    Uint8Array.from(near, (e) => placement.treated[e]),
    { kernel },
  )
  if (!units.ok) return impossible(units.reason)
  const land = densityTest(ground.x, ground.treated, { kernel, bandwidth: units.bandwidth })
  if (!land.ok) return impossible(`random points on the land: ${land.reason}`)
  const log = ({ corrected }: typeof units) => Math.log(corrected.treated.density / corrected.untreated.density)
  const spread = ({ corrected: { untreated, treated } }: typeof units) =>
    (treated.standardError / treated.density) ** 2 + (untreated.standardError / untreated.density) ** 2
  const difference = log(units) - log(land)
  const z = difference / Math.sqrt(spread(units) + spread(land))
  if (!Number.isFinite(z)) return impossible('one side is nearly empty at the border')
  const p = 2 * normalUpper(Math.abs(z))
  const jumps = p < 1 - level
  const says = `at the border there are ${shown(Math.exp(difference))} times as many units per km² on the treated side: ${jumps ? 'more than chance' : 'no more than chance'} (land measured with ${ground.x.length} random points)`
  return {
    checks: [{ check, statistic: z, p, verdict: jumps ? 'doubt' : 'fine', says }],
    exhibit: groundExhibit(study, placement, ground, { units, land, ratio: Math.exp(difference), p }),
  }
}
