import type { Problem } from '../../problem.js'

/** A file that can be asked for columns: what each format gives the reader. */
export interface Source {
  /** As the user named it. */
  readonly file: string
  /** Column names in the file's order, exactly as written. */
  readonly names: readonly string[]
  /** DuckDB types, where the file has types; a file of texts has VARCHAR for all. */
  readonly types: readonly string[]
  /** What messages count by. */
  readonly place: 'line' | 'row' | 'feature'
  /** A query for the given columns (positions in `names`), named `alias(position)`, all rows in the file's order. */
  readonly query: (positions: readonly number[]) => string
  /** Looks at the bytes: their SHA-256, and what is wrong with the text whatever is asked of it. */
  readonly survey: () => Promise<Surveyed>
  /** After the rows were read, or reading failed: where they are, or what is wrong. */
  readonly locate: (outcome: RowsOrFailure, surveyed: Surveyed) => Promise<Located>
}

export interface Surveyed {
  readonly sha256: string
  readonly problems: readonly Problem[]
  /** Lines of text and delimiters in it, where the format has them. */
  readonly lines: number
  readonly delimiters: number
}

/** Rows that DuckDB read, or why it stopped. */
export type RowsOrFailure = { readonly rows: number } | { readonly failure: unknown }

export type Located = { readonly lineOfRow: Int32Array } | { readonly problems: readonly Problem[] }

/** Problems of one kind listed at most; the rest is counted. */
export const PROBLEM_LIMIT = 1000

/** Name of a column inside queries: never that of a column in the file. */
export function alias(position: number): string {
  return `"\u0001${position}"`
}

/** first, first + 1, … for `rows` rows. */
export function consecutive(first: number, rows: number): Int32Array {
  const numbers = new Int32Array(rows)
  for (let row = 0; row < rows; row++) numbers[row] = first + row
  return numbers
}

/** A problem at a row of the file, by what its format counts. */
export function placed(
  source: Pick<Source, 'file' | 'place'>,
  at: number,
): { file: string; line?: number; feature?: number } {
  return source.place === 'feature' ? { file: source.file, feature: at } : { file: source.file, line: at }
}
