/** What a reader must know before using the numbers; each caution appears only where a fact of this study calls for it. */
import type { Jump } from '../../results.js'
import { capital } from '../lineTable.js'
import { count, fixed, isSmall } from '../numbers.js'
import { bundledLayers, estimatedLines, howMany, isEstimated, reasonText, type View } from '../view.js'

export interface Caution {
  readonly head: string
  readonly text: string
}

/** Common practice, no source. */
const fewClusters = 40
const manyLines = 5
const smallSide = 50

export function cautionsOf(view: View): Caution[] {
  return [
    local(view),
    ...onGround(view),
    ...shownUnits(view),
    ...bundle(view),
    ...corners(view),
    ...smallSamples(view),
    ...multiple(view),
    ...clustering(view),
    ...notes(view),
    ...checking(view),
  ]
}

function local(view: View): Caution {
  const targets = view.outcomes.map(({ result }) => result.pooled).some((pooled) => isEstimated(pooled))
  const weights = targets
    ? ` The pooled number is an average with the weights printed in the table of ${view.words.lines}; other weights give another number.`
    : ''
  return {
    head: `It holds at these ${view.words.lines}`,
    text: `The effect is for units close to these ${view.words.lines} and says nothing by itself about units far from them or about other ${view.words.lines}.${weights}`,
  }
}

function onGround(view: View): Caution[] {
  if (!view.words.isBorder) return []
  const pieces = view.results.lines.some(
    (line) => isSmall(line.units.untreated, view.smallestCell) || isSmall(line.units.treated, view.smallestCell),
  )
  return [
    {
      head: 'Other rules may change at the same border',
      text: 'Borders often carry several rules, services and names at once, and people choose a side: after years, the two sides hold different people and buildings. The jump belongs to everything that changes there. Ask who drew the border, when and why.',
    },
    {
      head: 'Boundary files are not legal boundaries',
      text: 'The zones are drawings made for a purpose and a date. Where it matters on which side a place lies, the local authority’s own record decides.',
    },
    {
      head: 'Not an appraisal, a redistricting plan or legal advice',
      text: 'Nothing here values a property, draws a district or finds a breach of law. For that, follow local rules and licensed practice.',
    },
    ...(pieces
      ? [
          {
            head: 'Few units at some pieces',
            text: `Some pieces have fewer than ${view.smallestCell} units on a side. Their counts are withheld; estimates at short stretches of border are about neighbours who could be recognised.`,
          },
        ]
      : []),
  ]
}

function shownUnits(view: View): Caution[] {
  if (!view.exhibits.map?.points) return []
  return [
    {
      head: 'This report shows where single units are',
      text: 'The study sets disclosure.coordinates: a map of this page and its numbers have every unit’s place. Do not pass them on.',
    },
  ]
}

function bundle(view: View): Caution[] {
  const layers = bundledLayers(view)
  if (layers.length === 0) return []
  return [
    {
      head: 'A bundle of rules',
      text: `Along part of the border in use another layer’s own line runs too (${layers.map(({ name, share }) => `${name} along ${share}`).join(', ')}). The jump there is that of everything that changes, not of this rule alone. “What else changes here” says where.`,
    },
  ]
}

/** Where the border bends, units at one distance from it stand in unlike places (Cattaneo, Titiunik & Yu 2025). */
function corners(view: View): Caution[] {
  const found = view.results.border?.corners
  if (!found || found.turning_pieces + found.points === 0) return []
  const bends = `${howMany(view, found.turning_pieces)} ${found.turning_pieces === 1 ? 'turns' : 'turn'} by more than ${found.turn} degrees`
  const meets = `three zones meet at ${count(found.points)} ${found.points === 1 ? 'point' : 'points'}`
  const parts = [...(found.turning_pieces > 0 ? [bends] : []), ...(found.points > 0 ? [meets] : [])]
  const hasAlong = view.outcomes.some(({ result }) => result.along !== undefined)
  const todo = hasAlong
    ? 'The estimates along the border, in two coordinates, do not have that bias.'
    : 'Estimates along the border (along) do not have that bias; largest_turn and corner set such places aside.'
  return [
    {
      head: 'Corners',
      text: `${capital(parts.join(' and '))}. Near a corner an estimate by distance alone is biased. ${todo}`,
    },
  ]
}

function smallSamples(view: View): Caution[] {
  const small = new Set<string>()
  for (const { result } of view.outcomes) {
    for (const line of estimatedLines(result)) {
      if (Math.min(line.units_in_bandwidth.untreated, line.units_in_bandwidth.treated) < smallSide) small.add(line.line)
    }
  }
  if (small.size === 0) return []
  return [
    {
      head: 'Small numbers',
      text: `${howMany(view, small.size)} ${small.size === 1 ? 'has' : 'have'} fewer than ${smallSide} units in the bandwidth on a side. Estimates from few units that look significant tend to exaggerate.`,
    },
  ]
}

function multiple(view: View): Caution[] {
  const most = Math.max(0, ...view.outcomes.map(({ result }) => estimatedLines(result).length))
  if (most < manyLines) return []
  const expected = most * (1 - view.choices.level)
  const rounded = expected < 1 ? 'less than one' : `about ${fixed(expected, 0)}`
  return [
    {
      head: `Many ${view.words.lines}, many comparisons`,
      text: `With ${howMany(view, most)}, ${rounded} would be expected to look significant for each outcome if there were no effect anywhere. Do not rank ${view.words.lines} by their own estimates; the shrunken column and the Holm p are there for that.`,
    },
  ]
}

/** Clusters of unlike size count for less than their number. */
function effectiveWords(view: View): string {
  const least = Math.min(
    ...view.outcomes.flatMap(({ result }) =>
      [result.pooled, ...result.lines].flatMap((jump) =>
        isEstimated<Jump>(jump as Jump) ? [(jump as Jump).effective_clusters ?? Infinity] : [],
      ),
    ),
  )
  return least < Infinity ? `, worth ${fixed(least, 1)} equal ones at least` : ''
}

function clustering(view: View): Caution[] {
  const clusters = view.outcomes.flatMap(({ result }) => {
    const jumps = [result.pooled, ...result.lines].flatMap((jump) =>
      isEstimated<Jump>(jump as Jump) ? [jump as Jump] : [],
    )
    return jumps.flatMap((jump) =>
      jump.variance === 'clusters' && jump.clusters !== undefined && jump.clusters < fewClusters ? [jump.clusters] : [],
    )
  })
  if (clusters.length === 0) return []
  return [
    {
      head: 'Few clusters',
      text: `Some standard errors rest on only ${count(Math.min(...clusters))} clusters${effectiveWords(view)}; with fewer than ${fewClusters} they tend to be too small. variance: few-clusters corrects for that.`,
    },
  ]
}

/** What the estimator itself remarked: remarks that differ only in a number are given once, and clusters have a caution of their own. */
function notes(view: View): Caution[] {
  const alike = new Map<string, { note: string; lines: Set<string>; isPooled: boolean }>()
  const add = (jump: Jump, line: string | undefined) => {
    for (const note of jump.notes ?? []) {
      if (/\bclusters\b/.test(note)) continue
      const text = reasonText(view, note)
      const key = text.replace(/\d[\d.,]*/g, '#')
      const found = alike.get(key) ?? { note: text, lines: new Set<string>(), isPooled: false }
      if (line === undefined) found.isPooled = true
      else found.lines.add(line)
      alike.set(key, found)
    }
  }
  for (const { result } of view.outcomes) {
    for (const line of estimatedLines(result)) add(line, line.line)
    if (isEstimated<Jump & { weights: Readonly<Record<string, number>> }>(result.pooled)) add(result.pooled, undefined)
  }
  return [...alike.values()].map(({ note, lines, isPooled }) => {
    const places = [
      ...(lines.size > 0 ? [`at ${howMany(view, lines.size)}`] : []),
      ...(isPooled ? ['in the pooled estimate'] : []),
    ]
    const like = lines.size + Number(isPooled) > 1 ? ', or the like,' : ''
    return { head: 'A remark of the estimator', text: `${capital(note)}${like} ${places.join(' and ')}.` }
  })
}

function checking(view: View): Caution[] {
  const checks = view.outcomes.flatMap(({ result }) => result.checks)
  const doubtful = checks.filter((check) => check.verdict === 'doubt' || check.verdict === 'fail').length
  if (checks.length === 0) {
    return [
      {
        head: 'Credibility was not checked in this run',
        text: `Whether units sort around ${view.words.theLine}, and whether anything else jumps there, was not examined.`,
      },
    ]
  }
  if (doubtful === 0) return []
  return [
    {
      head: 'Some checks cast doubt',
      text: `${count(doubtful)} of ${count(checks.length)} checks did not come out fine; read them before the estimate.`,
    },
  ]
}
