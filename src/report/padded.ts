/**
 * Rows as lines of text with columns of one width; columns whose places are in `left` begin at the left, the others end
 * at the right. The first row says how many columns there are: a row of two cells among wider ones widens none.
 */
export function padded(rows: readonly (readonly string[])[], left: readonly number[] = [0]): string[] {
  const widths: number[] = []
  for (const row of rows) {
    if (row.length === 2 && rows[0].length > 2) continue
    for (const [i, cell] of row.entries()) widths[i] = Math.max(widths[i] ?? 0, cell.length)
  }
  return rows.map((row) =>
    row
      .map((cell, i) => (left.includes(i) ? cell.padEnd(widths[i]) : cell.padStart(widths[i])))
      .join('  ')
      .trimEnd(),
  )
}
