/** results.json as text: keys in the order they were made, doubles in full, nothing that JSON can't hold. */
import type { Results } from '../results.js'

/** Throws, with the place, on a number that is not finite: a missing number has to be null with a reason beside it. */
export function resultsJson(results: Results): string {
  checkPlain(results, 'results')
  return `${JSON.stringify(results, null, 2)}\n`
}

/** The same of any plain data, on one line: reading it gives equal data. */
export function plainJson(data: object): string {
  checkPlain(data, 'data')
  return `${JSON.stringify(data)}\n`
}

function checkPlain(value: unknown, place: string): void {
  if (typeof value === 'number' && !Number.isFinite(value)) throw new RangeError(`${place} is ${value}`)
  if (typeof value !== 'object' || value === null) return
  if (ArrayBuffer.isView(value) || value instanceof Map || value instanceof Set)
    throw new TypeError(`${place} is not plain data`)
  for (const [key, part] of Object.entries(value)) checkPlain(part, `${place}.${key}`)
}
