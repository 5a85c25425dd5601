/** Cells of a table: what a page shows, and behind it every number in full, for the formats that programs read. */
import { cell, count, fixed, missing, type Places, p, percent, significant, wholeNumber } from './numbers.js'

/** `value`: the double itself; where `text` has a percent sign, the share of one. Not finite where nothing is shown. */
export interface ShownNumber {
  readonly value: number
  readonly text: string
}

/** The numbers stand in the order of the column's `parts`; one where it has none. */
export interface NumberCell {
  readonly text: string
  readonly numbers: readonly ShownNumber[]
}

export type Cell = string | NumberCell

type Value = number | null | undefined

export const shownText = (shown: Cell): string => (typeof shown === 'string' ? shown : shown.text)

export const fixedCell = (value: Value, places: Places) => numberCell(value, fixed(value, places))
export const countCell = (value: Value) => numberCell(value, count(value))
export const significantCell = (value: Value) => numberCell(value, significant(value))
export const wholeCell = (value: Value) => numberCell(value, wholeNumber(value))
export const pCell = (value: Value) => numberCell(value, p(value))
export const percentCell = (share: Value) => numberCell(share, percent(share))

/** A count of units: where it is withheld, its number is in no format. */
export function unitsCell(units: Value, smallestCell: number): Cell {
  const text = cell(units, smallestCell)
  return text === count(units) ? numberCell(units, text) : text
}

export function numberCell(value: Value, text: string): Cell {
  return isNumber(value) ? { text, numbers: [{ value, text }] } : text
}

/** Several numbers in one cell: the numbers of `cells` in a row, under a text of their own. */
export function severalCell(text: string, cells: readonly Cell[]): Cell {
  const numbers = cells.flatMap((one) =>
    typeof one === 'string' ? [{ value: Number.NaN, text: missing }] : one.numbers,
  )
  return numbers.some(({ value }) => isNumber(value)) ? { text, numbers } : text
}

function isNumber(value: Value): value is number {
  return typeof value === 'number' && Number.isFinite(value)
}
