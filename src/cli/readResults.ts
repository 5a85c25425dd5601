/** A results folder read back: its numbers and the study they are of. */
import { join } from 'node:path'
import type { Run } from '../analyze.js'
import { readJsonFile, readTextFile } from '../layers/index.js'
import type { Checked, Problem } from '../problem.js'
import type { Results } from '../results.js'
import { mostStudyBytes } from './inputs.js'
import { factsOf } from './outFolder.js'

const mostResultsBytes = 500_000_000

export async function readResultsFolder(folder: string): Promise<Checked<Run>> {
  const facts = factsOf(folder)
  if (!facts?.isDirectory()) {
    const found = facts ? 'it is a file' : 'there is no such folder'
    return refused({ file: folder, what: 'results folder', found, todo: 'name the folder that scarp run wrote' })
  }
  const results = await readResults(join(folder, 'results.json'))
  const options = await readOptions(join(folder, 'study.resolved.yaml'))
  if (results.ok && options.ok) return { ok: true, value: { results: results.value, options: options.value } }
  return { ok: false, problems: [results, options].flatMap((read) => (read.ok ? [] : read.problems)) }
}

async function readResults(file: string): Promise<Checked<Results>> {
  const read = await readJsonFile(file, { shownAs: file, askedBy: 'results', mostBytes: mostResultsBytes })
  if (!read.ok) return { ok: false, problems: read.problems.map((one) => ({ ...one, todo: runAgain })) }
  const content = read.value.content as Partial<Results> | null
  const isWhole =
    content?.format === 'scarp-results/1' &&
    [content.inputs, content.lines, content.outcomes].every((list) => Array.isArray(list) && list.every(isObject)) &&
    (content.outcomes as Results['outcomes']).every(({ lines, pooled, target }) =>
      [...(Array.isArray(lines) ? lines : [null]), pooled, target].every(isObject),
    )
  if (isWhole) return { ok: true, value: content as Results }
  return refused({ file, what: 'results', found: 'not the results of this program', todo: runAgain })
}

const isObject = (value: unknown) => typeof value === 'object' && value !== null

async function readOptions(file: string): Promise<Checked<unknown>> {
  const read = await readTextFile(file, { shownAs: file, askedBy: 'options', mostBytes: mostStudyBytes })
  if (!read.ok) return { ok: false, problems: read.problems.map((one) => ({ ...one, todo: runAgain })) }
  const { parseDocument } = await import('yaml')
  const document = parseDocument(read.value.text, { prettyErrors: true })
  const [fault] = document.errors
  if (!fault) return { ok: true, value: document.toJS() }
  const line = fault.linePos?.[0].line
  return refused({ file, line, what: 'options', found: fault.message.split('\n')[0], todo: runAgain })
}

const runAgain = 'write the folder anew with scarp run'

function refused(problem: Problem): { ok: false; problems: Problem[] } {
  return { ok: false, problems: [problem] }
}
