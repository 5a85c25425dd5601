/**
 * Numbers as a reader sees them. Minus is U+2212, thousands have commas; what is missing or infinite is an en dash.
 * Machine files do not pass here: they carry full doubles.
 */
import { median } from 'd3-array'
import { format } from 'd3-format'

export const missing = '–'

/** Places after the decimal point, or `scientific` where fixed places would be unreadable. */
export type Places = number | 'scientific'

const grouped = format(',d')

const isNumber = (value: number | null | undefined): value is number =>
  typeof value === 'number' && Number.isFinite(value)

export function count(value: number | null | undefined): string {
  return isNumber(value) ? grouped(value) : missing
}

/** Four significant digits; whole numbers from 1,000 on. */
export function significant(value: number | null | undefined): string {
  if (!isNumber(value)) return missing
  const size = Math.abs(value)
  if (size === 0) return '0'
  if (size >= 1e12 || size < 1e-4) return format('.3e')(value)
  if (size >= 1000) return format(',.0f')(value)
  return format(',.4~r')(value)
}

/**
 * Places that a set of estimates share: three significant digits of their median standard error.
 * Without a positive error the estimates themselves settle it, at four significant digits.
 */
export function sharedPlaces(
  standardErrors: readonly (number | null | undefined)[],
  estimates: readonly (number | null | undefined)[],
): Places {
  const positive = (values: readonly (number | null | undefined)[]) =>
    values
      .filter(isNumber)
      .map(Math.abs)
      .filter((value) => value > 0)
  const error = median(positive(standardErrors))
  const size = median(positive(estimates))
  if (error === undefined && size === undefined) return 1
  const places = error !== undefined ? 2 - Math.floor(Math.log10(error)) : 3 - Math.floor(Math.log10(size as number))
  if (places > 8 || places < -9) return 'scientific'
  return Math.max(0, places)
}

export function fixed(value: number | null | undefined, places: Places): string {
  if (!isNumber(value)) return missing
  if (places === 'scientific') return format('.3e')(value)
  return format(`,.${places}f`)(value)
}

/** Every digit: for what is a fact and not an estimate, as a cutoff is. */
export function wholeNumber(value: number | null | undefined): string {
  return isNumber(value) ? value.toLocaleString('en', { maximumFractionDigits: 20 }).replace('-', '−') : missing
}

export function p(value: number | null | undefined): string {
  if (!isNumber(value)) return missing
  if (value < 0.001) return '<0.001'
  if (value > 0.999 && value < 1) return '>0.999'
  return format('.3f')(value)
}

/** `p = 0.012` or `p < 0.001`. */
export function pWords(value: number | null | undefined): string {
  const text = p(value)
  return /^[<>]/.test(text) ? `p ${text[0]} ${text.slice(1)}` : `p = ${text}`
}

/** A share of one as a percentage with one place. */
export function percent(share: number | null | undefined): string {
  return isNumber(share) ? `${format('.1f')(100 * share)}%` : missing
}

/** A count of units, withheld where it is above 0 and under the smallest cell. */
export function cell(units: number | null | undefined, smallestCell: number): string {
  return isSmall(units, smallestCell) ? `<${smallestCell}` : count(units)
}

export function isSmall(units: number | null | undefined, smallestCell: number): boolean {
  return isNumber(units) && units > 0 && units < smallestCell
}
