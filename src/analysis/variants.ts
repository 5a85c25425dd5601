/**
 * The same study with some keys written otherwise, estimated beside it. What a variant shares with the study is not done
 * again: the ground is measured once, and rows are placed once where neither line nor records differ.
 */
import { covarianceMatrix, type Influence, type SpatialPlaces } from '../jump/index.js'
import { studentTwoSidedP } from '../math/index.js'
import type { Checked, Problem } from '../problem.js'
import type { Table } from '../records/index.js'
import type { VariantResult } from '../results.js'
import type { BorderLine, Study } from '../study/index.js'
import { entriesOf, type OutcomeEntries } from './entries.js'
import { estimateMain, hasReason, type MainEstimates } from './estimating.js'
import type { AnalysisInputs, Progress } from './inputs.js'
import { type Placed, placeStudy } from './placing.js'
import { sharesOfLines } from './shares.js'
import { cornerTurn, hasCorner, pooledResult, targetResult } from './summaries.js'

/** A variant ready to be estimated. */
export interface PlacedVariant {
  readonly name: string
  readonly study: Study
  readonly inputs: AnalysisInputs
  readonly placed: Placed
  readonly shares: Float64Array | undefined
}

interface NamedStudy {
  readonly name: string
  readonly study: Study
  readonly inputs: AnalysisInputs
}

/** The study's own variants, and on the ground those that every reader asks for; their problems name the variant. */
export function placeVariants(
  study: Study,
  inputs: AnalysisInputs,
  placed: Placed,
  progress?: Progress,
): Checked<PlacedVariant[]> {
  const written = study.variants.map(({ name, study: other }): NamedStudy => {
    const read = inputs.variants?.get(name)
    if (!read) throw new Error(`nothing was read for the variant ${name}`)
    return { name, study: other, inputs: read }
  })
  const known = new Set(written.flatMap(({ name, study: other }) => [name, numbersKey(other)]))
  const isNew = ({ name, study: other }: NamedStudy) => !known.has(name) && !known.has(numbersKey(other))
  const all = [...written, ...usualVariants(study, inputs, placed).filter(isNew)]
  const ready: PlacedVariant[] = []
  const problems: Problem[] = []
  all.forEach((variant, i) => {
    progress?.('placing variants', i, all.length)
    const done = placeVariant(variant, study, inputs, placed)
    if (done.ok) ready.push(done.value)
    else problems.push(...done.problems.map((one) => ({ ...one, what: `variant ${variant.name}: ${one.what}` })))
  })
  return problems.length > 0 ? { ok: false, problems } : { ok: true, value: ready }
}

/** What a referee asks of a border: the other ways to settle conflicts, and each rule about its pieces switched off. */
function usualVariants(study: Study, inputs: AnalysisInputs, { border }: Placed): NamedStudy[] {
  const { line } = study
  if (line.kind !== 'border') return []
  const beside = (name: string, other: Partial<BorderLine>, read: Partial<AnalysisInputs> = {}): NamedStudy => ({
    name,
    study: { ...study, line: { ...line, ...other } },
    inputs: { ...inputs, ...read },
  })
  const inUse = (border?.pieces ?? []).filter(({ setAside }) => setAside === undefined)
  const turning = inUse.filter(hasCorner).length
  const turns = turning > 0 && turning < inUse.length
  const conflicts = (['set-aside', 'map', 'record'] as const).filter((way) => way !== line.onConflict)
  return [
    ...(line.side === undefined
      ? []
      : conflicts.map((way) =>
          beside(`conflicts by ${way}`.replace('by set-aside', 'set aside'), { onConflict: way }),
        )),
    ...(line.barriers.length > 0 ? [beside('barriers kept', { barriers: [] }, { barriers: [] })] : []),
    ...(line.overlaps.length > 0 ? [beside('overlaps kept', { overlaps: [] }, { overlaps: [] })] : []),
    ...(line.largestTurn === undefined
      ? turns
        ? [beside(`pieces that turn by more than ${cornerTurn} degrees left out`, { largestTurn: cornerTurn })]
        : []
      : [beside('turning pieces kept', { largestTurn: undefined })]),
    ...(line.corner > 0 ? [beside('corners kept', { corner: 0 })] : []),
  ]
}

function placeVariant(
  { name, study, inputs }: NamedStudy,
  main: Study,
  mainInputs: AnalysisInputs,
  mainPlaced: Placed,
): Checked<PlacedVariant> {
  const isSameTable = inputs.table === mainInputs.table
  const { known } = mainPlaced
  const isSameGround = known !== undefined && isSameTable && groundKey(study, inputs) === groundKey(main, mainInputs)
  const placed =
    isSameTable && placingKey(study, inputs) === placingKey(main, mainInputs)
      ? { ok: true as const, value: mainPlaced }
      : placeStudy(study, isSameGround ? { ...inputs, ground: known } : inputs)
  if (!placed.ok) return placed
  const shares = sharesOfLines(study, inputs, placed.value.placement)
  if (!shares.ok) return shares
  return { ok: true, value: { name, study, inputs, placed: placed.value, shares: shares.value?.values } }
}

/** Equal where two studies of the same files have the same numbers. */
function numbersKey({ records, line, estimation, pooling }: Study): string {
  return JSON.stringify([records, line, estimation, pooling])
}

/** Equal where the same border is measured against the same positions. */
function groundKey(study: Study, { zones }: AnalysisInputs): string {
  const { line, records } = study
  if (line.kind !== 'border') return ''
  const { zoneName, treated, dose, outside, unit, snap, piece } = line
  return JSON.stringify([
    zones?.sha256,
    zones?.file,
    zoneName,
    treated,
    dose,
    outside,
    unit,
    snap,
    piece,
    records.position,
  ])
}

/** Equal where every row has the same place; the table is compared by the caller. */
function placingKey(study: Study, { zones, schedule, barriers = [], overlaps = [] }: AnalysisInputs): string {
  const layers = [zones, schedule, ...barriers, ...overlaps].map((layer) => layer?.sha256)
  const { along: _, ...line } = { along: undefined, ...study.line }
  return JSON.stringify([line, study.records, layers, study.seed])
}

/** One outcome under every variant, each beside the study's own pooled estimate. */
export function variantResults(
  variants: readonly PlacedVariant[],
  outcome: string,
  main: Side & { readonly entries: OutcomeEntries },
  progress: (done: number) => void,
): VariantResult[] {
  return variants.map(({ name, study, inputs, placed, shares }, i) => {
    const isSame = placed === main.placed && study.records.weight === main.study.records.weight
    const entries = isSame ? main.entries : entriesOf(study, inputs.table, placed, outcome)
    const made = estimateMain(study, placed, entries, shares)
    progress(i + 1)
    const { lines } = placed.placement
    return {
      variant: name,
      pooled: pooledResult(made, study.estimation, lines),
      target: targetResult(made, lines),
      ...differenceOf(main, { study, table: inputs.table, placed, made }),
    }
  })
}

/** What two pooled estimates are compared by. */
interface Side {
  readonly study: Study
  readonly table: Table
  readonly placed: Placed
  readonly made: MainEstimates
}

/**
 * Corrected pooled estimate of the variant less the study's own. Its standard error comes from the influence of both
 * where these have the same keys: units, or the same clusters.
 */
function differenceOf(main: Side, other: Side): Pick<VariantResult, 'difference'> {
  const [a, b] = [main.made.pooled, other.made.pooled]
  if (hasReason(a) || hasReason(b)) return {}
  const estimate = b.jump.corrected.estimate - a.jump.corrected.estimate
  if (main.table !== other.table || keysOf(main) !== keysOf(other)) {
    const reason = 'the two variances do not sum over the same units or clusters'
    return { difference: { estimate, standard_error: null, standard_error_reason: reason } }
  }
  const variance = varianceOfDifference(a.jump.influence, b.jump.influence, main.placed.spatial)
  const standardError = Math.sqrt(Math.max(0, variance))
  if (!(standardError > 1e-9 * a.jump.corrected.standardError)) return { difference: { estimate, standard_error: 0 } }
  const p = studentTwoSidedP(estimate / standardError, Number.POSITIVE_INFINITY)
  return { difference: { estimate, standard_error: standardError, p } }
}

function varianceOfDifference(a: Influence, b: Influence, spatial: SpatialPlaces | undefined): number {
  const { matrix } = covarianceMatrix([a, b], spatial)
  return matrix[0] + matrix[3] - 2 * matrix[1]
}

/** What the keys of a pooled influence are. */
function keysOf({ study, placed, made }: Side): string {
  const variance = placed.placement.lines.length === 1 ? made.lineVariance : made.pooledVariance
  if (variance === 'spatial') return `within ${placed.spatial?.cutoffMetres}`
  if (variance !== 'clusters') return 'unit'
  if (study.records.cluster !== undefined) return `column ${study.records.cluster}`
  if (placed.cluster) return 'point'
  return `piece ${placed.placement.lines.map(({ id }) => id).join('\0')}`
}
