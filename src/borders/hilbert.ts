/**
 * Order along a Hilbert curve: neighbours in the order are neighbours in the plane.
 * Source: Hilbert (1891); bits interleaved after Rawrunprotected, "2D Hilbert curves in O(1)" (public domain), from memory.
 */

/** Place along the curve, 0 to 2^32 - 1, of a cell of the 65536 x 65536 grid; x and y are integers 0 to 65535. */
export function hilbertKey(x: number, y: number): number {
  let a = x ^ y
  let b = 0xffff ^ a
  let c = 0xffff ^ (x | y)
  let d = x & (y ^ 0xffff)
  let A = a | (b >> 1)
  let B = (a >> 1) ^ a
  let C = (c >> 1) ^ (b & (d >> 1)) ^ c
  let D = (a & (c >> 1)) ^ (d >> 1) ^ d
  for (let shift = 2; shift <= 4; shift *= 2) {
    a = A
    b = B
    c = C
    d = D
    A = (a & (a >> shift)) ^ (b & (b >> shift))
    B = (a & (b >> shift)) ^ (b & ((a ^ b) >> shift))
    C ^= (a & (c >> shift)) ^ (b & (d >> shift))
    D ^= (b & (c >> shift)) ^ ((a ^ b) & (d >> shift))
  }
  a = A
  b = B
  c = C
  d = D
  C ^= (a & (c >> 8)) ^ (b & (d >> 8))
  D ^= (b & (c >> 8)) ^ ((a ^ b) & (d >> 8))
  a = C ^ (C >> 1)
  b = D ^ (D >> 1)
  return ((spread(b | (0xffff ^ ((x ^ y) | a))) << 1) | spread(x ^ y)) >>> 0
}

/** Puts the 16 low bits of v on the even bits. */
function spread(v: number): number {
  v = (v | (v << 8)) & 0x00ff00ff
  v = (v | (v << 4)) & 0x0f0f0f0f
  v = (v | (v << 2)) & 0x33333333
  return (v | (v << 1)) & 0x55555555
}

/** Indices 0 to keys.length - 1 in ascending order of their key; equal keys stay in their order. Radix sort, linear. */
export function sortedByKey(keys: Uint32Array): Uint32Array {
  const count = keys.length
  let from = new Uint32Array(count)
  let to = new Uint32Array(count)
  for (let i = 0; i < count; i++) from[i] = i
  const starts = new Uint32Array(2049)
  for (let shift = 0; shift < 33; shift += 11) {
    starts.fill(0)
    for (let i = 0; i < count; i++) starts[((keys[i] >>> shift) & 2047) + 1]++
    for (let digit = 0; digit < 2048; digit++) starts[digit + 1] += starts[digit]
    for (let i = 0; i < count; i++) {
      const index = from[i]
      to[starts[(keys[index] >>> shift) & 2047]++] = index
    }
    const swap = from
    from = to
    to = swap
  }
  return from
}

/**
 * Order of the points (x, y) along a Hilbert curve over their bounding box.
 * x, y: equal length, any unit. Points with NaN come first.
 */
export function hilbertOrder(x: Float64Array, y: Float64Array): Uint32Array {
  const count = x.length
  let minX = Infinity
  let minY = Infinity
  let maxX = -Infinity
  let maxY = -Infinity
  for (let i = 0; i < count; i++) {
    if (x[i] < minX) minX = x[i]
    if (x[i] > maxX) maxX = x[i]
    if (y[i] < minY) minY = y[i]
    if (y[i] > maxY) maxY = y[i]
  }
  const scaleX = maxX > minX ? 65535 / (maxX - minX) : 0
  const scaleY = maxY > minY ? 65535 / (maxY - minY) : 0
  const keys = new Uint32Array(count)
  for (let i = 0; i < count; i++) {
    const px = (x[i] - minX) * scaleX
    const py = (y[i] - minY) * scaleY
    if (px >= 0 && py >= 0) keys[i] = hilbertKey(px | 0, py | 0)
  }
  return sortedByKey(keys)
}
