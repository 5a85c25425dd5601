import { trimmed, withRoom } from './growing.js'
import { rankLabels } from './labelOrder.js'

/** Texts up to this many bytes are held whole in four words (`textWordsOf`). */
const SHORT_BYTES = 12
/** After this many rows it is known whether a column is one of identifiers, with a new text in nearly every row. */
const ROWS_TO_JUDGE = 1 << 16
const IDENTIFIERS = 0.9
/** From this size on a table of slots grows more sparingly. */
const MANY_SLOTS = 1 << 22

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
 * the whole text up to 12 bytes, and length, first 4 bytes and a 64-bit hash for longer ones. Short identifiers are
 * only listed, for looking each up costs more than finding the few that repeat when they are sorted at the end.
 */
export function labelCoder(rowsExpected: number): LabelCoder {
  let codes: Int32Array = new Int32Array(Math.max(rowsExpected, 1024))
  let rows = 0
  let keys: Uint32Array = new Uint32Array(4 * 256)
  let slots: Int32Array = new Int32Array(1024)
  let entries = 0
  let hashed = 0
  let isListing = false
  const longTexts = new Map<number, string>()

  function newEntry(w0: number, w1: number, w2: number, w3: number): number {
    const k = 4 * entries
    if (k === keys.length) keys = withRoom(keys, k + 4)
    keys[k] = w0
    keys[k + 1] = w1
    keys[k + 2] = w2
    keys[k + 3] = w3
    return entries++
  }

  /** The entry of a key; a new one is added at the end. */
  function entryOf(w0: number, w1: number, w2: number, w3: number): number {
    const mask = slots.length - 1
    let slot = mix(w0, w1, w2, w3) & mask
    for (let entry = slots[slot]; entry !== 0; entry = slots[slot]) {
      const k = 4 * (entry - 1)
      if (keys[k] === w0 && keys[k + 1] === w1 && keys[k + 2] === w2 && keys[k + 3] === w3) return entry - 1
      slot = (slot + 1) & mask
    }
    const entry = newEntry(w0, w1, w2, w3)
    slots[slot] = entry + 1
    if (++hashed * 2 > slots.length) slots = widened(slots, keys)
    return entry
  }

  return {
    add(words, hashes, count, verdicts, textAt) {
      codes = withRoom(codes, rows + count)
      for (let i = 0; i < count; i++) {
        if (verdicts !== undefined && verdicts[i] !== KEPT) continue
        const at = 4 * i
        const length = words[at]
        if (length === 0) codes[rows++] = -1
        else if (length > SHORT_BYTES) {
          const before = entries
          const entry = entryOf(length, words[at + 1], hashes[2 * i], hashes[2 * i + 1])
          if (entry === before) longTexts.set(entry, textAt(i))
          codes[rows++] = entry
        } else if (isListing) codes[rows++] = newEntry(length, words[at + 1], words[at + 2], words[at + 3])
        else codes[rows++] = entryOf(length, words[at + 1], words[at + 2], words[at + 3])
      }
      isListing ||= rows >= ROWS_TO_JUDGE && entries > IDENTIFIERS * rows
    },
    finish() {
      slots = new Int32Array(0)
      const { labels, rank } = rankLabels(keys.subarray(0, 4 * entries), longTexts)
      codes = trimmed(codes, rows)
      for (let i = 0; i < rows; i++) if (codes[i] >= 0) codes[i] = rank[codes[i]]
      return { codes, labels }
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

/** The same entries in more slots. */
function widened(slots: Int32Array, keys: Uint32Array): Int32Array {
  const wider = new Int32Array(slots.length * (slots.length < MANY_SLOTS ? 4 : 2))
  const mask = wider.length - 1
  for (const entry of slots) {
    if (entry === 0) continue
    const k = 4 * (entry - 1)
    let slot = mix(keys[k], keys[k + 1], keys[k + 2], keys[k + 3]) & mask
    while (wider[slot] !== 0) slot = (slot + 1) & mask
    wider[slot] = entry
  }
  return wider
}
