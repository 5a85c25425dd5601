/** The example studies with the page's choices made by the program: as variants of the study, each a run at that bandwidth. */
import { appendFileSync, cpSync, mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { readStudyFile } from '../../src/cli/inputs.js'
import { analyzeStudy, readAllInputs } from '../../src/cli/job.js'
import { problemText } from '../../src/problem.js'
import type { State } from '../../src/report/client/address.js'
import type { Analysis, Jump } from '../../src/results.js'
import type { Study } from '../../src/study/index.js'

export interface Example {
  readonly study: Study
  readonly analysis: Analysis
}

/** Without checks, and with `states` as variants, named by their places. */
export async function runExample(name: string, states: readonly State[] = []): Promise<Example> {
  const folder = mkdtempSync(join(tmpdir(), 'what-if-'))
  try {
    cpSync(join('boundaries', name), folder, { recursive: true })
    const file = join(folder, 'study.yaml')
    const variants = states.map(({ bandwidth, kernel, order }, i) => {
      const estimation = JSON.stringify({ bandwidth, kernel, order })
      return `  "${i}": {estimation: ${estimation}}\n`
    })
    if (variants.length > 0) appendFileSync(file, `variants:\n${variants.join('')}`)
    const from = await readStudyFile(file)
    if (!from.ok) throw new Error(from.problems.map(problemText).join('\n'))
    const study: Study = { ...from.value.study, checks: 'none' }
    const inputs = await readAllInputs({ ...from.value, study })
    if (!inputs.ok) throw new Error(inputs.problems.map(problemText).join('\n'))
    const clock = { started: '2026-03-04T05:06:07.000Z', seconds: () => 0 }
    const job = await analyzeStudy({ ...from.value, study }, inputs.value, { clock })
    if (!job.ok) throw new Error(job.problems.map(problemText).join('\n'))
    return { study, analysis: job.value.analysis }
  } finally {
    rmSync(folder, { recursive: true, force: true })
  }
}

/** The pooled jump of an outcome in the variant of a place. */
export function pooledOf({ results }: Analysis, outcome: string, place: number): Jump {
  const found = results.outcomes.find((one) => one.outcome === outcome)
  const variant = found?.variants?.find((one) => one.variant === String(place))
  if (!variant || !('corrected' in variant.pooled)) throw new Error(`no estimate of ${outcome} in variant ${place}`)
  return variant.pooled
}
