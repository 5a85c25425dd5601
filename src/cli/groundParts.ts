/** What goes between the program and the threads that measure: a border that all of them read, and parts of the units. */
import type { Measured, MeasuredBorder } from '../borders/index.js'

export interface WorkerStart {
  readonly border: MeasuredBorder
}

/** Units `first`, `first` + 1, and so on. */
export interface AskedPart {
  readonly first: number
  readonly lon: Float64Array
  readonly lat: Float64Array
}

export interface MeasuredPart {
  readonly first: number
  readonly measured: Measured
}

/** The memory of the answers, which moves with the message. */
export function answersOf(measured: Measured): ArrayBuffer[] {
  return Object.values(measured).map((values: Float64Array | Int32Array) => values.buffer as ArrayBuffer)
}

/** What of a border units are measured by, its arrays in memory that threads share. */
export function sharedBorder(border: MeasuredBorder): MeasuredBorder {
  const { names, outsideZone, doses, isEqualStatus, edges, tree, grid, pieceOfEdge } = border
  const { untreatedOfPiece, treatedOfPiece, positionMetres, lengthMetres } = border
  const own = { names, outsideZone, doses, isEqualStatus, edges, tree, grid, pieceOfEdge }
  return shared({ ...own, untreatedOfPiece, treatedOfPiece, positionMetres, lengthMetres }, new Map())
}

/** The same data with its typed arrays copied to shared memory; an array that is there twice is copied once. */
function shared<T>(value: T, copies: Map<unknown, unknown>): T {
  if (typeof value !== 'object' || value === null) return value
  const known = copies.get(value)
  if (known !== undefined) return known as T
  const copy = ArrayBuffer.isView(value)
    ? sharedArray(value as unknown as Float64Array)
    : Array.isArray(value)
      ? value.map((one) => shared(one, copies))
      : Object.fromEntries(Object.entries(value).map(([key, one]) => [key, shared(one, copies)]))
  copies.set(value, copy)
  return copy as T
}

function sharedArray(values: Float64Array): Float64Array {
  const kind = values.constructor as Float64ArrayConstructor
  const copy = new kind(new SharedArrayBuffer(values.byteLength))
  copy.set(values)
  return copy
}
