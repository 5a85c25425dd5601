/** What a shown cell says to a spreadsheet: text, or a number with the digits shown. */

export interface CellNumber {
  readonly value: number
  /** Digits after the point. */
  readonly places: number
  readonly isGrouped: boolean
  readonly isPercent: boolean
}

const shown = /^([−-]?)(\d{1,3}(?:,\d{3})+|\d+)(?:\.(\d+))?(%?)$/

/** The number of a cell that is nothing but one; undefined where it has words, an interval or a sign of comparison. */
export function numberOfCell(text: string): CellNumber | undefined {
  const found = shown.exec(text)
  if (!found) return undefined
  const [, sign, whole, decimals = '', percent] = found
  const size = Number(`${whole.replaceAll(',', '')}.${decimals || '0'}`)
  const value = sign === '' ? size : -size
  return {
    value: percent ? Number((value / 100).toPrecision(15)) : value,
    places: decimals.length,
    isGrouped: whole.includes(','),
    isPercent: percent !== '',
  }
}

/** Without the marks of a printed page: an ASCII minus and no commas in numbers, nothing where a value is missing. */
export function plainCell(text: string): string {
  if (text === '–') return ''
  return /^[−-]?\d[\d,]*(\.\d+)?%?$/.test(text) ? text.replace('−', '-').replaceAll(',', '') : text.replaceAll('−', '-')
}
