/** The files of a replication folder, written one after another, each with its hash. */
import { createHash } from 'node:crypto'
import { closeSync, openSync, readFileSync, readSync } from 'node:fs'
import { basename, dirname, resolve } from 'node:path'
import type { UnitsApart } from '../analyze.js'
import type { Results } from '../results.js'
import type { StudyFile } from './inputs.js'
import { type Drawable, type Job, writeDrawn } from './job.js'
import { machineFacts, runLog } from './machine.js'
import { type HashedFile, type Manifest, manifestFile } from './pack.js'
import type { WriteFile } from './resultsFolder.js'
import { plainJson } from './resultsJson.js'
import { tableCsv } from './tableCsv.js'

export interface PackParts {
  readonly from: StudyFile
  readonly job: Job
  /** Absent: no units leave. */
  readonly apart?: UnitsApart
  readonly inputs: Manifest['inputs']
  /** Whether the inputs are copied. */
  readonly hasInputs: boolean
}

export async function writePack(write: WriteFile, { from, job, apart, inputs, hasInputs }: PackParts): Promise<void> {
  const { results, units: _, ...drawn } = job.analysis
  const files: HashedFile[] = []
  const put: WriteFile = async (file, content) => {
    const hash = createHash('sha256')
    await write(file, hashing(content, hash))
    files.push({ file, sha256: hash.digest('hex') })
  }
  const study = `inputs/${basename(from.file)}`
  await put(study, [readFileSync(from.file)])
  if (hasInputs) for (const { file } of inputs) await put(`inputs/${file}`, bytesOf(resolve(dirname(from.file), file)))
  const beginnings = await writeResults(put, from, { results, ...drawn })
  await put('drawn.json', [plainJson(drawn)])
  if (apart) await writeUnitsApart(put, apart)
  const { exhibitsOf, replicationReadme, summaryLines } = await import('../report/index.js')
  const machine = machineFacts()
  const columns = apart && [...apart.table.columns.keys()]
  const { xUnit } = drawn.exhibits
  const facts = { results, study, inputs, hasInputs, exhibits: exhibitsOf(beginnings), machine }
  const units = apart && columns && { ...apart, rows: apart.table.rows, columns, xUnit }
  await put('README.md', [replicationReadme(units ? { ...facts, units } : facts)])
  await put('log.txt', [runLog(results, machine, summaryLines(results, 'results'))])
  const manifest = manifestOf(results, { node: machine.node, study, inputs, apart, files })
  await write(manifestFile, [`${JSON.stringify(manifest, null, 2)}\n`])
}

/** Returns the first characters of every text, in which its title stands. */
async function writeResults(put: WriteFile, from: StudyFile, drawable: Drawable): Promise<Map<string, string>> {
  const beginnings = new Map<string, string>()
  const write: WriteFile = async (file, content) => {
    const parts = [...content]
    beginnings.set(file, typeof parts[0] === 'string' ? parts[0].slice(0, 2000) : '')
    await put(`results/${file}`, parts)
  }
  await writeDrawn(write, from, drawable)
  return beginnings
}

type ManifestParts = Pick<Manifest, 'node' | 'study' | 'inputs' | 'files'> & { readonly apart?: UnitsApart }

function manifestOf({ title, version, seed, started, seconds }: Results, parts: ManifestParts): Manifest {
  const { node, study, inputs, apart, files } = parts
  const units = apart && {
    ...(apart.lines ? { lines: apart.lines } : {}),
    left_out: apart.leftOut,
    altered: apart.isAltered,
  }
  return {
    format: 'scarp-replication/1',
    title,
    version,
    node,
    seed,
    started,
    seconds,
    study,
    inputs,
    ...(units ? { units } : {}),
    files,
  }
}

async function writeUnitsApart(put: WriteFile, { study, table, beside }: UnitsApart): Promise<void> {
  const { resolvedStudy } = await import('../study/index.js')
  await put('units/study.yaml', [resolvedStudy(study)])
  for (const one of [table, ...beside]) await put(`units/${one.file}`, tableCsv(one))
}

function* hashing(
  parts: Iterable<string | Uint8Array>,
  hash: { update(part: string | Uint8Array): unknown },
): Generator<string | Uint8Array> {
  for (const part of parts) {
    hash.update(part)
    yield part
  }
}

function* bytesOf(path: string): Generator<Uint8Array> {
  const descriptor = openSync(path, 'r')
  try {
    for (;;) {
      const part = new Uint8Array(1 << 20)
      const length = readSync(descriptor, part)
      if (length === 0) return
      yield part.subarray(0, length)
    }
  } finally {
    closeSync(descriptor)
  }
}
