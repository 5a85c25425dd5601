/** `scarp inspect`: all that can be known to be wrong or doubtful before estimating. */
import { type AnalysisInputs, type Placed, positionColumns } from '../analyze.js'
import { numbersOf } from '../records/index.js'
import { geometryWords } from '../report/index.js'
import type { Study } from '../study/index.js'
import { count, largeSetAside, repeatedDistances, repeatedPositions, thinLines, unitsBySide } from './doubts.js'
import { type ExitCode, exitCodes } from './exitCodes.js'
import type { FabricAccount } from './fabricAccount.js'
import { withFrozen } from './frozen.js'
import { withGround } from './ground.js'
import { readInputs, readStudyFile } from './inputs.js'
import { progressLine } from './progress.js'
import { sayProblems } from './say.js'
import { withVariants } from './variantInputs.js'

const linesShown = 20

export interface InspectOptions {
  readonly workers?: number
}

export async function inspect(file: string, options: InspectOptions = {}): Promise<ExitCode> {
  const { progress, clear } = progressLine(false)
  const studyFile = await readStudyFile(file)
  if (!studyFile.ok) {
    sayProblems(studyFile.problems)
    return exitCodes.unusable
  }
  const { study } = studyFile.value
  const readByStudy = await readInputs(studyFile.value, { progress })
  const inputs = readByStudy.ok ? await withVariants(studyFile.value, readByStudy.value, { progress }) : readByStudy
  const { doubtfulShares, placeStudy, sharesOfLines } = await import('../analyze.js')
  const frozen = inputs.ok ? await withFrozen(studyFile.value, inputs.value) : inputs
  const ready = frozen.ok
    ? await withGround(study, frozen.value.inputs, { workers: options.workers, progress })
    : frozen
  const placed = ready.ok ? placeStudy(study, ready.value, progress) : ready
  const shares = ready.ok && placed.ok ? sharesOfLines(study, ready.value, placed.value.placement) : undefined
  clear()
  if (!placed.ok || !shares?.ok) {
    sayProblems([placed, shares].flatMap((one) => (one && !one.ok ? one.problems : [])))
    return exitCodes.unusable
  }
  const read = (inputs as { value: AnalysisInputs }).value
  const { fabricAccount } = await import('./fabricAccount.js')
  const geometry = frozen.ok && 'geometry' in frozen.value ? frozen.value.geometry : undefined
  const doubts = shares.value ? doubtfulShares(shares.value) : []
  const account = [
    ...accountOf(study, read, placed.value, fabricAccount(study, read, placed.value), doubts),
    ...(geometry ? [geometryWords(geometry)] : []),
  ]
  process.stdout.write(`${account.join('\n')}\n`)
  return exitCodes.done
}

function accountOf(
  study: Study,
  inputs: AnalysisInputs,
  placed: Placed,
  fabric: FabricAccount,
  doubtsMore: readonly string[],
): string[] {
  const { table } = inputs
  const { placement } = placed
  const bySide = unitsBySide(placement)
  const setAside = [...placed.setAside].map(([reason, units]) => [`  ${reason}`, count(units)])
  const lines = placement.lines
    .slice(0, linesShown)
    .map((line, i) => [`  ${line.label}`, count(bySide.untreated[i]), count(bySide.treated[i])])
  const more = placement.lines.length - linesShown
  const missing = placed.missingKeys.map(({ key, units }) => [`  ${key}`, count(units)])
  const doubts = [...fabric.doubts, ...doubtsOf(study, inputs, placed), ...doubtsMore]
  return [
    study.title,
    ...aligned([
      ['rows read', count(table.rowsRead)],
      ['rows kept', count(table.rows)],
      ['units placed', count(placed.units)],
      ['units set aside', count(table.rows - placed.units)],
      ...setAside,
    ]),
    ...borderAccount(placed),
    ...fabric.lines,
    ...(missing.length > 0
      ? ['keys that the schedule lacks, and units', ...aligned(missing.slice(0, linesShown))]
      : []),
    ...aligned([[`${count(placement.lines.length)} lines`, 'untreated', 'treated'], ...lines]),
    ...(more > 0 ? [`  and ${count(more)} more`] : []),
    ...(doubts.length > 0 ? ['doubtful', ...doubts.map((doubt) => `  ${doubt}`)] : ['nothing doubtful was found']),
  ]
}

function borderAccount({ placement, ledger }: Placed): string[] {
  const step = ledger.find(({ km }) => km !== undefined)
  if (step?.km === undefined) return []
  return [
    `border: ${step.km.toFixed(1)} km in ${count(placement.lines.length)} pieces of ${count(step.pairs ?? 0)} pairs`,
  ]
}

function doubtsOf(study: Study, { table }: AnalysisInputs, placed: Placed): string[] {
  const { placement } = placed
  const thin = thinLines(placement, unitsBySide(placement))
  const share = largeSetAside(placed.units, table.rows)
  if (study.line.kind !== 'border') return [...thin, ...repeatedDistances(placement), ...share]
  const [lon, lat] = positionColumns(study)
  return [...thin, ...repeatedPositions(numbersOf(table, lon), numbersOf(table, lat)), ...share]
}

/** Columns of text: the first to the left, the others to the right. */
function aligned(rows: readonly (readonly string[])[]): string[] {
  const widths: number[] = []
  for (const row of rows) for (const [i, cell] of row.entries()) widths[i] = Math.max(widths[i] ?? 0, cell.length)
  return rows.map((row) =>
    row.map((cell, i) => (i === 0 ? cell.padEnd(widths[i]) : cell.padStart(widths[i]))).join('  '),
  )
}
