import type { Checked, Problem } from '../problem.js'
import { problemsOf } from './messages.js'
import { resolveStudy } from './resolve.js'
import { isNamePath, study } from './schema.js'
import { readSource } from './source.js'
import { togetherProblems } from './together.js'
import type { Study } from './types.js'

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
  return { ok: true, value: resolveStudy(read.data, file) }
}

function inOrder(problems: readonly Problem[]): Problem[] {
  return [...problems].sort((a, b) => (a.line ?? 0) - (b.line ?? 0))
}
