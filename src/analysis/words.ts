/** A number in a sentence: three significant digits. */
export function shown(value: number): string {
  return String(Number(value.toPrecision(3)))
}
