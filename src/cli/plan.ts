/** `scarp plan`: smallest detectable effects and units needed, before outcomes are seen. */

import { readTextFile } from '../layers/index.js'
import type { Checked } from '../problem.js'
import type { Plan } from '../results.js'
import { type ExitCode, exitCodes } from './exitCodes.js'
import { mostStudyBytes, readInputs, readStudyFile } from './inputs.js'
import { progressLine } from './progress.js'
import { say, sayProblems } from './say.js'

export interface PlanOptions {
  readonly json?: boolean
}

export async function plan(file: string, options: PlanOptions): Promise<ExitCode> {
  const { progress, clear } = progressLine(options.json === true)
  const text = await readTextFile(file, { shownAs: file, askedBy: 'study', mostBytes: mostStudyBytes })
  const { readPlanAlone } = await import('../study/index.js')
  const alone = text.ok ? readPlanAlone(text.value.text, file) : undefined
  const planned = alone ? await fromAssumptions(alone) : await fromRecords(file, progress)
  clear()
  if (!planned.ok) {
    sayProblems(planned.problems)
    return exitCodes.unusable
  }
  const { planLines } = await import('../report/index.js')
  const lines = options.json ? [JSON.stringify(planned.value, null, 2)] : planLines(planned.value)
  process.stdout.write(`${lines.join('\n')}\n`)
  if (planned.value.rows.some((row) => !('not_planned' in row))) return exitCodes.done
  say(`${file}: nothing can be planned from: no line has an estimate`)
  return exitCodes.nothingEstimated
}

type Alone = NonNullable<ReturnType<typeof import('../study/index.js')['readPlanAlone']>>

async function fromAssumptions(alone: Alone): Promise<Checked<Plan>> {
  if (!alone.ok) return alone
  const { planFromAssumptions } = await import('../analyze.js')
  return { ok: true, value: planFromAssumptions(alone.value) }
}

async function fromRecords(
  file: string,
  progress: Parameters<typeof readInputs>[1]['progress'],
): Promise<Checked<Plan>> {
  const studyFile = await readStudyFile(file)
  if (!studyFile.ok) return studyFile
  const { study } = studyFile.value
  const { planFromAssumptions, planFromRecords } = await import('../analyze.js')
  const { assume } = study.plan
  if (assume) return { ok: true, value: planFromAssumptions({ ...study, plan: { ...study.plan, assume } }) }
  const inputs = await readInputs(studyFile.value, { progress })
  return inputs.ok ? planFromRecords(study, inputs.value, progress) : inputs
}
