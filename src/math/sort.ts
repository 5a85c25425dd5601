/**
 * Ascending orders of number columns. Ties keep their first order, −0 equals 0, infinities sort at the ends.
 * Work grows like n whatever the spread of the keys: the upper 32 bits of each double, made to order like a whole number,
 * are sorted eleven at a time from the last (radix sort; Knuth, The Art of Computer Programming, volume 3, section
 * 5.2.5); runs alike in those bits (one part in a million) are then put in order by the rest.
 */

const digits = [
  { shift: 0, size: 2048 },
  { shift: 11, size: 2048 },
  { shift: 22, size: 1024 },
]

/** Runs up to this length are sorted by insertion, up to `mergeLength` by merging, longer ones by digits. */
const insertionLength = 32
const mergeLength = 512

/** The order that sorts the keys: keys[order[0]] ≤ keys[order[1]] ≤ …. Throws RangeError where a key is NaN. */
export function argsort(keys: Float64Array): Uint32Array {
  const n = keys.length
  const order = new Uint32Array(n)
  for (let i = 0; i < n; i++) {
    if (Number.isNaN(keys[i])) throw new RangeError(`key ${i} is not a number`)
    order[i] = i
  }
  if (isAscending(order, 0, n, keys)) return order
  if (n <= insertionLength) {
    insertionSort(order, 0, n, keys)
    return order
  }
  return n <= mergeLength ? mergeSorted(order, keys) : radixSorted(order, keys)
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
      if (i - first <= insertionLength) insertionSort(order, first, i, nextKey)
      else sortSlice(order, first, i, nextKey)
      orderTies(order, first, i, keys, level + 1)
    }
    first = i
  }
}

function sortSlice(order: Uint32Array, start: number, end: number, key: Float64Array): void {
  const rows = order.slice(start, end)
  const values = new Float64Array(rows.length)
  for (let i = 0; i < rows.length; i++) values[i] = key[rows[i]]
  const inner = argsort(values)
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
  const sorted = sortByWord(order, orderedHighWords(keys))
  const high = sorted.word
  for (let first = 0; first < high.length; ) {
    let end = first + 1
    while (end < high.length && high[end] === high[first]) end++
    if (end - first > 1) sortAlikeHigh(sorted.order, first, end, keys)
    first = end
  }
  return sorted.order
}

/** Sorts order[start … end), whose keys share their upper 32 bits. */
function sortAlikeHigh(order: Uint32Array, start: number, end: number, keys: Float64Array): void {
  if (end - start <= insertionLength) {
    insertionSort(order, start, end, keys)
    return
  }
  if (isAscending(order, start, end, keys)) return
  const rows = order.slice(start, end)
  const words = new Uint32Array(keys.buffer, keys.byteOffset, 2 * keys.length)
  const flip = keys[rows[0]] < 0 ? 0xffffffff : 0
  const offset = 1 - highWord()
  const low = new Uint32Array(rows.length)
  for (let i = 0; i < rows.length; i++) low[i] = words[2 * rows[i] + offset] ^ flip
  order.set(sortByWord(rows, low).order, start)
}

function isAscending(order: Uint32Array, start: number, end: number, keys: Float64Array): boolean {
  for (let i = start + 1; i < end; i++) if (keys[order[i - 1]] > keys[order[i]]) return false
  return true
}

/** The order rearranged so that its words ascend, and the words so rearranged; digits that never vary cost no pass. */
function sortByWord(order: Uint32Array, word: Uint32Array): { order: Uint32Array; word: Uint32Array } {
  let from: { order: Uint32Array; word: Uint32Array } = { order, word }
  let to: typeof from = { order: new Uint32Array(order.length), word: new Uint32Array(order.length) }
  for (const { shift, size } of digits) {
    const start = digitStarts(from.word, shift, size)
    if (start === undefined) continue
    scatter(from.order, from.word, to.order, to.word, shift, size - 1, start)
    ;[from, to] = [to, from]
  }
  return from
}

/** Where each value of a digit begins in the sorted order; undefined where one value has every row. */
function digitStarts(word: Uint32Array, shift: number, size: number): Uint32Array | undefined {
  const start = new Uint32Array(size)
  for (let i = 0; i < word.length; i++) start[(word[i] >>> shift) & (size - 1)]++
  if (start[(word[0] >>> shift) & (size - 1)] === word.length) return undefined
  let total = 0
  for (let value = 0; value < size; value++) {
    const count = start[value]
    start[value] = total
    total += count
  }
  return start
}

function scatter(
  order: Uint32Array,
  word: Uint32Array,
  toOrder: Uint32Array,
  toWord: Uint32Array,
  shift: number,
  mask: number,
  start: Uint32Array,
): void {
  for (let i = 0; i < order.length; i++) {
    const bits = word[i]
    const place = start[(bits >>> shift) & mask]++
    toOrder[place] = order[i]
    toWord[place] = bits
  }
}

/** The upper 32 bits of each key, flipped so that whole-number order is number order; those of −0 are those of 0. */
function orderedHighWords(keys: Float64Array): Uint32Array {
  const words = new Uint32Array(keys.buffer, keys.byteOffset, 2 * keys.length)
  const high = new Uint32Array(keys.length)
  const offset = highWord()
  for (let i = 0; i < keys.length; i++) {
    const bits = keys[i] === 0 ? 0 : words[2 * i + offset]
    high[i] = bits ^ ((bits >> 31) | 0x80000000)
  }
  return high
}

/** Which of a double's two 32-bit words holds its sign: 1 on most machines. */
function highWord(): number {
  return new Uint32Array(new Float64Array([1]).buffer)[1] === 0 ? 0 : 1
}
