/**
 * Hedgerow grants: farms of six invented regions, applying in four years. A farm whose exposure index is at or
 * above the cutoff of its year and region gets the grant. The grant's effect differs from line to line.
 */
import { type Draws, drawsFrom } from '../random.js'

const YEARS = [2017, 2018, 2019, 2020] as const
const REGIONS = ['Hathune', 'Oskarra', 'Quarne', 'Ruspel', 'Tolmere', 'Vennick'] as const
const FARMS = 15_000
const MEAN_EFFECT = 1.2
const SPREAD_OF_EFFECTS = 0.4
const REPLANTED_EFFECT = 0.15

interface GrantLine {
  readonly year: number
  readonly region: string
  readonly cutoff: number
  /** Jump of soil_kept at the cutoff. */
  readonly effect: number
  /** Soil kept without a grant: level, slope and curvature in points of the index away from the cutoff. */
  readonly level: number
  readonly slope: number
  readonly curvature: number
}

/** What the grant does. Line by line for soil_kept, around `mean`; the same everywhere for replanted. */
export const trueEffects = {
  soil_kept: {
    mean: MEAN_EFFECT,
    spread: SPREAD_OF_EFFECTS,
    lines: grantLines().map(({ year, region, cutoff, effect }) => ({ year, region, cutoff, effect })),
  },
  replanted: REPLANTED_EFFECT,
} as const

/** Text of each file, by its path under boundaries/; cutoffs and effects are the same for every seed. */
export function hedgerowFiles(seed = 5): Record<string, string> {
  const schedule = grantLines().map(({ year, region, cutoff }) => `${year},${region},${cutoff.toFixed(1)}`)
  return {
    'hedgerows/cutoffs.csv': `year,region,cutoff\n${schedule.join('\n')}\n`,
    'hedgerows/farms.csv': farmsText(seed),
  }
}

function grantLines(): GrantLine[] {
  const draws = drawsFrom(77)
  return YEARS.flatMap((year) =>
    REGIONS.map((region, at) => ({
      year,
      region,
      cutoff: Math.round((46 + 2.5 * at + 1.5 * (year - 2017) + 3 * draws.uniform()) * 10) / 10,
      effect: Math.round((MEAN_EFFECT + SPREAD_OF_EFFECTS * draws.normal()) * 100) / 100,
      level: 5 + 0.4 * at + 0.3 * draws.normal(),
      slope: -0.05 + 0.02 * draws.normal(),
      curvature: 0.0008 * draws.normal(),
    })),
  )
}

function farmsText(seed: number): string {
  const draws = drawsFrom(seed)
  const lines = grantLines()
  const rows = ['farm,year,region,exposure_index,soil_kept,replanted,hectares,share']
  while (rows.length <= FARMS) {
    const line = lines[Math.floor(lines.length * draws.uniform() ** 1.15)]
    rows.push([`F${20_000 + rows.length}`, ...farmAt(line, draws)].join(','))
  }
  return `${rows.join('\n')}\n`
}

function farmAt(line: GrantLine, draws: Draws): (string | number)[] {
  const index = Math.min(100, Math.max(0, line.cutoff - 1 + 12 * draws.normal())).toFixed(2)
  const x = Number(index) - line.cutoff
  const granted = x >= 0
  const hectares = Math.round(12 + 160 * draws.uniform() ** 3)
  const soilKept =
    line.level +
    line.slope * x +
    line.curvature * x * x +
    (granted ? line.effect + 0.008 * x : 0) +
    (0.6 + 0.004 * hectares) * draws.normal()
  const willReplant = Math.min(0.95, Math.max(0.02, 0.3 + 0.004 * x)) + (granted ? REPLANTED_EFFECT : 0)
  const replanted = draws.uniform() < willReplant ? 1 : 0
  const share = 0.4 + 1.6 * draws.uniform()
  const hasSoil = draws.uniform() >= 0.015
  const hasRegion = draws.uniform() >= 0.002
  const hasIndex = draws.uniform() >= 0.003
  return [
    line.year,
    hasRegion ? line.region : '',
    hasIndex ? index : '',
    hasSoil ? soilKept.toFixed(2) : '',
    replanted,
    hectares,
    share.toFixed(2),
  ]
}
