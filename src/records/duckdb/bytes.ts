import { isUtf8 } from 'node:buffer'
import { createHash } from 'node:crypto'
import { createReadStream } from 'node:fs'
import { open } from 'node:fs/promises'
import { pipeline } from 'node:stream/promises'
import { createGunzip } from 'node:zlib'

const CHUNK_BYTES = 1 << 20
const NEWLINE = 10
const RETURN = 13

/** A file that holds text, compressed or not. */
export interface TextFile {
  readonly path: string
  readonly isGzip: boolean
}

/** What one pass over a text file's bytes tells. */
export interface Survey {
  /** SHA-256 of the file's own bytes, before decompression. */
  readonly sha256: string
  /** Lines of text; the last needs no newline at its end. */
  readonly lines: number
  /** How often the delimiter occurs, in quotes too. */
  readonly delimiters: number
  /** First line with bytes that aren't UTF-8. */
  readonly notUtf8Line?: number
}

/** Gives the text's bytes to `visit`, chunk by chunk; returns SHA-256 of the file's own bytes. Throws where the file can't be read. */
export async function eachChunk(file: TextFile, visit: (chunk: Buffer) => void): Promise<string> {
  const hash = createHash('sha256')
  const source = createReadStream(file.path, { highWaterMark: CHUNK_BYTES })
  source.on('data', (chunk) => hash.update(chunk))
  if (!file.isGzip) {
    for await (const chunk of source) visit(chunk as Buffer)
  } else {
    await pipeline(source, createGunzip({ chunkSize: CHUNK_BYTES }), async (chunks) => {
      for await (const chunk of chunks) visit(chunk as Buffer)
    })
  }
  return hash.digest('hex')
}

/** The first bytes of the text, at most `length`. */
export async function headOf(file: TextFile, length: number): Promise<Buffer> {
  if (!file.isGzip) {
    const handle = await open(file.path)
    try {
      const { buffer, bytesRead } = await handle.read(Buffer.alloc(length), 0, length, 0)
      return buffer.subarray(0, bytesRead)
    } finally {
      await handle.close()
    }
  }
  const parts: Buffer[] = []
  let have = 0
  const source = createReadStream(file.path)
  const text = createGunzip()
  source.on('error', (error) => text.destroy(error))
  for await (const chunk of source.pipe(text)) {
    parts.push(chunk as Buffer)
    have += (chunk as Buffer).length
    if (have >= length) break
  }
  source.destroy()
  return Buffer.concat(parts).subarray(0, length)
}

/** One pass over the whole text. delimiter: a byte, or absent where delimiters aren't counted. */
export async function survey(file: TextFile, delimiter?: number): Promise<Survey> {
  let newlines = 0
  let delimiters = 0
  let last = NEWLINE
  let notUtf8Line: number | undefined
  let unfinished: Buffer = Buffer.alloc(0)
  const sha256 = await eachChunk(file, (chunk) => {
    if (notUtf8Line === undefined) {
      const text = unfinished.length > 0 ? Buffer.concat([unfinished, chunk]) : chunk
      const whole = text.length - unfinishedBytes(text)
      if (!isUtf8(text.subarray(0, whole))) notUtf8Line = newlines + badLine(text.subarray(0, whole))
      unfinished = Buffer.from(text.subarray(whole))
    }
    newlines += occurrences(chunk, NEWLINE)
    if (delimiter !== undefined) delimiters += occurrences(chunk, delimiter)
    last = chunk[chunk.length - 1]
  })
  if (notUtf8Line === undefined && unfinished.length > 0) notUtf8Line = newlines + 1
  return { sha256, lines: newlines + (last === NEWLINE ? 0 : 1), delimiters, notUtf8Line }
}

/** Bytes at the end that begin a character which goes on in the next chunk. */
function unfinishedBytes(text: Buffer): number {
  for (let back = 1; back <= Math.min(3, text.length); back++) {
    const byte = text[text.length - back]
    if (byte < 0x80) return 0
    if (byte >= 0xc0) return back < (byte >= 0xf0 ? 4 : byte >= 0xe0 ? 3 : 2) ? back : 0
  }
  return 0
}

/** Line, from 1, of the first bytes that aren't UTF-8. */
function badLine(text: Buffer): number {
  let line = 1
  let start = 0
  for (;;) {
    const end = text.indexOf(NEWLINE, start)
    if (end === -1 || !isUtf8(text.subarray(start, end))) return line
    start = end + 1
    line++
  }
}

/**
 * How often a byte occurs, four bytes at a time: a zero byte of t = word xor pattern sets the top bit of its place.
 * The four places are counted apart, and added up before one can run over.
 */
function occurrences(chunk: Buffer, byte: number): number {
  const lead = Math.min((4 - (chunk.byteOffset & 3)) & 3, chunk.length)
  const words = new Int32Array(chunk.buffer, chunk.byteOffset + lead, (chunk.length - lead) >> 2)
  const pattern = Math.imul(byte, 0x01010101)
  let count = 0
  for (let first = 0; first < words.length; first += 255) {
    const last = Math.min(first + 255, words.length)
    let places = 0
    for (let i = first; i < last; i++) {
      const t = words[i] ^ pattern
      places = (places + (~(((t & 0x7f7f7f7f) + 0x7f7f7f7f) | t | 0x7f7f7f7f) >>> 7)) | 0
    }
    count += (places & 0xff) + ((places >>> 8) & 0xff) + ((places >>> 16) & 0xff) + (places >>> 24)
  }
  for (let i = 0; i < lead; i++) if (chunk[i] === byte) count++
  for (let i = lead + 4 * words.length; i < chunk.length; i++) if (chunk[i] === byte) count++
  return count
}

/** The lines of a text that say something, with their numbers from 1. */
export async function eachLine(file: TextFile, visit: (text: string, line: number) => void): Promise<void> {
  let line = 0
  let rest: Buffer = Buffer.alloc(0)
  const say = (bytes: Buffer) => {
    line++
    const end = bytes[bytes.length - 1] === RETURN ? bytes.length - 1 : bytes.length
    const text = bytes.toString('utf8', 0, end)
    if (text.trim() !== '') visit(text, line)
  }
  await eachChunk(file, (chunk) => {
    let start = 0
    for (let end = chunk.indexOf(NEWLINE); end !== -1; end = chunk.indexOf(NEWLINE, start)) {
      say(rest.length > 0 ? Buffer.concat([rest, chunk.subarray(start, end)]) : chunk.subarray(start, end))
      rest = Buffer.alloc(0)
      start = end + 1
    }
    rest = Buffer.concat([rest, chunk.subarray(start)])
  })
  if (rest.length > 0) say(rest)
}
