import type { Labels } from '../../src/thresholds/index.js'

/** A label column as the reader gives it: labels sorted by code unit, null = an empty cell. */
export function labelColumn(name: string, cells: readonly (string | null)[]): Labels {
  const labels = [...new Set(cells.filter((cell) => cell !== null))].sort((a, b) => (a < b ? -1 : 1))
  return { name, codes: Int32Array.from(cells, (cell) => (cell === null ? -1 : labels.indexOf(cell))), labels }
}
