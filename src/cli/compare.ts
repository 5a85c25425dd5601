/** `scarp compare`: every number that moved between two results folders, and why. */
import type { Run } from '../analyze.js'
import type { ComparedRuns } from '../results.js'
import { type ExitCode, exitCodes } from './exitCodes.js'
import { readResultsFolder } from './readResults.js'
import { sayProblems } from './say.js'

export interface CompareOptions {
  readonly all?: boolean
  readonly json?: boolean
}

/** Nothing is written. The problems of both folders are said at once. */
export async function compare(first: string, second: string, options: CompareOptions): Promise<ExitCode> {
  const [before, after] = [await readResultsFolder(first), await readResultsFolder(second)]
  if (!before.ok || !after.ok) {
    sayProblems([before, after].flatMap((read) => (read.ok ? [] : read.problems)))
    return exitCodes.unusable
  }
  const { compareRuns } = await import('../analyze.js')
  const compared = compareRuns(before.value, after.value)
  const { comparedLines } = await import('../report/index.js')
  const lines = options.json
    ? [JSON.stringify(asJson([first, before.value], [second, after.value], compared), null, 2)]
    : comparedLines(compared, { all: options.all === true })
  process.stdout.write(`${lines.join('\n')}\n`)
  return exitCodes.done
}

/** Every number, whatever `--all` says: programs read it. */
function asJson(first: [string, Run], second: [string, Run], compared: ComparedRuns): object {
  const about = ([folder, { results }]: [string, Run]) => ({
    folder,
    title: results.title,
    version: results.version,
    started: results.started,
  })
  const pathless = <T extends { readonly path: readonly string[] }>(list: readonly T[]) =>
    list.map(({ path: _, ...rest }) => rest)
  return {
    format: 'scarp-comparison/1',
    first: about(first),
    second: about(second),
    ...compared,
    moved: pathless(compared.moved),
    reworded: pathless(compared.reworded),
    only: { first: pathless(compared.only.first), second: pathless(compared.only.second) },
  }
}
