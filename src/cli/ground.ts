/** Measures the units of a border study before the analysis, in several threads where that is quicker. */
import { availableParallelism } from 'node:os'
import { Worker } from 'node:worker_threads'
import type { AnalysisInputs, Progress } from '../analyze.js'
import type { Measured, MeasuredBorder } from '../borders/index.js'
import type { Checked } from '../problem.js'
import { numbersOf } from '../records/index.js'
import type { Study } from '../study/index.js'
import { type AskedPart, sharedBorder, sharedRoom, type WorkerStart } from './groundParts.js'

/** With fewer units a second thread takes longer to start than it saves. */
const fewestUnits = 200_000
const mostWorkers = 8
/** A part is no larger, and each thread has as many at least. */
const largestPart = 131_072
const partsEach = 4

export interface GroundOptions {
  /** Threads that measure; 1 is none beside the program's own. Absent: one for each core, where the units are many. */
  readonly workers?: number
  readonly progress?: Progress
}

/**
 * The inputs with the ground measured, where more than one thread measures it; else as they are, for the analysis to
 * measure. The answers are the same to the last bit. Problems are those that the analysis would find in the zones.
 */
export async function withGround(
  study: Study,
  inputs: AnalysisInputs,
  { workers, progress }: GroundOptions,
): Promise<Checked<AnalysisInputs>> {
  const { line } = study
  const { rows } = inputs.table
  const threads = Math.min(rows, workers ?? (rows < fewestUnits ? 1 : Math.min(mostWorkers, availableParallelism())))
  if (line.kind !== 'border' || threads < 2 || inputs.ground) return { ok: true, value: inputs }
  const { borderOf, positionColumns } = await import('../analyze.js')
  const border = borderOf(line, inputs)
  if (!border.ok) return border
  const ruler = sharedBorder(border.value)
  const [lon, lat] = positionColumns(study).map((name) => numbersOf(inputs.table, name))
  const measured = await inWorkers(ruler, lon, lat, threads, (done) => progress?.('placing', done, rows))
  return { ok: true, value: { ...inputs, ground: { border: { ...border.value, ...ruler }, measured } } }
}

/**
 * `measureUnits` in `threads` threads: the units are cut into parts, and each thread takes the next part when it has
 * done one. border: as `sharedBorder` gives it. A fault in a thread ends them all and is thrown here.
 */
export async function inWorkers(
  border: MeasuredBorder,
  lon: Float64Array,
  lat: Float64Array,
  threads: number,
  progress?: (done: number) => void,
): Promise<Measured> {
  const units = lon.length
  const partUnits = Math.max(1, Math.min(largestPart, Math.ceil(units / (partsEach * threads))))
  const answers = sharedRoom(units)
  let asked = 0
  let done = 0
  const workerData: WorkerStart = { border, answers }
  const workers = Array.from(
    { length: threads },
    () => new Worker(new URL('./groundWorker.js', import.meta.url), { workerData }),
  )
  const ask = (worker: Worker): void => {
    if (asked >= units) return
    const first = asked
    asked = Math.min(units, first + partUnits)
    const part: AskedPart = { first, lon: lon.slice(first, asked), lat: lat.slice(first, asked) }
    worker.postMessage(part, [part.lon.buffer as ArrayBuffer, part.lat.buffer as ArrayBuffer])
  }
  try {
    await new Promise<void>((finish, fail) => {
      for (const worker of workers) {
        worker.on('error', fail)
        worker.on('exit', (code) => fail(new Error(`a measuring thread ended by itself, with code ${code}`)))
        worker.on('message', (measured: number) => {
          done += measured
          progress?.(done)
          if (done === units) finish()
          else ask(worker)
        })
      }
      // two parts each, so that no thread waits for its next one
      for (let round = 0; round < 2; round++) for (const worker of workers) ask(worker)
      if (units === 0) finish()
    })
  } finally {
    await Promise.all(workers.map((worker) => worker.terminate()))
  }
  return answers
}
