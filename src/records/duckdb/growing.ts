/** Typed arrays that grow by doubling, for results whose length is not known before the end. */

export function withRoom(values: Float64Array, length: number): Float64Array
export function withRoom(values: Int32Array, length: number): Int32Array
export function withRoom(values: Uint32Array, length: number): Uint32Array
export function withRoom<T extends Float64Array | Int32Array | Uint32Array>(values: T, length: number): T {
  if (length <= values.length) return values
  const wider = new (values.constructor as new (length: number) => T)(Math.max(length, values.length * 2))
  wider.set(values)
  return wider
}

/** The first `length` elements in memory of their own; the same array where it is full. */
export function trimmed<T extends Float64Array | Int32Array>(values: T, length: number): T {
  return length === values.length ? values : (values.slice(0, length) as T)
}
