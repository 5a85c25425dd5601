/** Results of lines that are numbered, under the names that the numbers stand for. */
import type { Results } from '../results.js'

/** `lines`: the id of line n is the n-th. Without any, the results as they are. */
export function renamedLines(results: Results, lines: readonly string[]): Results {
  if (lines.length === 0) return results
  const nameOf = (line: unknown) => lines[Number(line) - 1] ?? String(line)
  const walk = (value: unknown, key: string): unknown => {
    if (Array.isArray(value))
      return value.map((one) => (key === 'lines' && typeof one === 'string' ? nameOf(one) : walk(one, '')))
    if (typeof value !== 'object' || value === null) return key === 'line' ? nameOf(value) : value
    return Object.fromEntries(
      Object.entries(value).map(([name, part]) => [key === 'weights' ? nameOf(name) : name, walk(part, name)]),
    )
  }
  return walk(results, '') as Results
}
