/** A table as cells, and its languages: Markdown, LaTeX (booktabs), HTML and CSV. */
import { csvField, escapeHtml, escapeLatex, escapeMarkdown } from './escape.js'
import { machineTable } from './machineTable.js'
import { missing } from './numbers.js'
import { type Cell, shownText } from './tableCells.js'

export interface TableColumn {
  readonly head: string
  readonly isText?: boolean
  /** Names of the numbers in each cell, where a cell has several. */
  readonly parts?: readonly string[]
}

export interface TextTable {
  readonly caption: string
  readonly columns: readonly TableColumn[]
  readonly rows: readonly TableRow[]
  readonly notes: readonly string[]
}

/** One cell per column; or the first cell and, across the rest of the row, why there are no numbers. */
export type TableRow = readonly Cell[] | { readonly head: string; readonly across: string }

const isAcross = (row: TableRow): row is { readonly head: string; readonly across: string } => 'across' in row

/** The table with those of its columns for which `isKept` holds. */
export function withColumns(table: TextTable, isKept: (column: number) => boolean): TextTable {
  const pick = <T>(all: readonly T[]): T[] => all.filter((_, column) => isKept(column))
  const rows = table.rows.map((row): TableRow => (isAcross(row) ? row : pick(row)))
  return { ...table, columns: pick(table.columns), rows }
}

export function toMarkdown(table: TextTable): string {
  const line = (cells: readonly string[]) => `| ${cells.join(' | ')} |`
  const notes = [...table.notes]
  const rows = table.rows.map((row) => {
    if (!isAcross(row)) return line(row.map((cell) => escapeMarkdown(shownText(cell))))
    notes.push(`${row.head}: ${row.across}`)
    return line([escapeMarkdown(row.head), ...table.columns.slice(1).map(() => missing)])
  })
  return [
    `**${escapeMarkdown(table.caption)}**`,
    '',
    line(table.columns.map((column) => escapeMarkdown(column.head))),
    line(table.columns.map((column) => (column.isText ? ':---' : '---:'))),
    ...rows,
    ...notes.flatMap((note) => ['', escapeMarkdown(note)]),
    '',
  ].join('\n')
}

/** Every number as its double, those of a cell with several in columns of their own; notes are left to the others. */
export function toCsv(table: TextTable): string {
  const { columns, rows } = machineTable(table)
  const lines = [
    columns.map(({ head }) => csvField(head)),
    ...rows.map((row) => row.map((cell) => csvField(typeof cell === 'object' ? cell.value : cell))),
  ]
  return `${lines.map((fields) => fields.join(',')).join('\n')}\n`
}

const rowsOnOnePage = 40

export function toLatex(table: TextTable): string {
  const width = table.columns.length
  const spec = table.columns.map((column) => (column.isText ? 'l' : 'r')).join('')
  const head = `${table.columns.map((column) => escapeLatex(column.head)).join(' & ')} \\\\`
  const body = table.rows.map((row) =>
    isAcross(row)
      ? `${escapeLatex(row.head)} & \\multicolumn{${width - 1}}{l}{${escapeLatex(row.across)}} \\\\`
      : `${row.map((cell) => escapeLatex(shownText(cell))).join(' & ')} \\\\`,
  )
  const notes = table.notes.map((note) => `${escapeLatex(note)}\\par`)
  const caption = `\\caption{${escapeLatex(table.caption)}}`
  if (table.rows.length > rowsOnOnePage) {
    const repeated = ['\\toprule', head, '\\midrule']
    const long = [
      '\\small',
      `\\begin{longtable}{${spec}}`,
      `${caption} \\\\`,
      ...repeated,
      '\\endhead',
      '\\bottomrule',
      '\\endfoot',
    ]
    return [
      '% needs: booktabs, longtable',
      '\\begingroup',
      ...long,
      ...body,
      '\\end{longtable}',
      ...notes,
      '\\endgroup',
      '',
    ].join('\n')
  }
  const tabular = [
    `\\begin{tabular}{${spec}}`,
    '\\toprule',
    head,
    '\\midrule',
    ...body,
    '\\bottomrule',
    '\\end{tabular}',
  ]
  const small = notes.length > 0 ? ['\\par\\smallskip', '{\\footnotesize', ...notes, '}'] : []
  return [
    '% needs: booktabs',
    '\\begin{table}[htbp]',
    '\\centering',
    '\\small',
    caption,
    ...tabular,
    ...small,
    '\\end{table}',
    '',
  ].join('\n')
}

/** The table in a container of its own that scrolls sideways and can be reached by keyboard. */
export function toHtml(table: TextTable, className = ''): string {
  const classOf = (index: number) => (table.columns[index].isText ? ' class="words"' : '')
  const head = table.columns
    .map((column, index) => `<th scope="col"${classOf(index)}>${escapeHtml(column.head)}</th>`)
    .join('')
  const rows = table.rows.map((row) => {
    if (isAcross(row)) {
      return `<tr class="across"><th scope="row">${escapeHtml(row.head)}</th><td class="words" colspan="${table.columns.length - 1}">${escapeHtml(row.across)}</td></tr>`
    }
    const cells = row.slice(1).map((cell, index) => `<td${classOf(index + 1)}>${escapeHtml(shownText(cell))}</td>`)
    return `<tr><th scope="row">${escapeHtml(shownText(row[0]))}</th>${cells.join('')}</tr>`
  })
  const notes = table.notes.map((note) => `<p class="note">${escapeHtml(note)}</p>`).join('\n')
  return `<div class="scroll ${className}" tabindex="0" role="region" aria-label="${escapeHtml(table.caption)}">
<table>
<caption>${escapeHtml(table.caption)}</caption>
<thead><tr>${head}</tr></thead>
<tbody>
${rows.join('\n')}
</tbody>
</table>
</div>
${notes}`
}
