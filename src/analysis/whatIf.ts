/**
 * What the page re-estimates from: for the pooled estimate and for every line, a ladder of bandwidths with three kernels,
 * two orders and some holes. Where an estimate is the difference of two sides that share nothing, parts of each side are
 * handed over; elsewhere a table of estimates, made by the same functions as the study's own.
 * How many bandwidths there are depends on units, lines and outcomes alone, so that the same study gives the same bytes.
 */
import { countWithin, outsideDonut, type Sample, type Variance } from '../jump/index.js'
import { base64OfNumbers } from '../math/index.js'
import type { WhatIfExhibit, WhatIfSubject } from '../results.js'
import type { Study } from '../study/index.js'
import type { NamedColumn, OutcomeEntries } from './entries.js'
import {
  basisOfLine,
  hasReason,
  type LineEstimate,
  type OrReason,
  type OutcomeEstimates,
  type PoolBasis,
  reasonAgainstWidth,
} from './estimating.js'
import type { Placed } from './placing.js'
import { bandwidthStops, donutStops } from './whatIfStops.js'
import { cellsOf, placesOf, sumsOfSides, sumsOfTable, unitsWithin } from './whatIfSums.js'

/** Bandwidths of a pooled estimate, and of a line. */
const mostStops = { pooled: 40, line: 24 }
/** Fewer are no ladder. */
const leastStops = 3
/** Bytes for all pooled estimates together, and for all lines. */
const mostBytes = { pooled: 900_000, line: 2_000_000 }
/** Fits times units, for one outcome's pooled estimate and for its lines together: so many, and so many for each unit. */
const work = { sides: [1e7, 60], table: [8e5, 15] } as const

interface Share {
  readonly wanted: number
  /** Of the work for an outcome. */
  readonly part: number
  /** Holes and single sides are on offer too. */
  readonly isFull: boolean
}

/** For one outcome of a study. */
export function whatIfOf(
  study: Study,
  placed: Placed,
  entries: OutcomeEntries,
  { lines, pooled, basis }: OutcomeEstimates,
): WhatIfExhibit {
  const outcomes = study.outcomes.length
  const share = Math.floor(mostBytes.pooled / outcomes / 2200)
  const again = (of: PoolBasis, made: OrReason<LineEstimate>, how: Share) =>
    hasReason(made) ? null : subjectOf(study, placed, of, entries.takeUp, made, how)
  const all = again(basis, pooled, { wanted: Math.min(mostStops.pooled, share), part: 1, isFull: true })
  if (lines.length === 1) return { pooled: all, lines: [] }
  const wanted = Math.min(mostStops.line, Math.floor(mostBytes.line / outcomes / lines.length / 780))
  const each = { wanted, part: 1 / lines.length, isFull: false }
  return {
    pooled: all,
    lines: lines.map((made, line) =>
      hasReason(made) || wanted < leastStops ? null : again(basisOfLine(study, placed, entries, line), made, each),
    ),
  }
}

function subjectOf(
  study: Study,
  placed: Placed,
  basis: PoolBasis,
  takeUp: NamedColumn | undefined,
  { jump }: LineEstimate,
  { wanted, part, isFull }: Share,
): WhatIfSubject | null {
  const { donut } = study.estimation
  const own = jump.bandwidths.h
  const from = isOfSides(basis, takeUp) ? 'sides' : 'table'
  const sample = outsideDonut(basis.sample, donut)
  const units = sample.untreated.t.length + sample.treated.t.length
  const against = reasonAgainstWidth(study, placed)
  const isWide = (h: number) => against({ untreated: h, treated: h }) === undefined
  const [fixed, perUnit] = work[from]
  const most = (part * fixed + perUnit * units) / costOf(basis, takeUp)
  for (const full of isFull ? [true, false] : [false]) {
    const fewest = Math.max(study.disclosure.smallestCell, fewestUnits(from, full))
    const stopsFor = (count: number) => bandwidthStops(sample, { wanted: count, own, fewest, isWide })
    const shapeOf = (bandwidths: readonly number[]) => {
      const donuts = full ? donutStops(bandwidths, own, donut) : [donut]
      const hasOwn = bandwidths.includes(own.untreated) && bandwidths.includes(own.treated)
      return { bandwidths, donuts, variations: from === 'table' ? variationsOf(donuts, full && hasOwn) : [] }
    }
    const first = shapeOf(stopsFor(wanted))
    const asked = workOf(from, first, own, (h) => within(sample, h))
    const { bandwidths, donuts, variations } =
      asked > most ? shapeOf(stopsFor(Math.floor((wanted * most) / asked))) : first
    if (bandwidths.length < (full ? 2 * leastStops : leastStops)) continue
    return {
      from,
      bandwidths,
      donuts,
      variations,
      sums: base64OfNumbers(
        from === 'table'
          ? sumsOfTable({ basis, takeUp, own, donuts, variations, bandwidths })
          : sumsOfSides(basis.sample, donuts, bandwidths, basis.options.variance),
      ),
      units: {
        untreated: unitsWithin(basis.sample.untreated, donuts, bandwidths),
        treated: unitsWithin(basis.sample.treated, donuts, bandwidths),
      },
      centre: sample.centre,
      cells: cellsOf(sample, bandwidths),
    }
  }
  return null
}

/** How many times the work of the common estimate one of this kind is. */
function costOf({ options }: PoolBasis, takeUp: NamedColumn | undefined): number {
  const { variance, covariates = [] } = options
  const isPairwise = variance === 'few-clusters' || variance === 'spatial'
  return (isPairwise ? 16 : 1) * (1 + covariates.length) * (takeUp ? 2 : 1)
}

/** Fits times units within their bandwidths. */
function workOf(
  from: WhatIfSubject['from'],
  { bandwidths, donuts, variations }: Pick<WhatIfSubject, 'bandwidths' | 'donuts' | 'variations'>,
  own: { readonly untreated: number; readonly treated: number },
  unitsWithin: (h: number) => number,
): number {
  const units = bandwidths.map(unitsWithin)
  const total = (places: readonly number[]) => places.reduce((sum, place) => sum + units[place], 0)
  if (from === 'sides') return 9 * donuts.length * total(units.map((_, place) => place))
  return 6 * variations.reduce((sum, _, variation) => sum + total(placesOf(variation, { bandwidths, own })), 0)
}

const ofUnits: ReadonlySet<Variance> = new Set<Variance>(['hc0', 'hc1', 'hc2', 'hc3', 'neighbours'])

/** Whether the estimate is the difference of two sides that share nothing. */
function isOfSides({ sample, options }: PoolBasis, takeUp: NamedColumn | undefined): boolean {
  const { variance, fixedEffects, covariates = [] } = options
  return ofUnits.has(variance) && !fixedEffects && covariates.length === 0 && !takeUp && !sample.repeats
}

/** The study's own hole with each way to choose a side; other holes with both sides alone. */
function variationsOf(donuts: readonly number[], isFull: boolean): WhatIfSubject['variations'] {
  const both = donuts.map((_, donut) => ({ donut, side: 'both' as const }))
  if (!isFull) return both
  return [...both, { donut: 0, side: 'untreated' }, { donut: 0, side: 'treated' }]
}

/** Half the numbers given about a side's cell: a unit has a distance and an outcome, so as many can't be solved for. */
function fewestUnits(from: WhatIfSubject['from'], isFull: boolean): number {
  const donuts = isFull ? 3 : 1
  if (from === 'sides') return Math.ceil((45 * donuts + 5) / 2)
  return Math.ceil((36 * (isFull ? donuts + 2 : 1) + 10) / 4)
}

function within({ untreated, treated }: Sample, h: number): number {
  return countWithin(untreated.t, h, 'uniform') + countWithin(treated.t, h, 'uniform')
}
