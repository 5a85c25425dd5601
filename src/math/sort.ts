/**
 * Ascending orders of number columns. Ties keep their first order, −0 equals 0, infinities sort at the ends.
 * Work grows like n whatever the spread of the keys: the 64 bits of a double, made to order like a whole number, are
 * sorted eleven at a time from the last (least significant digit radix sort; Knuth, volume 3, section 5.2.5).
 */

const digitBits = 11
const digitMask = (1 << digitBits) - 1
const digitCount = 6

/** The order that sorts the keys: keys[order[0]] ≤ keys[order[1]] ≤ …. Throws RangeError where a key is NaN. */
export function argsort(keys: Float64Array): Uint32Array {
  const n = keys.length
  const order = new Uint32Array(n)
  let isSorted = true
  for (let i = 0; i < n; i++) {
    if (Number.isNaN(keys[i])) throw new RangeError(`key ${i} is not a number`)
    if (i > 0 && keys[i] < keys[i - 1]) isSorted = false
    order[i] = i
  }
  if (isSorted) return order
  if (n <= 40) {
    insertionSort(order, 0, n, keys)
    return order
  }
  return n <= 512 ? mergeSorted(order, keys) : radixSorted(order, keys)
}

/** The order by the first key, ties by the second, and so on; rows alike in every key keep their first order. */
export function argsortBy(keys: readonly Float64Array[]): Uint32Array {
  if (keys.length === 0) throw new RangeError('sorting needs at least one key')
  for (const key of keys) {
    if (key.length !== keys[0].length) throw new RangeError(`keys have ${keys[0].length} and ${key.length} rows`)
    if (key.some(Number.isNaN)) throw new RangeError('a key is not a number')
  }
  const order = argsort(keys[0])
  orderTies(order, 0, order.length, keys, 0)
  return order
}

/** Puts each run of rows alike in keys[level], between start and end, in order by the keys after it. */
function orderTies(order: Uint32Array, start: number, end: number, keys: readonly Float64Array[], level: number): void {
  if (level + 1 >= keys.length) return
  const key = keys[level]
  const nextKey = keys[level + 1]
  let first = start
  for (let i = start + 1; i <= end; i++) {
    if (i < end && key[order[i]] === key[order[first]]) continue
    if (i - first > 1) {
      if (i - first <= 40) insertionSort(order, first, i, nextKey)
      else sortSlice(order, first, i, nextKey)
      orderTies(order, first, i, keys, level + 1)
    }
    first = i
  }
}

function sortSlice(order: Uint32Array, start: number, end: number, key: Float64Array): void {
  const rows = order.slice(start, end)
  const inner = argsort(Float64Array.from(rows, (row) => key[row]))
  for (let i = 0; i < inner.length; i++) order[start + i] = rows[inner[i]]
}

function insertionSort(order: Uint32Array, start: number, end: number, keys: Float64Array): void {
  for (let i = start + 1; i < end; i++) {
    const row = order[i]
    const key = keys[row]
    let j = i
    while (j > start && keys[order[j - 1]] > key) {
      order[j] = order[j - 1]
      j--
    }
    order[j] = row
  }
}

/** Bottom-up merge sort, for columns too short to repay the counting of digits. */
function mergeSorted(order: Uint32Array, keys: Float64Array): Uint32Array {
  const n = order.length
  for (let start = 0; start < n; start += 16) insertionSort(order, start, Math.min(n, start + 16), keys)
  let from: Uint32Array = order
  let to: Uint32Array = new Uint32Array(n)
  for (let width = 16; width < n; width *= 2) {
    for (let start = 0; start < n; start += 2 * width) {
      const middle = Math.min(n, start + width)
      const end = Math.min(n, middle + width)
      let left = start
      let right = middle
      for (let k = start; k < end; k++) {
        const takeLeft = left < middle && (right >= end || keys[from[left]] <= keys[from[right]])
        to[k] = takeLeft ? from[left++] : from[right++]
      }
    }
    const swap = from
    from = to
    to = swap
  }
  return from
}

function radixSorted(order: Uint32Array, keys: Float64Array): Uint32Array {
  const n = order.length
  let low = new Uint32Array(n)
  let high = new Uint32Array(n)
  orderedBits(keys, low, high)
  const counts = digitCounts(low, high)
  let from: Uint32Array = order
  let to: Uint32Array = new Uint32Array(n)
  let nextLow = new Uint32Array(n)
  let nextHigh = new Uint32Array(n)
  for (let digit = 0; digit < digitCount; digit++) {
    const start = counts.subarray(digit << digitBits, (digit + 1) << digitBits)
    if (start[digitOf(low[0], high[0], digit)] === n) continue
    let total = 0
    for (let value = 0; value <= digitMask; value++) {
      const count = start[value]
      start[value] = total
      total += count
    }
    for (let i = 0; i < n; i++) {
      const place = start[digitOf(low[i], high[i], digit)]++
      to[place] = from[i]
      nextLow[place] = low[i]
      nextHigh[place] = high[i]
    }
    ;[from, to] = [to, from]
    ;[low, nextLow] = [nextLow, low]
    ;[high, nextHigh] = [nextHigh, high]
  }
  return from
}

/** The bits of each key, flipped so that whole-number order is number order; −0 becomes 0. */
function orderedBits(keys: Float64Array, low: Uint32Array, high: Uint32Array): void {
  const one = new Float64Array(1)
  const words = new Uint32Array(one.buffer)
  one[0] = 1
  const highWord = words[1] === 0 ? 0 : 1
  for (let i = 0; i < keys.length; i++) {
    one[0] = keys[i] + 0
    const top = words[highWord]
    const flip = top >>> 31 === 1 ? 0xffffffff : 0
    low[i] = words[1 - highWord] ^ flip
    high[i] = top ^ (flip | 0x80000000)
  }
}

function digitCounts(low: Uint32Array, high: Uint32Array): Uint32Array {
  const counts = new Uint32Array(digitCount << digitBits)
  for (let i = 0; i < low.length; i++) {
    for (let digit = 0; digit < digitCount; digit++) {
      counts[(digit << digitBits) + digitOf(low[i], high[i], digit)]++
    }
  }
  return counts
}

/** The digit-th eleven bits of the 64, counted from the last; the sixth has nine. */
function digitOf(low: number, high: number, digit: number): number {
  switch (digit) {
    case 0:
      return low & digitMask
    case 1:
      return (low >>> 11) & digitMask
    case 2:
      return ((low >>> 22) | (high << 10)) & digitMask
    case 3:
      return (high >>> 1) & digitMask
    case 4:
      return (high >>> 12) & digitMask
    default:
      return high >>> 23
  }
}
