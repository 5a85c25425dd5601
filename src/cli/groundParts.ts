/** What goes between the program and the threads that measure: a border that all of them read, and parts of the units. */
import type { Measured, MeasuredBorder } from '../borders/index.js'

export interface WorkerStart {
  readonly border: MeasuredBorder
  /** Where the answers of all units go, in memory that threads share. */
  readonly answers: Measured
}

/** Units `first`, `first` + 1, and so on. When they are measured, the thread says how many they were. */
export interface AskedPart {
  readonly first: number
  readonly lon: Float64Array
  readonly lat: Float64Array
}

/** Room for the answers of `units` units, in memory that threads share. */
export function sharedRoom(units: number): Measured {
  const integers = () => new Int32Array(new SharedArrayBuffer(4 * units))
  const numbers = () => new Float64Array(new SharedArrayBuffer(8 * units))
  return {
    zone: integers(),
    piece: integers(),
    distanceMetres: numbers(),
    footLon: numbers(),
    footLat: numbers(),
    positionMetres: numbers(),
  }
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
