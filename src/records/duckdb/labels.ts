import { trimmed, withRoom } from './growing.js'

/** Texts up to this many bytes are held whole in four words (`textWordsOf`). */
const SHORT_BYTES = 12
/** Below this many labels the language's own sort is as quick. */
const FEW = 20_000
/** From this size on a table of slots grows more sparingly. */
const MANY = 1 << 22

/** A row that the condition keeps. */
export const KEPT = 1

export interface LabelCoder {
  /**
   * Codes the next `count` rows. words: four a row, as `textWordsOf`; hashes: two a row, of the same texts;
   * textAt gives the text of a row, and is called once for each long text. Empty texts are missing (-1).
   * verdicts: rows that are not KEPT are passed over.
   */
  add(words: Uint32Array, hashes: Uint32Array, count: number, verdicts: Uint8Array | undefined, textAt: TextAt): void
  finish(): { readonly codes: Int32Array; readonly labels: readonly string[] }
}

type TextAt = (row: number) => string

/**
 * Codes texts as they stream by, without making a string for every row: a hash table keyed by four words, which are
 * the whole text up to 12 bytes, and length, first 4 bytes and a 64-bit hash for longer ones.
 */
export function labelCoder(rowsExpected: number): LabelCoder {
  let codes: Int32Array = new Int32Array(Math.max(rowsExpected, 1024))
  let rows = 0
  let keys: Uint32Array = new Uint32Array(4 * 256)
  let slots: Int32Array = new Int32Array(1024)
  let distinct = 0
  const longTexts = new Map<number, string>()

  /** The entry of a key; a new one is added at the end. */
  function entryOf(w0: number, w1: number, w2: number, w3: number): number {
    const mask = slots.length - 1
    let slot = mix(w0, w1, w2, w3) & mask
    for (let entry = slots[slot]; entry !== 0; entry = slots[slot]) {
      const k = 4 * (entry - 1)
      if (keys[k] === w0 && keys[k + 1] === w1 && keys[k + 2] === w2 && keys[k + 3] === w3) return entry - 1
      slot = (slot + 1) & mask
    }
    const k = 4 * distinct
    if (k === keys.length) keys = withRoom(keys, k + 4)
    keys[k] = w0
    keys[k + 1] = w1
    keys[k + 2] = w2
    keys[k + 3] = w3
    slots[slot] = ++distinct
    if (distinct * 2 > slots.length) slots = rehashed(keys, distinct, slots.length * (slots.length < MANY ? 4 : 2))
    return distinct - 1
  }

  return {
    add(words, hashes, count, verdicts, textAt) {
      codes = withRoom(codes, rows + count)
      for (let i = 0; i < count; i++) {
        if (verdicts !== undefined && verdicts[i] !== KEPT) continue
        const at = 4 * i
        const length = words[at]
        if (length === 0) {
          codes[rows++] = -1
          continue
        }
        const isShort = length <= SHORT_BYTES
        const before = distinct
        const entry = isShort
          ? entryOf(length, words[at + 1], words[at + 2], words[at + 3])
          : entryOf(length, words[at + 1], hashes[2 * i], hashes[2 * i + 1])
        if (entry === before && !isShort) longTexts.set(entry, textAt(i))
        codes[rows++] = entry
      }
    },
    finish() {
      slots = new Int32Array(0)
      const { labels, order } = sortedLabels(keys.subarray(0, 4 * distinct), longTexts)
      const rank = new Int32Array(distinct)
      for (let i = 0; i < distinct; i++) rank[order[i]] = i
      const ranked = trimmed(codes, rows)
      codes = ranked
      for (let i = 0; i < rows; i++) if (ranked[i] >= 0) ranked[i] = rank[ranked[i]]
      return { codes: ranked, labels }
    },
  }
}

function mix(a: number, b: number, c: number, d: number): number {
  let h = Math.imul(a ^ 0x9e3779b9, 0x85ebca6b)
  h = Math.imul(h ^ (h >>> 15) ^ b, 0xc2b2ae35)
  h = Math.imul(h ^ (h >>> 13) ^ c, 0x27d4eb2f)
  h = Math.imul(h ^ (h >>> 16) ^ d, 0x165667b1)
  return (h ^ (h >>> 15)) >>> 0
}

function rehashed(keys: Uint32Array, distinct: number, size: number): Int32Array {
  const slots = new Int32Array(size)
  const mask = size - 1
  for (let entry = 0; entry < distinct; entry++) {
    const k = 4 * entry
    let slot = mix(keys[k], keys[k + 1], keys[k + 2], keys[k + 3]) & mask
    while (slots[slot] !== 0) slot = (slot + 1) & mask
    slots[slot] = entry + 1
  }
  return slots
}

/** Labels by code unit; order[i] is the entry of label i. */
function sortedLabels(keys: Uint32Array, longTexts: ReadonlyMap<number, string>) {
  const count = keys.length / 4
  const bytes = Buffer.from(keys.buffer, keys.byteOffset, keys.byteLength)
  const isAscii = longTexts.size === 0 && isAllAscii(keys)
  if (isAscii && count > FEW) {
    const order = byteOrder(bytes, count)
    return { labels: asciiTexts(bytes, order), order }
  }
  const texts = Array.from({ length: count }, (_, entry) => {
    const start = 16 * entry + 4
    return longTexts.get(entry) ?? bytes.toString('utf8', start, start + keys[4 * entry])
  })
  const order = Int32Array.from({ length: count }, (_, entry) => entry)
  order.sort((a, b) => (texts[a] < texts[b] ? -1 : texts[a] > texts[b] ? 1 : 0))
  return { labels: Array.from(order, (entry) => texts[entry]), order }
}

function isAllAscii(keys: Uint32Array): boolean {
  for (let k = 0; k < keys.length; k += 4)
    if (((keys[k + 1] | keys[k + 2] | keys[k + 3]) & 0x80808080) !== 0) return false
  return true
}

/**
 * Least significant digit first, two bytes a digit: the length (it only settles texts that end in NUL), then the bytes
 * from the last.
 */
function byteOrder(bytes: Buffer, count: number): Int32Array {
  let order = Int32Array.from({ length: count }, (_, entry) => entry)
  let next = new Int32Array(count)
  const digitOf = (entry: number, start: number) => (bytes[16 * entry + start] << 8) | bytes[16 * entry + start + 1]
  for (const start of [0, 14, 12, 10, 8, 6, 4]) {
    const starts = new Int32Array((1 << 16) + 1)
    for (let entry = 0; entry < count; entry++) starts[digitOf(entry, start) + 1]++
    if (starts[digitOf(0, start) + 1] === count) continue
    for (let value = 0; value < 1 << 16; value++) starts[value + 1] += starts[value]
    for (let i = 0; i < count; i++) next[starts[digitOf(order[i], start)]++] = order[i]
    ;[order, next] = [next, order]
  }
  return order
}

/** One long string first and slices of it after: many times quicker than a string at a time. */
function asciiTexts(bytes: Buffer, order: Int32Array): string[] {
  const packed = Buffer.allocUnsafe(SHORT_BYTES * order.length)
  const ends = new Float64Array(order.length)
  let end = 0
  for (let i = 0; i < order.length; i++) {
    const start = 16 * order[i] + 4
    for (let k = start; k < start + bytes[start - 4]; k++) packed[end++] = bytes[k]
    ends[i] = end
  }
  const labels = new Array<string>(order.length)
  const block = 1_000_000
  for (let first = 0; first < order.length; first += block) {
    const last = Math.min(first + block, order.length)
    const offset = first === 0 ? 0 : ends[first - 1]
    const text = packed.toString('latin1', offset, ends[last - 1])
    for (let i = first; i < last; i++)
      labels[i] = text.substring((i === 0 ? 0 : ends[i - 1]) - offset, ends[i] - offset)
  }
  return labels
}
