/** Bytes of text in a key of four words, after the word that holds its length. */
const KEY_BYTES = 12
/** Below this many labels the language's own sort is as quick. */
const FEW = 20_000
/** Buckets of one sorting pass: few enough to stay near the processor. */
const MOST_BUCKETS = 1 << 12
/** Labels cut from one string at a time. */
const BLOCK = 1_000_000

export interface RankedLabels {
  /** Distinct, by code unit. */
  readonly labels: readonly string[]
  /** The label of each entry. */
  readonly rank: Int32Array
}

/**
 * Sorts entries and drops the repeated ones. keys: four words an entry, the length in bytes and up to 12 bytes of text
 * padded with zeros; longTexts: the texts of entries that are longer.
 */
export function rankLabels(keys: Uint32Array, longTexts: ReadonlyMap<number, string>): RankedLabels {
  const count = keys.length / 4
  const bytes = Buffer.from(keys.buffer, keys.byteOffset, keys.byteLength)
  const symbols = longTexts.size === 0 && count > FEW ? symbolsOf(bytes, count) : undefined
  if (symbols !== undefined) return rankShort(bytes, count, symbols)
  const texts = Array.from({ length: count }, (_, entry) => {
    const start = 16 * entry + 4
    return longTexts.get(entry) ?? bytes.toString('utf8', start, start + keys[4 * entry])
  })
  const labels = [...new Set(texts)].sort()
  const ranks = new Map(labels.map((label, i) => [label, i]))
  return { labels, rank: Int32Array.from(texts, (text) => ranks.get(text)!) }
}

/**
 * For each byte of the text, the values that occur there, numbered from 0 in order (256 numbers a byte; the padding is
 * 0), and how many there are. Undefined where bytes don't sort as code units do: beyond ASCII, and with NUL in a text.
 */
function symbolsOf(bytes: Buffer, count: number): { number: Int32Array; sizes: number[] } | undefined {
  const occurs = new Uint8Array(256 * KEY_BYTES)
  for (let entry = 0; entry < count; entry++) {
    const start = 16 * entry + 4
    const length = bytes[start - 4]
    for (let i = 0; i < length; i++) {
      const byte = bytes[start + i]
      if (byte === 0 || byte >= 0x80) return undefined
      occurs[256 * i + byte] = 1
    }
  }
  const number = new Int32Array(256 * KEY_BYTES)
  const sizes = Array.from({ length: KEY_BYTES }, (_, i) => {
    let size = 1
    for (let byte = 1; byte < 0x80; byte++) if (occurs[256 * i + byte] === 1) number[256 * i + byte] = size++
    return size
  })
  return { number, sizes }
}

/** Least significant digit first; a digit is as many bytes of the text as fit the buckets. */
function rankShort(bytes: Buffer, count: number, symbols: { number: Int32Array; sizes: number[] }): RankedLabels {
  let order = Int32Array.from({ length: count }, (_, entry) => entry)
  let next = new Int32Array(count)
  const digits: Uint16Array[] = []
  for (let end = KEY_BYTES; end > 0; ) {
    let start = end - 1
    let buckets = symbols.sizes[start]
    while (start > 0 && buckets * symbols.sizes[start - 1] <= MOST_BUCKETS) buckets *= symbols.sizes[--start]
    if (buckets > 1) {
      const digit = digitOf(bytes, count, symbols, start, end)
      sortInto(next, order, digit, buckets)
      ;[order, next] = [next, order]
      digits.push(digit)
    }
    end = start
  }
  const isNew = new Uint8Array(count)
  isNew[0] = 1
  for (const digit of digits) for (let i = 1; i < count; i++) if (digit[order[i]] !== digit[order[i - 1]]) isNew[i] = 1
  const rank = next
  const firsts = new Int32Array(count)
  let distinct = 0
  for (let i = 0; i < count; i++) {
    if (isNew[i] === 1) firsts[distinct++] = order[i]
    rank[order[i]] = distinct - 1
  }
  return { labels: asciiTexts(bytes, firsts.subarray(0, distinct)), rank }
}

/** Bytes start to end of each text as one number. */
function digitOf(
  bytes: Buffer,
  count: number,
  { number, sizes }: { number: Int32Array; sizes: number[] },
  start: number,
  end: number,
): Uint16Array {
  const digit = new Uint16Array(count)
  for (let i = start; i < end; i++) {
    const size = sizes[i]
    if (size === 1) continue
    const from = 4 + i
    const base = 256 * i
    for (let entry = 0; entry < count; entry++)
      digit[entry] = digit[entry] * size + number[base + bytes[16 * entry + from]]
  }
  return digit
}

/** Entries of `order` by their digit, those of equal digit as they were. */
function sortInto(sorted: Int32Array, order: Int32Array, digit: Uint16Array, buckets: number): void {
  const starts = new Int32Array(buckets + 1)
  for (let entry = 0; entry < digit.length; entry++) starts[digit[entry] + 1]++
  for (let bucket = 0; bucket < buckets; bucket++) starts[bucket + 1] += starts[bucket]
  for (let i = 0; i < order.length; i++) sorted[starts[digit[order[i]]]++] = order[i]
}

/** One long string first and slices of it after: many times quicker than a string at a time. */
function asciiTexts(bytes: Buffer, entries: Int32Array): string[] {
  const labels = new Array<string>(entries.length)
  const packed = Buffer.allocUnsafe(KEY_BYTES * Math.min(BLOCK, entries.length))
  for (let first = 0; first < entries.length; first += BLOCK) {
    const last = Math.min(first + BLOCK, entries.length)
    let size = 0
    for (let i = first; i < last; i++) {
      const start = 16 * entries[i] + 4
      const end = start + bytes[start - 4]
      for (let k = start; k < end; k++) packed[size++] = bytes[k]
    }
    const text = packed.toString('latin1', 0, size)
    let start = 0
    for (let i = first; i < last; i++) {
      const end = start + bytes[16 * entries[i]]
      labels[i] = text.substring(start, end)
      start = end
    }
  }
  return labels
}
