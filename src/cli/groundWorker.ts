/** A thread that measures parts of the units against one border. Started by `inWorkers`; parts come as messages. */
import { parentPort, workerData } from 'node:worker_threads'
// the file, not the room's door: a thread need not load the reading of zones
import { putMeasured, unitMeasurer } from '../borders/measured.js'
import type { AskedPart, WorkerStart } from './groundParts.js'

const port = parentPort
if (!port) throw new Error('this file is the start of a worker thread')
const { border, answers } = workerData as WorkerStart
const measure = unitMeasurer(border)
port.on('message', ({ first, lon, lat }: AskedPart) => {
  putMeasured(answers, first, measure(lon, lat))
  port.postMessage(lon.length)
})
