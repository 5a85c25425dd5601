/** What the variants of a study read: the same as the study, or files of their own. */
import type { AnalysisInputs, LayerInput } from '../analyze.js'
import type { Checked, Problem } from '../problem.js'
import type { BorderLine, Study } from '../study/index.js'
import { type ReadOptions, readInputs, type StudyFile } from './inputs.js'

/** The inputs of a study with those of its variants. Files that a variant shares with the study are not read again. */
export async function withVariants(
  from: StudyFile,
  inputs: AnalysisInputs,
  options: ReadOptions,
): Promise<Checked<AnalysisInputs>> {
  const { variants } = from.study
  if (variants.length === 0) return { ok: true, value: inputs }
  const { readingKey } = await import('../analyze.js')
  const read = new Map<string, AnalysisInputs>()
  const problems: Problem[] = []
  for (const { name, study } of variants) {
    const shared = readingKey(study) === readingKey(from.study) ? sharedLayers(from.study, study, inputs) : undefined
    const own = shared ?? (await readInputs({ ...from, study }, options))
    if (own.ok) read.set(name, own.value)
    else problems.push(...own.problems.map((one) => ({ ...one, what: `variant ${name}: ${one.what}` })))
  }
  return problems.length > 0 ? { ok: false, problems } : { ok: true, value: { ...inputs, variants: read } }
}

/** The study's inputs with the variant's choice of its layers; undefined where the variant has layers of its own. */
function sharedLayers(main: Study, other: Study, inputs: AnalysisInputs): Checked<AnalysisInputs> | undefined {
  if (main.line.kind !== 'border' || other.line.kind !== 'border') return { ok: true, value: inputs }
  const pick = (key: 'barriers' | 'overlaps') =>
    layersOf(main.line as BorderLine, other.line as BorderLine, key, inputs)
  const [barriers, overlaps] = [pick('barriers'), pick('overlaps')]
  return barriers && overlaps && { ok: true, value: { ...inputs, barriers, overlaps } }
}

function layersOf(
  main: BorderLine,
  other: BorderLine,
  key: 'barriers' | 'overlaps',
  inputs: AnalysisInputs,
): readonly LayerInput[] | undefined {
  const sourceOf = ({ within: _, ...source }: BorderLine['barriers'][number]) => JSON.stringify(source)
  const known = main[key].map(sourceOf)
  const places = other[key].map((layer) => known.indexOf(sourceOf(layer)))
  return places.includes(-1) ? undefined : places.map((place) => (inputs[key] as readonly LayerInput[])[place])
}
