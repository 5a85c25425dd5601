/** A thread that measures parts of the units against one border. Started by `inWorkers`; parts come and go as messages. */
import { parentPort, workerData } from 'node:worker_threads'
// the file, not the room's door: a thread need not load the reading of zones
import { unitMeasurer } from '../borders/measured.js'
import { type AskedPart, answersOf, type MeasuredPart, type WorkerStart } from './groundParts.js'

const port = parentPort
if (!port) throw new Error('this file is the start of a worker thread')
const measure = unitMeasurer((workerData as WorkerStart).border)
port.on('message', ({ first, lon, lat }: AskedPart) => {
  const measured = measure(lon, lat)
  const part: MeasuredPart = { first, measured }
  port.postMessage(part, answersOf(measured))
})
