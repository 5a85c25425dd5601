/** How wide the columns of a table are, in letters. */

type Shown = string | { readonly text: string } | undefined

/** Texts of one column; rows that run across have none. */
export function textsOf(rows: readonly (readonly Shown[] | { readonly across: string })[], column: number): string[] {
  return rows.flatMap((row) => {
    const one = 'across' in row ? undefined : row[column]
    return one === undefined ? [] : [typeof one === 'string' ? one : one.text]
  })
}

/** In letters. */
export function widthOf(head: string, texts: readonly string[], most: number): number {
  const longest = texts.reduce((length, text) => Math.max(length, text.length), 0)
  return Math.min(most, Math.max(8, longest + 2, Math.min(24, head.length + 2)))
}
