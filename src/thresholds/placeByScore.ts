/** Units with a score, placed against their cutoffs (METHODS sections 1 and 9). */
import type { Line, Placement, SetAside } from '../placement.js'
import { type CutoffSource, type CutoffsServed, cutoffsServed, type MissingKey } from './cutoffs.js'
import { countSetAside, FATE } from './fate.js'
import { type Groups, groupRows, type Labels, lineId, lineLabel } from './labels.js'
import { spreadByLine } from './rescale.js'
import { directionOf, isTreatedAtCutoff, type TreatedSide } from './side.js'

export interface ScorePlacementInput {
  /** One score per row; NaN = missing. */
  readonly score: Float64Array
  readonly treated: TreatedSide
  readonly cutoff: CutoffSource
  /** Columns whose values tell lines apart; absent: the schedule's keys, the ladder's steps, or the distinct cutoffs. */
  readonly compareBy?: readonly Labels[]
  /** `spread`: x in standard deviations of the score among the entries of the line. */
  readonly rescale: 'none' | 'spread'
}

export interface ScorePlacement {
  readonly placement: Placement
  /** Units without an entry, by reason; a unit counts once, under the first reason that holds. */
  readonly setAside: SetAside
  /** Keys that records have and the schedule has not, with the number of units set aside for each. */
  readonly missingKeys: readonly MissingKey[]
}

/**
 * Places every unit against the line, or on a ladder the two lines, that it serves.
 * A line is a combination of what tells lines apart, and exists where some row has that combination and a cutoff;
 * the single cutoff and the steps of a ladder exist in any case. Lines are in canonical order (`groupRows`), entries in
 * the order of the rows.
 */
export function placeByScore(input: ScorePlacementInput): ScorePlacement {
  const { score, treated, compareBy = [] } = input
  const fate = new Uint8Array(score.length)
  for (let i = 0; i < score.length; i++) {
    if (!Number.isFinite(score[i])) fate[i] = Number.isNaN(score[i]) ? FATE.scoreMissing : FATE.scoreNotFinite
  }
  const served = cutoffsServed(input.cutoff, score, treated, fate)
  const groups = compareBy.length > 0 ? groupsCompared(served, compareBy, fate) : served.groups
  const entries = signedDistances(score, treated, served, groups.ofRow, fate)
  const placed = input.rescale === 'spread' ? rescaled(entries, score, groups.values.length, fate) : entries
  return {
    placement: { lines: linesOf(groups, compareBy, served), ...placed },
    setAside: countSetAside(fate),
    missingKeys: served.missingKeys,
  }
}

/** Entries grouped by the compared columns, and on a ladder by the step too; units without a compared value are marked. */
function groupsCompared(served: CutoffsServed, compareBy: readonly Labels[], fate: Uint8Array): Groups {
  const { unit, cutoff } = served
  const columns: Labels[] = compareBy.map((column) => {
    if (column.codes.length !== fate.length) {
      throw new RangeError(`column ${column.name} has ${column.codes.length} rows, the score has ${fate.length}`)
    }
    const codes = new Int32Array(unit.length)
    for (let e = 0; e < unit.length; e++) codes[e] = column.codes[unit[e]]
    return { name: column.name, codes, labels: column.labels }
  })
  if (served.isLadder) {
    const labels = served.groups.values.map((values) => values[0])
    columns.push({ name: 'cutoff', codes: served.groups.ofRow, labels })
  }
  const present = new Uint8Array(unit.length)
  for (let e = 0; e < unit.length; e++) present[e] = Number.isFinite(cutoff[e]) ? 1 : 0
  const groups = groupRows(columns, present)
  for (let e = 0; e < unit.length; e++) {
    if (groups.ofRow[e] < 0 && fate[unit[e]] === FATE.placed) fate[unit[e]] = FATE.comparedValueMissing
  }
  return groups
}

/** A line's cutoff is stated where all its entries share it. */
function linesOf(groups: Groups, compareBy: readonly Labels[], served: CutoffsServed): Line[] {
  const isCompared = compareBy.length > 0
  const names = isCompared ? compareBy.map((column) => column.name) : [...served.names]
  if (isCompared && served.isLadder) names.push('cutoff')
  const fixed = isCompared ? undefined : served.fixedCutoffs
  const low = fixed ? fixed.slice() : new Float64Array(groups.values.length).fill(Number.POSITIVE_INFINITY)
  const high = fixed ? fixed.slice() : new Float64Array(groups.values.length).fill(Number.NEGATIVE_INFINITY)
  for (let e = 0; e < served.cutoff.length; e++) {
    const line = groups.ofRow[e]
    if (line < 0) continue
    if (served.cutoff[e] < low[line]) low[line] = served.cutoff[e]
    if (served.cutoff[e] > high[line]) high[line] = served.cutoff[e]
  }
  return groups.values.map((values, line) => {
    const named = { id: lineId(values), label: lineLabel(names, values) }
    return low[line] === high[line] ? { ...named, cutoff: low[line] } : named
  })
}

type Entries = Omit<Placement, 'lines'>

/** The entries of units that are not set aside, with x in score units. */
function signedDistances(
  score: Float64Array,
  side: TreatedSide,
  served: CutoffsServed,
  lineOfEntry: Int32Array,
  fate: Uint8Array,
): Entries {
  const count = served.unit.length
  const unit = new Int32Array(count)
  const line = new Int32Array(count)
  const x = new Float64Array(count)
  const treated = new Uint8Array(count)
  const isUp = directionOf(side) > 0
  const atCutoff = isTreatedAtCutoff(side) ? 1 : 0
  let size = 0
  for (let e = 0; e < count; e++) {
    const i = served.unit[e]
    if (fate[i] !== FATE.placed) continue
    const distance = isUp ? score[i] - served.cutoff[e] : served.cutoff[e] - score[i]
    unit[size] = i
    line[size] = lineOfEntry[e]
    x[size] = distance
    treated[size++] = distance > 0 ? 1 : distance < 0 ? 0 : atCutoff
  }
  return firstEntries({ unit, line, x, treated }, size)
}

/** Divides x by the spread of its line. Entries of lines without spread are dropped, and units left without an entry marked. */
function rescaled(entries: Entries, score: Float64Array, lineCount: number, fate: Uint8Array): Entries {
  const count = entries.unit.length
  const scoreOfEntry = new Float64Array(count)
  for (let e = 0; e < count; e++) scoreOfEntry[e] = score[entries.unit[e]]
  const spread = spreadByLine(scoreOfEntry, entries.line, lineCount)
  for (let e = 0; e < count; e++) fate[entries.unit[e]] = FATE.noSpread
  const unit = new Int32Array(count)
  const line = new Int32Array(count)
  const x = new Float64Array(count)
  const treated = new Uint8Array(count)
  let size = 0
  for (let e = 0; e < count; e++) {
    const divisor = spread[entries.line[e]]
    if (!(divisor > 0)) continue
    fate[entries.unit[e]] = FATE.placed
    unit[size] = entries.unit[e]
    line[size] = entries.line[e]
    x[size] = entries.x[e] / divisor
    treated[size++] = entries.treated[e]
  }
  return firstEntries({ unit, line, x, treated }, size)
}

function firstEntries(entries: Entries, size: number): Entries {
  if (entries.unit.length === size) return entries
  return {
    unit: entries.unit.slice(0, size),
    line: entries.line.slice(0, size),
    x: entries.x.slice(0, size),
    treated: entries.treated.slice(0, size),
  }
}
