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

/**
 * The first `length` elements, without a copy: room beyond them was never written to, and large arrays take memory from
 * the system only where they are.
 */
export function trimmed<T extends Float64Array | Int32Array>(values: T, length: number): T {
  return length === values.length ? values : (values.subarray(0, length) as T)
}
