import { readFileSync } from 'node:fs'

/** A file of outside values from test/golden/math. */
export function golden<T>(name: string): T {
  return JSON.parse(readFileSync(new URL(`../golden/math/${name}`, import.meta.url), 'utf8')) as T
}

/** |value − expected| relative to expected; 0 where both are the same number, infinities included. */
export function relativeError(value: number, expected: number): number {
  return value === expected ? 0 : Math.abs((value - expected) / expected)
}
