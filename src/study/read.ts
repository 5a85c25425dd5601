import type { Checked, Problem } from '../problem.js'
import { isRecord } from './leaf.js'
import { problemsOf } from './messages.js'
import {
  folderOf,
  resolveAssumptions,
  resolveEstimation,
  resolvePlan,
  resolveStudy,
  scaledBandwidth,
} from './resolve.js'
import { isNamePath, planAlone, study } from './schema.js'
import { readSource, type Source } from './source.js'
import { togetherProblems } from './together.js'
import type { PlanAlone, Study, Variant } from './types.js'
import { variantSources } from './variants.js'

/**
 * A study from the text of its file (YAML 1.2 or JSON), with every default filled in, or everything that is wrong
 * with it in the order of its lines. Text that can't be parsed is refused for its syntax alone.
 * `file` is used in messages, and its folder's name is the title of a study without one. No file is read.
 */
export function readStudy(text: string, file: string): Checked<Study> {
  const source = readSource(text, file, isNamePath)
  if (!source.ok) return { ok: false, problems: inOrder(source.problems) }
  const read = study.safeParse(source.value.data)
  const problems = [
    ...(read.success ? [] : problemsOf(read.error.issues, source.value, file)),
    ...togetherProblems(source.value, file),
  ]
  if (problems.length > 0 || !read.success) return { ok: false, problems: inOrder(problems) }
  const base = resolveStudy(read.data, file)
  const variants = readVariants(source.value, base.title, file, problems)
  if (problems.length > 0) return { ok: false, problems: inOrder(problems) }
  return { ok: true, value: { ...base, variants } }
}

/** The variants of a study that is sound by itself. */
function readVariants(source: Source, title: string, file: string, problems: Problem[]): Variant[] {
  return variantSources(source, file, problems).flatMap(({ name, overrides, source: merged, scale = 1 }): Variant[] => {
    const read = study.safeParse(merged.data)
    const found = [
      ...(read.success ? [] : problemsOf(read.error.issues, merged, file)),
      ...togetherProblems(merged, file),
    ].map((problem) => ({ ...problem, what: `variant ${name}: ${problem.what}` }))
    problems.push(...found)
    if (found.length > 0 || !read.success) return []
    const resolved = resolveStudy(read.data, file)
    const { estimation } = resolved
    const bandwidth = scaledBandwidth(estimation.bandwidth, scale)
    return [{ name, overrides, study: { ...resolved, title, estimation: { ...estimation, bandwidth } } }]
  })
}

/**
 * A plan from assumptions alone: a file with `plan.assume` and without records. Undefined where the file is no such plan;
 * it is then a study, and readStudy says what is wrong with it.
 */
export function readPlanAlone(text: string, file: string): Checked<PlanAlone> | undefined {
  const source = readSource(text, file, isNamePath)
  if (!source.ok || !isRecord(source.value.data)) return undefined
  const { data } = source.value
  if (Object.hasOwn(data, 'records') || !isRecord(data.plan) || !Object.hasOwn(data.plan, 'assume')) return undefined
  const read = planAlone.safeParse(data)
  if (!read.success) return { ok: false, problems: inOrder(problemsOf(read.error.issues, source.value, file)) }
  const { title, plan, estimation = {} } = read.data
  return {
    ok: true,
    value: {
      title: title ?? folderOf(file) ?? 'Plan',
      plan: { ...resolvePlan(plan), assume: resolveAssumptions(plan.assume) },
      estimation: resolveEstimation(estimation),
    },
  }
}

function inOrder(problems: readonly Problem[]): Problem[] {
  return [...problems].sort((a, b) => (a.line ?? 0) - (b.line ?? 0))
}
