import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { findJsonFault } from '../../src/layers/jsonFault.js'

const isJson = (text: string) => {
  try {
    JSON.parse(text)
    return true
  } catch {
    return false
  }
}

describe('findJsonFault', () => {
  // The first character that no JSON text could have there, by the grammar of RFC 8259.
  it.each([
    ['{"a": 1,\n "b": }', 2, 7, 'a value', '"}"'],
    ['{"a": 1\n "b": 2}', 2, 2, 'a comma or }', '"\\""'],
    ['[1, 2', 1, 6, 'a comma or ]', 'the end of the file'],
    ['[1, 2,]', 1, 7, 'a value', '"]"'],
    ['{"a": 1,}', 1, 9, 'a key in double quotation marks', '"}"'],
    ["{'a': 1}", 1, 2, 'a key in double quotation marks', '"\'"'],
    ['{"a" 1}', 1, 6, 'a colon after the key', '"1"'],
    ['[NaN]', 1, 2, 'a value', '"N"'],
    ['["a\tb"]', 1, 4, 'the closing quotation mark of a string', '"\\t"'],
    ['{} {}', 1, 4, 'the end of the file', '"{"'],
    ['<!doctype html>', 1, 1, 'a value', '"<"'],
    ['', 1, 1, 'a value', 'the end of the file'],
  ])('places the fault of %j', (text, line, column, expected, found) => {
    expect(isJson(text)).toBe(false)
    expect(findJsonFault(text)).toEqual({ line, column, expected, found })
  })

  it('finds a fault exactly where the engine refuses a text', () => {
    fc.assert(
      fc.property(
        fc.json(),
        fc.nat(),
        fc.constantFrom('', '"', '}', ']', ',', ':', '0', '\\', '.', 'e', '\n'),
        (json, at, put) => {
          const place = at % (json.length + 1)
          const text = json.slice(0, place) + put + json.slice(place + 1)
          expect(findJsonFault(text) === undefined).toBe(isJson(text))
        },
      ),
      { numRuns: 2000, seed: 1 },
    )
  })

  it('walks a text that is nested deeper than the call stack', () => {
    const deep = '['.repeat(200_000)
    expect(findJsonFault(deep)?.column).toBe(200_001)
  })
})
