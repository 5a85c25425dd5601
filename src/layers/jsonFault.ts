/**
 * Where a text stops being JSON (RFC 8259), and what was expected there.
 * The engine's own message names a place only sometimes, so a text that JSON.parse has refused is walked again here.
 */

export interface JsonFault {
  /** From 1. */
  readonly line: number
  /** From 1, in UTF-16 units. */
  readonly column: number
  readonly expected: string
  /** The character there, or "the end of the file". */
  readonly found: string
}

const space = /[ \t\n\r]*/y
const literal = /(?:true|false|null)(?![A-Za-z0-9_])/y
const number = /-?(?:0|[1-9]\d*)(?:\.\d+)?(?:[eE][+-]?\d+)?(?![\w.])/y
// biome-ignore lint/suspicious/noControlCharactersInRegex: control characters are what JSON forbids in a string
const stringBody = /[^"\\\u0000-\u001f]*(?:\\(?:["\\/bfnrt]|u[0-9a-fA-F]{4})[^"\\\u0000-\u001f]*)*/y

/** The first fault of `text`; undefined if it is JSON after all. Depth is bounded by memory, not by the call stack. */
export function findJsonFault(text: string): JsonFault | undefined {
  /** Open brackets, outermost first. */
  const open: ('{' | '[')[] = []
  let at = 0
  const match = (pattern: RegExp): boolean => {
    pattern.lastIndex = at
    if (!pattern.test(text)) return false
    at = pattern.lastIndex
    return true
  }
  const fault = (expected: string): JsonFault => placeOf(text, at, expected)
  const string = (): JsonFault | undefined => {
    at += 1
    match(stringBody)
    if (text[at] !== '"') return fault('the closing quotation mark of a string')
    at += 1
    return undefined
  }
  const key = (): JsonFault | undefined => {
    match(space)
    if (text[at] !== '"') return fault('a key in double quotation marks')
    const bad = string()
    if (bad) return bad
    match(space)
    if (text[at] !== ':') return fault('a colon after the key')
    at += 1
    return undefined
  }
  for (;;) {
    // A value begins here.
    match(space)
    const first = text[at]
    if (first === '{' || first === '[') {
      at += 1
      match(space)
      if (text[at] === (first === '{' ? '}' : ']')) at += 1
      else {
        open.push(first)
        const bad = first === '{' ? key() : undefined
        if (bad) return bad
        continue
      }
    } else if (first === '"') {
      const bad = string()
      if (bad) return bad
    } else if (!match(literal) && !match(number)) return fault('a value')
    // A value has ended: close brackets, or go on after a comma.
    for (;;) {
      match(space)
      const inside = open[open.length - 1]
      if (inside === undefined) return at < text.length ? fault('the end of the file') : undefined
      const closing = inside === '{' ? '}' : ']'
      if (text[at] === closing) {
        at += 1
        open.pop()
        continue
      }
      if (text[at] !== ',') return fault(`a comma or ${closing}`)
      at += 1
      const bad = inside === '{' ? key() : undefined
      if (bad) return bad
      break
    }
  }
}

function placeOf(text: string, at: number, expected: string): JsonFault {
  let line = 1
  let lineStart = 0
  for (let next = text.indexOf('\n'); next !== -1 && next < at; next = text.indexOf('\n', next + 1)) {
    line += 1
    lineStart = next + 1
  }
  const found = at < text.length ? JSON.stringify(String.fromCodePoint(text.codePointAt(at)!)) : 'the end of the file'
  return { line, column: at - lineStart + 1, expected, found }
}
