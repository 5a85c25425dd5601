/** Columns as typed arrays. Row numbers of the file travel along, so that a message can name a line. */

export interface NumberColumn {
  readonly kind: 'number'
  readonly name: string
  /** NaN where the cell is empty. */
  readonly values: Float64Array
}

export interface LabelColumn {
  readonly kind: 'label'
  readonly name: string
  /** Index into `labels` for each row; -1 where the cell is empty. */
  readonly codes: Int32Array
  /** Distinct labels, sorted by code unit, so that codes do not depend on the order of rows. */
  readonly labels: readonly string[]
}

export type Column = NumberColumn | LabelColumn

export interface Table {
  /** The file as the user named it. */
  readonly file: string
  /** Rows in the file, before `keep`. */
  readonly rowsRead: number
  /** Rows kept: the length of every column. */
  readonly rows: number
  /** Line (or feature, or row) number in the file of each kept row, for messages. */
  readonly lineOfRow: Int32Array
  readonly columns: ReadonlyMap<string, Column>
  /** SHA-256 of the file's bytes, hexadecimal. */
  readonly sha256: string
}

/** What a reader is asked for: a column of the file, as numbers or as labels. */
export interface WantedColumn {
  readonly name: string
  readonly kind: 'number' | 'label'
  /** The key of the study file that asks for it, for messages: `outcomes[0]`. */
  readonly askedBy: string
}

/** A number column; throws if the caller asks for what was not read. */
export function numbersOf(table: Table, name: string): Float64Array {
  const column = table.columns.get(name)
  if (column?.kind !== 'number') throw new Error(`column ${name} was not read as numbers`)
  return column.values
}

/** A label column, or the labels of a number column; throws if the caller asks for what was not read. */
export function labelsOf(table: Table, name: string): LabelColumn {
  const column = table.columns.get(name)
  if (column === undefined) throw new Error(`column ${name} was not read`)
  return column.kind === 'label' ? column : labelsOfNumbers(column)
}

/** Numbers as labels, each by its shortest text; NaN is missing. */
function labelsOfNumbers({ name, values }: NumberColumn): LabelColumn {
  const distinct = [...new Set(values)].filter((value) => !Number.isNaN(value))
  const texts = new Map(distinct.map((value) => [value, String(value)]))
  const labels = [...texts.values()].sort()
  const ranks = new Map(labels.map((label, rank) => [label, rank]))
  const codes = Int32Array.from(values, (value) => (Number.isNaN(value) ? -1 : ranks.get(texts.get(value)!)!))
  return { kind: 'label', name, codes, labels }
}
