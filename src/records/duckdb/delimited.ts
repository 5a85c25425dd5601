import { eachChunk, type TextFile } from './bytes.js'

const NEWLINE = 10
const RETURN = 13
const SPACE = 32
const QUOTE = 34

/** Something that breaks the grid of rows and columns. */
export interface GridFault {
  readonly line: number
  readonly kind: 'ragged' | 'unterminated' | 'after-quote' | 'lone-return'
  /** Fields found, for ragged rows. */
  readonly fields?: number
}

export interface Grid {
  /** Physical line, from 1, on which each data row begins. */
  readonly lineOfRow: Int32Array
  readonly faults: readonly GridFault[]
  readonly faultCount: number
  /** First lines that end in CR LF and in LF alone; 0 where there are none. */
  readonly firstCrlfLine: number
  readonly firstLfLine: number
}

/** The first row of a delimited text; undefined where a quote in it stays open. */
export function firstRow(text: string, delimiter: string): readonly string[] | undefined {
  const fields: string[] = []
  let at = text.charCodeAt(0) === 0xfeff ? 1 : 0
  for (;;) {
    let field = ''
    const open = /^ *"/.exec(text.slice(at, at + 64))
    if (open !== null) {
      at += open[0].length
      for (;;) {
        const close = text.indexOf('"', at)
        if (close === -1) return undefined
        field += text.slice(at, close)
        at = close + 1
        if (text[at] !== '"') break
        field += '"'
        at++
      }
      while (text[at] === ' ') at++
    } else {
      const end = text.slice(at).search(delimiter === '\t' ? /[\t\r\n]/ : new RegExp(`[${delimiter}\\r\\n]`))
      field = text.slice(at, end === -1 ? undefined : at + end)
      at += field.length
    }
    fields.push(field)
    if (text[at] !== delimiter) return fields
    at++
  }
}

/** Where a byte stands within its row. */
const START = 0
const PLAIN = 1
const QUOTED = 2
const CLOSED = 3
/** After a fault: to the end of the line. */
const LOST = 4

/**
 * Walks every byte of a delimited text as RFC 4180 reads it: fields in quotes may hold delimiters and newlines, a doubled
 * quote is a quote. Blank lines are no rows, but where there is one column. At most `faultLimit` faults are listed.
 */
export async function walkGrid(file: TextFile, delimiter: number, columns: number, faultLimit: number): Promise<Grid> {
  const lines: number[] = []
  const faults: GridFault[] = []
  let faultCount = 0
  let [firstCrlfLine, firstLfLine] = [0, 0]
  let line = 1
  let [rowLine, quoteLine, fields, rowBytes] = [1, 1, 1, 0]
  let state = START
  let previous = 0
  let isFirst = true

  const fault = (found: GridFault) => {
    if (faultCount++ < faultLimit) faults.push(found)
  }
  const endRow = () => {
    const isBlank = rowBytes === 0 && columns > 1
    if (!isBlank) {
      if (state !== LOST && fields !== columns) fault({ line: rowLine, kind: 'ragged', fields })
      lines.push(rowLine)
    }
    fields = 1
    rowBytes = 0
    state = START
  }

  await eachChunk(file, (chunk) => {
    const hasMark = isFirst && chunk[0] === 0xef && chunk[1] === 0xbb && chunk[2] === 0xbf
    isFirst = false
    for (let i = hasMark ? 3 : 0; i < chunk.length; i++) {
      const byte = chunk[i]
      if (state === QUOTED) {
        if (byte === QUOTE) state = CLOSED
        else if (byte === NEWLINE) line++
      } else if (byte === NEWLINE) {
        if (previous === RETURN) firstCrlfLine ||= line
        else firstLfLine ||= line
        endRow()
        rowLine = ++line
      } else {
        if (previous === RETURN && state !== LOST) {
          fault({ line, kind: 'lone-return' })
          state = LOST
        }
        if (byte === RETURN) {
          if (state === START && rowBytes > 0) state = PLAIN
        } else {
          rowBytes++
          if (byte === QUOTE && (state === START || state === CLOSED)) {
            if (state === START) quoteLine = line
            state = QUOTED
          } else if (state === LOST) {
            // The rest of a line that was given up.
          } else if (byte === delimiter) {
            fields++
            state = START
          } else if (byte !== SPACE) {
            if (state === CLOSED) {
              fault({ line: quoteLine, kind: 'after-quote' })
              state = LOST
            } else state = PLAIN
          }
        }
      }
      previous = byte
    }
  })
  if (state === QUOTED) fault({ line: quoteLine, kind: 'unterminated' })
  if (rowBytes > 0) {
    if (state === QUOTED) state = LOST
    endRow()
  }
  return { lineOfRow: Int32Array.from(lines.slice(1)), faults, faultCount, firstCrlfLine, firstLfLine }
}
