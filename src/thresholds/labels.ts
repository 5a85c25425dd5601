/** What tells lines apart: label columns, the combinations of their values that occur, and their canonical order. */

/** A column of text: one code per row. */
export interface Labels {
  readonly name: string
  /** Index into `labels` for each row; -1 where the cell is empty. */
  readonly codes: Int32Array
  readonly labels: readonly string[]
}

/** Rows grouped by the values of several columns. */
export interface Groups {
  /** Group of each row, or -1 where a cell is missing or the row is masked. */
  readonly ofRow: Int32Array
  /** For each group, its value in each column. */
  readonly values: readonly (readonly string[])[]
}

/**
 * Groups rows by the combination of values they have in `columns` (one or more, equally long).
 * Groups are sorted column by column: by number where every value that occurs in the column is a number, else by code unit.
 * So neither their order nor their values depend on the order of rows.
 * present: rows with 0 belong to no group.
 */
export function groupRows(columns: readonly Labels[], present?: Uint8Array): Groups {
  if (columns.length === 0) throw new RangeError('no columns to group rows by')
  const rows = columns[0].codes.length
  for (const column of columns) {
    if (column.codes.length !== rows) {
      throw new RangeError(`column ${column.name} has ${column.codes.length} rows, ${columns[0].name} has ${rows}`)
    }
  }
  const ofRow = new Int32Array(rows)
  if (present) for (let i = 0; i < rows; i++) ofRow[i] = present[i] ? 0 : -1
  let values: (readonly string[])[] = [[]]
  for (const column of columns) values = splitByColumn(ofRow, values, column)
  const order = canonicalOrder(values)
  const rank = new Int32Array(values.length)
  for (let k = 0; k < order.length; k++) rank[order[k]] = k
  for (let i = 0; i < rows; i++) if (ofRow[i] >= 0) ofRow[i] = rank[ofRow[i]]
  return { ofRow, values: order.map((group) => values[group]) }
}

/** Above this many cells a lookup table of group x code gives way to a map. */
const LARGEST_TABLE = 1 << 22

/** Splits the groups in `ofRow` (in place) by one more column, in order of first occurrence; returns the values of the new groups. */
function splitByColumn(
  ofRow: Int32Array,
  values: readonly (readonly string[])[],
  column: Labels,
): (readonly string[])[] {
  const width = column.labels.length
  const split: (readonly string[])[] = []
  const cells = values.length * width
  const table = cells <= LARGEST_TABLE ? new Int32Array(cells).fill(-1) : undefined
  const map = new Map<number, number>()
  for (let i = 0; i < ofRow.length; i++) {
    const group = ofRow[i]
    if (group < 0) continue
    const code = column.codes[i]
    if (code < 0) {
      ofRow[i] = -1
      continue
    }
    const cell = group * width + code
    let next = table ? table[cell] : (map.get(cell) ?? -1)
    if (next < 0) {
      next = split.push([...values[group], column.labels[code]]) - 1
      if (table) table[cell] = next
      else map.set(cell, next)
    }
    ofRow[i] = next
  }
  return split
}

/** Indices of `values` in canonical order. */
function canonicalOrder(values: readonly (readonly string[])[]): number[] {
  const width = values.length > 0 ? values[0].length : 0
  const isNumeric: boolean[] = []
  for (let k = 0; k < width; k++) isNumeric.push(values.every((value) => isNumber(value[k])))
  const compare = (a: readonly string[], b: readonly string[]): number => {
    for (let k = 0; k < width; k++) {
      if (isNumeric[k]) {
        const difference = Number(a[k]) - Number(b[k])
        if (difference !== 0) return difference
      }
      if (a[k] !== b[k]) return a[k] < b[k] ? -1 : 1
    }
    return 0
  }
  return values.map((_, index) => index).sort((a, b) => compare(values[a], values[b]))
}

function isNumber(text: string): boolean {
  return text.trim() !== '' && Number.isFinite(Number(text))
}

/**
 * The id of a line: its values joined by ', '. Where there are several, a value that itself holds a comma or a quote
 * is quoted, so that two lines never share an id.
 */
export function lineId(values: readonly string[]): string {
  if (values.length === 1) return values[0]
  return values.map((value) => (/[",]/.test(value) ? JSON.stringify(value) : value)).join(', ')
}

/** What a reader calls a line: 'region North, year 2015'. */
export function lineLabel(names: readonly string[], values: readonly string[]): string {
  return values.map((value, k) => `${names[k]} ${value}`).join(', ')
}
