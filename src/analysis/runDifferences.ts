/** What differs between two runs before any number does: options, inputs, version, geometry. */
import type { GeometryUsed, InputFile, Results, RunDifference } from '../results.js'

/** A run as its results folder tells it. */
export interface Run {
  readonly results: Results
  /** study.resolved.yaml as plain data. */
  readonly options: unknown
}

export function runDifferences(first: Run, second: Run): RunDifference[] {
  return [
    ...optionDifferences(first.options, second.options),
    ...inputDifferences(first.results.inputs, second.results.inputs),
    ...differing('version', first.results.version, second.results.version),
    ...differing('geometry', geometryOf(first.results.geometry), geometryOf(second.results.geometry)),
  ]
}

/** Key by key, in the order of the first run and then of the second. A list is one value. */
function optionDifferences(first: unknown, second: unknown): RunDifference[] {
  const [before, after] = [optionsOf(first), optionsOf(second)]
  const keys = new Set([...before.keys(), ...after.keys()])
  return [...keys].flatMap((key) => differing(key, before.get(key) ?? null, after.get(key) ?? null))
}

function optionsOf(options: unknown, above = '', found = new Map<string, string>()): Map<string, string> {
  const isGroup = typeof options === 'object' && options !== null && !Array.isArray(options)
  if (!isGroup) return found.set(above, typeof options === 'string' ? options : JSON.stringify(options))
  for (const [key, part] of Object.entries(options)) optionsOf(part, above === '' ? key : `${above}.${key}`, found)
  return found
}

/** By name; a file that only changed its name is told by its bytes. */
function inputDifferences(first: readonly InputFile[], second: readonly InputFile[]): RunDifference[] {
  const names = new Set([...first, ...second].map(({ file }) => file))
  const named = (inputs: readonly InputFile[], name: string) => inputs.find(({ file }) => file === name)
  const sameBytes = (inputs: readonly InputFile[], one: InputFile) =>
    inputs.some(({ sha256 }) => sha256 === one.sha256) ? `${factsOf(one)}, the same bytes` : factsOf(one)
  return [...names].flatMap((name) => {
    const [before, after] = [named(first, name), named(second, name)]
    if (before && after) return differing(`input ${name}`, factsOf(before), factsOf(after))
    return differing(`input ${name}`, before ? sameBytes(second, before) : null, after ? sameBytes(first, after) : null)
  })
}

function factsOf({ sha256, rows, features, crs }: InputFile): string {
  const many = (size: number, one: string) => `${size} ${size === 1 ? one : `${one}s`}`
  const size = rows !== undefined ? many(rows, 'row') : features !== undefined ? many(features, 'feature') : undefined
  return [`sha256 ${sha256}`, size, crs].filter((part) => part !== undefined).join(', ')
}

function geometryOf(geometry: GeometryUsed | undefined): string {
  if (!geometry) return 'measured'
  return geometry.reused ? `taken from ${geometry.from}` : `measured anew: ${geometry.because ?? 'no reason'}`
}

function differing(key: string, first: string | null, second: string | null): RunDifference[] {
  return first === second ? [] : [{ key, first, second }]
}
