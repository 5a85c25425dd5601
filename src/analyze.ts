/**
 * Study and columns in, results out: the table of contents of the whole job.
 * Read it first. Places every unit against its line, estimates each outcome at every line and pooled, compares the
 * lines, and keeps the ledger. Knows no file and no page; `cli` reads what comes in, `report` draws what goes out.
 */
import { acrossLines, slopeOf } from './analysis/acrossLines.js'
import { alongGround, alongResult } from './analysis/along.js'
import { auditOf } from './analysis/audit.js'
import { awayOf } from './analysis/awayFromLine.js'
import { balanceAtLines } from './analysis/balance.js'
import type { BorderFacts } from './analysis/border.js'
import { outcomeChecks, sharedChecks } from './analysis/checks.js'
import { entriesOf } from './analysis/entries.js'
import { estimateOutcome, hasReason, type LineEstimate, type OutcomeEstimates } from './analysis/estimating.js'
import { mapOf, scatterOf, takeUpOf } from './analysis/exhibits.js'
import { type AnalysisInputs, type Progress, positionColumns, wantedColumns } from './analysis/inputs.js'
import { movedCutoffs } from './analysis/movedCutoffs.js'
import { type Placed, placeStudy } from './analysis/placing.js'
import { sharedUnits } from './analysis/sharedUnits.js'
import { attributeOfLines, doubtfulShares, sharesOfLines } from './analysis/shares.js'
import { borderResult, lineSummaries, outcomeResult } from './analysis/summaries.js'
import { unitCells, unitPoints } from './analysis/unitCells.js'
import { placeVariants, variantResults } from './analysis/variants.js'
import { whatIfOf } from './analysis/whatIf.js'
import { linesOfLayer, readLineLayer } from './borders/index.js'
import type { Checked } from './problem.js'
import { type LedgerStep, ledgerStep, numbersOf } from './records/index.js'
import type { Analysis, Exhibits, InputFile, MapExhibit, OutcomeExhibit, OutcomeResult, UnitRows } from './results.js'
import type { Study } from './study/index.js'

export { borderOf, metresPerUnit } from './analysis/border.js'
export { compareRuns } from './analysis/comparedRuns.js'
export type { AnalysisInputs, LayerInput, Progress } from './analysis/inputs.js'
export { positionColumns, readingKey } from './analysis/inputs.js'
export type { Placed } from './analysis/placing.js'
export { planFromAssumptions, planFromRecords } from './analysis/planning.js'
export type { Run } from './analysis/runDifferences.js'
export { type UnitsApart, unitsApart } from './analysis/unitsApart.js'
export { doubtfulShares, placeStudy, sharesOfLines, wantedColumns }

export interface AnalysisContext {
  /** Version of the program, for the record. */
  readonly version: string
  /** Time of the run, ISO 8601, for the record. */
  readonly started: string
  readonly progress?: Progress
}

/**
 * Runs the whole analysis. Problems of the study's schedule, zones or shares come back all at once; what the data
 * can't answer is in the results with its reason. `results.seconds` is 0 for the caller to fill in.
 */
export function analyze(study: Study, inputs: AnalysisInputs, context: AnalysisContext): Checked<Analysis> {
  const placed = placeStudy(study, inputs, context.progress)
  if (!placed.ok) return placed
  const { placement } = placed.value
  const shares = sharesOfLines(study, inputs, placement)
  if (!shares.ok) return shares
  const variants = placeVariants(study, inputs, placed.value, context.progress)
  if (!variants.ok) return variants
  const ground = alongGround(study, inputs, placed.value)
  const attribute = attributeOfLines(study, inputs, placement)
  const checked = sharedChecks(study, inputs, placed.value, context.progress)
  const ledger = [...placed.value.ledger]
  const outcomes: OutcomeResult[] = []
  const drawn: OutcomeExhibit[] = []
  study.outcomes.forEach((outcome, i) => {
    const entries = entriesOf(study, inputs.table, placed.value, outcome)
    const total = study.outcomes.length * placement.lines.length
    const estimates = estimateOutcome(study, placed.value, entries, shares.value?.values, (done) =>
      context.progress?.('estimating', i * placement.lines.length + done, total),
    )
    ledger.push(...outcomeSteps(outcome, placed.value.units, entries, estimates))
    const { pooled } = estimates
    const along =
      ground && !hasReason(pooled) ? alongResult(study, inputs, placed.value, ground, outcome, pooled.jump) : {}
    const main = { study, table: inputs.table, placed: placed.value, entries, made: estimates }
    const beside = variantResults(variants.value, outcome, main, (done) =>
      context.progress?.('estimating variants', done, variants.value.length),
    )
    const away = awayOf(study, inputs.table, placed.value, outcome, estimates)
    const moved = movedCutoffs(study, inputs, placed.value, outcome)
    const result = {
      ...outcomeResult(
        study,
        outcome,
        placement.lines,
        estimates,
        slopeOf(estimates, attribute, study.estimation.level),
      ),
      ...acrossLines(estimates, placement.lines, study.estimation.level),
      ...along,
      ...(away ? { away_from_line: away } : {}),
      ...(moved ? { moved_cutoffs: moved } : {}),
    }
    const about = { entries, made: estimates, result }
    outcomes.push({
      ...result,
      ...(checked ? outcomeChecks(checked, study, inputs, placed.value, about) : {}),
      ...(beside.length > 0 ? { variants: beside } : {}),
    })
    drawn.push({
      ...outcomeExhibit(study, outcome, estimates),
      whatIf: whatIfOf(study, placed.value, entries, estimates),
    })
  })
  const audit = auditOf(study, inputs, placed.value)
  const balance = balanceAtLines(study, inputs, placed.value)
  const shared = sharedUnits(placement, inputs.table, study.records.id)
  const used = placed.value.border?.pieces.filter(({ setAside }) => setAside === undefined)
  return {
    ok: true,
    value: {
      results: {
        format: 'scarp-results/1',
        title: study.title,
        version: context.version,
        seed: study.seed,
        started: context.started,
        seconds: 0,
        inputs: inputFiles(inputs),
        placement: {
          read: inputs.table.rowsRead,
          kept: inputs.table.rows,
          placed: placed.value.units,
          set_aside: Object.fromEntries([...placed.value.setAside].sort(([a], [b]) => (a < b ? -1 : 1))),
        },
        lines: lineSummaries(placement, used).map((line, i) => (balance ? { ...line, balance: balance[i] } : line)),
        ...(hasBorder(placed.value) ? { border: borderResult(placed.value) } : {}),
        ...(shares.value ? { target_population: shares.value.population } : {}),
        ...(audit ? { audit } : {}),
        ...(shared ? { shared_units: shared } : {}),
        ...(checked && checked.balance.length > 0 ? { balance: checked.balance } : {}),
        outcomes,
        ledger,
      },
      exhibits: {
        ...exhibitsOf(study, inputs, placed.value, drawn),
        ...(checked?.density ? { density: checked.density } : {}),
      },
      units: unitRows(placed.value),
    },
  }
}

function hasBorder(placed: Placed): placed is Placed & BorderFacts {
  return placed.border !== undefined
}

/** Ledger of one outcome: units with the outcome, and units of positive weight in the pooled estimate. */
function outcomeSteps(
  outcome: string,
  placedUnits: number,
  entries: ReturnType<typeof entriesOf>,
  { pooled }: OutcomeEstimates,
): LedgerStep[] {
  const withOutcome = ledgerStep(`${outcome}: outcome present`, placedUnits, {
    'outcome missing': entries.missing,
    'covariate or take-up missing': entries.incomplete,
  })
  if (hasReason(pooled)) return [withOutcome]
  const { untreated, treated } = pooled.jump.unitsInBandwidth
  const used = pooled.sample.repeats ? distinctUnits(pooled) : untreated + treated
  const outside = { 'outside the bandwidth': withOutcome.out - used }
  return [withOutcome, ledgerStep(`${outcome}: within the pooled bandwidth`, withOutcome.out, outside)]
}

/** Units within the bandwidth where a unit may have several entries. */
function distinctUnits({ jump, sample }: LineEstimate): number {
  const used = new Set<number>()
  for (const name of ['untreated', 'treated'] as const) {
    const { unit } = sample[name]
    for (let i = 0; i < jump.unitsInBandwidth[name]; i++) used.add(unit[i])
  }
  return used.size
}

function outcomeExhibit(study: Study, outcome: string, { lines, pooled }: OutcomeEstimates): OutcomeExhibit {
  const draw = (estimate: LineEstimate) => scatterOf(estimate, study.disclosure.smallestCell)
  return {
    outcome,
    ...(hasReason(pooled) ? {} : { pooled: draw(pooled) }),
    ...(pooled.takeUp ? { takeUp: takeUpOf(study, pooled.takeUp) } : {}),
    lines: lines.map((line) => (hasReason(line) ? null : draw(line))),
  }
}

function exhibitsOf(study: Study, inputs: AnalysisInputs, placed: Placed, outcomes: OutcomeExhibit[]): Exhibits {
  const { line } = study
  const xUnit = line.kind === 'border' ? line.unit : line.kind === 'score' ? line.score : line.distance
  const spread = line.kind === 'score' && line.rescale === 'spread'
  const { border } = placed
  const ids = placed.placement.lines.map(({ id }) => id)
  return {
    xUnit: spread ? `standard deviations of ${xUnit}` : xUnit,
    isBorder: line.kind === 'border',
    outcomes,
    ...(border ? { map: { ...mapOf(border, ids, barrierShapes(inputs)), ...unitsOnMap(study, inputs, placed) } } : {}),
  }
}

/** Units placed, counted on a grid where a cell is large enough to be shown; and one by one where the study asks. */
function unitsOnMap(
  study: Study,
  { table }: AnalysisInputs,
  { placement, border }: Placed,
): Pick<MapExhibit, 'cells' | 'points'> {
  const near = border?.pieces[0]?.coordinates[0]
  if (study.line.kind !== 'border' || !near) return {}
  const [lon, lat] = positionColumns(study).map((name) => {
    const values = numbersOf(table, name)
    return Float64Array.from(placement.unit, (unit) => values[unit])
  })
  const cells = unitCells(lon, lat, near, study.disclosure.smallestCell)
  return { ...(cells ? { cells } : {}), ...(study.disclosure.coordinates ? { points: unitPoints(lon, lat) } : {}) }
}

function barrierShapes(inputs: AnalysisInputs): MapExhibit['barriers'] {
  return (inputs.barriers ?? []).flatMap(({ content, file }) => {
    const layer = readLineLayer(content, file)
    return layer.ok ? [{ name: file, coordinates: linesOfLayer(layer.value) }] : []
  })
}

function unitRows({ placement, ground, border }: Placed): UnitRows {
  const { unit, line, treated, x } = placement
  if (!ground || !border) return { unit, line, treated, x }
  const pick = (values: Float64Array) => Float64Array.from(unit, (u) => values[u])
  return {
    unit,
    line,
    treated,
    x,
    ground: {
      zone: Int32Array.from(unit, (u) => ground.zone[u]),
      zoneNames: border.names,
      footLon: pick(ground.footLon),
      footLat: pick(ground.footLat),
      positionMetres: pick(ground.positionMetres),
    },
  }
}

function inputFiles({ table, schedule, shares, zones, barriers = [], overlaps = [] }: AnalysisInputs): InputFile[] {
  const tables = [table, ...(schedule ? [schedule] : []), ...(shares ? [shares] : [])].map(
    ({ file, sha256, rowsRead }) => ({
      file,
      sha256,
      rows: rowsRead,
    }),
  )
  const layers = [...(zones ? [zones] : []), ...barriers, ...overlaps].map(({ file, sha256, content, facts }) => ({
    file,
    sha256,
    features: (content as { features?: unknown[] }).features?.length ?? 1,
    ...(facts ? { format: facts.format, crs: facts.crs, crs_from: facts.from } : {}),
    ...(facts && facts.edgeMetres > 0 ? { edge_m: facts.edgeMetres } : {}),
  }))
  return [...tables, ...layers]
}
