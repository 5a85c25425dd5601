import { type DuckDBConnection, DuckDBDataChunk, VARCHAR } from '@duckdb/node-api'
import { eachChunk, type TextFile } from './bytes.js'

const ROWS_PER_CHUNK = 2048
const [QUOTE, BACKSLASH] = [34, 92]
const [OPEN_ARRAY, CLOSE_ARRAY, OPEN_OBJECT, CLOSE_OBJECT] = [91, 93, 123, 125]
/** Objects within an array within the top object. */
const FEATURE_DEPTH = 2
/** Begins the text that stands for an object in the frame. */
const MARK = '\u0001'

/** A JSON text without the objects in its arrays. */
export interface Frame {
  /** The text; each object is replaced by a string that `objectNumber` knows. */
  readonly text: string
  readonly objects: number
}

/**
 * Cuts the objects out of the arrays of a top object (the features of a collection), and puts their texts, as written,
 * into a new table `features (json VARCHAR)`, in order. DuckDB would hold the whole file as one value, again for each query.
 */
export async function loadFeatures(connection: DuckDBConnection, file: TextFile): Promise<Frame> {
  await connection.run('CREATE TABLE features (json VARCHAR)')
  const appender = await connection.createAppender('features')
  let waiting: string[] = []
  let objects = 0
  const flush = () => {
    if (waiting.length === 0) return
    const chunk = DuckDBDataChunk.create([VARCHAR], waiting.length)
    chunk.setColumnValues(0, waiting)
    appender.appendDataChunk(chunk)
    waiting = []
  }
  const text = await cutObjects(file, (object) => {
    waiting.push(object)
    if (waiting.length === ROWS_PER_CHUNK) flush()
    return JSON.stringify(`${MARK}${objects++}`)
  })
  flush()
  appender.closeSync()
  return { text, objects }
}

/** Which object a value of the parsed frame stands for; undefined where it stands for itself. */
export function objectNumber(value: unknown): number | undefined {
  return typeof value === 'string' && value.startsWith(MARK) ? Number(value.slice(MARK.length)) : undefined
}

/** The text with each object at the depth of features replaced by what `replace` makes of it. */
async function cutObjects(file: TextFile, replace: (object: string) => string): Promise<string> {
  const frame: string[] = []
  let parts: Buffer[] = []
  let depth = 0
  let [isText, isEscaped] = [false, false]
  await eachChunk(file, (chunk) => {
    let start = 0
    const take = (end: number) => {
      const bytes =
        parts.length > 0 ? Buffer.concat([...parts, chunk.subarray(start, end)]) : chunk.subarray(start, end)
      parts = []
      start = end
      return bytes.toString('utf8')
    }
    for (let i = 0; i < chunk.length; i++) {
      const byte = chunk[i]
      if (isText) {
        if (isEscaped) isEscaped = false
        else if (byte === BACKSLASH) isEscaped = true
        else if (byte === QUOTE) isText = false
      } else if (byte === QUOTE) isText = true
      else if (byte === OPEN_OBJECT || byte === OPEN_ARRAY) {
        if (byte === OPEN_OBJECT && depth === FEATURE_DEPTH) frame.push(take(i))
        depth++
      } else if (byte === CLOSE_OBJECT || byte === CLOSE_ARRAY) {
        depth--
        if (byte === CLOSE_OBJECT && depth === FEATURE_DEPTH) frame.push(replace(take(i + 1)))
      }
    }
    if (start < chunk.length) parts.push(Buffer.from(chunk.subarray(start)))
  })
  frame.push(Buffer.concat(parts).toString('utf8'))
  return frame.join('').replace(/^\ufeff/, '')
}
