/** All tables in one workbook. Its library is loaded when needed. */
import { machineTable, type NamedTable, type ShownNumber } from '../report/index.js'
import { atFixedDate } from './archive.js'
import { textsOf, widthOf } from './columnWidths.js'

/** An XLSX: a sheet for each table, whole; every number is its double, shown with the digits of the paper. */
export async function xlsxOf(tables: readonly NamedTable[]): Promise<Uint8Array> {
  const { default: writeWorkbook } = await import('write-excel-file/node')
  const names = sheetNames(tables.map(({ name }) => name))
  const sheets = tables.map(({ table }, i) => {
    const { columns, rows } = machineTable(table)
    return {
      sheet: names[i],
      stickyRowsCount: headRows,
      orientation: 'landscape' as const,
      columns: columns.map(({ head }, c) => ({ width: widthOf(head, textsOf(rows, c), 60) })),
      data: [
        [{ value: table.caption, fontWeight: 'bold' as const }],
        columns.map(({ head, isText }) => ({
          value: head,
          fontWeight: 'bold' as const,
          align: isText ? ('left' as const) : ('right' as const),
          wrap: true,
        })),
        ...rows.map((row) => row.map((one, c) => cellOf(one, columns[c].isText === true))),
        ...table.notes.map((text) => [{ value: text }]),
      ],
    }
  })
  const archive = new Uint8Array(await writeWorkbook(sheets).toBuffer())
  return atFixedDate(archive, {
    'xl/workbook.xml': (text) => text.replace('<definedNames/>', () => repeatedRows(names)),
  })
}

/** Caption and head. */
const headRows = 2

/** The head of each sheet on each page printed. */
function repeatedRows(names: readonly string[]): string {
  const ranges = names.map((name, i) => {
    const range = `'${name.replaceAll("'", "''")}'!$1:$${headRows}`.replaceAll('&', '&amp;').replaceAll('<', '&lt;')
    return `<definedName name="_xlnm.Print_Titles" localSheetId="${i}">${range}</definedName>`
  })
  return `<definedNames>${ranges.join('')}</definedNames>`
}

function cellOf(one: string | ShownNumber | undefined, isText: boolean) {
  if (one === undefined || one === '') return null
  if (typeof one === 'object') return { value: one.value, type: Number, format: formatOf(one.text) }
  return { value: one, align: isText ? ('left' as const) : ('right' as const) }
}

/** The display format that shows a number as `text` does; words such as `<0.001` stand for themselves. */
function formatOf(text: string): string {
  const found = /^[−-]?(\d{1,3}(?:,\d{3})+|\d+)(\.\d+)?(e[+−-]\d+)?(%?)$/.exec(text)
  if (!found) return `"${text.replaceAll('"', '')}"`
  const [, whole, decimals = '', power = '', percent] = found
  return `${whole.includes(',') ? '#,##0' : '0'}${decimals.replace(/\d/g, '0')}${power && 'E+0'}${percent}`
}

/** At most 31 letters, none of \ / ? * [ ] :, and no two alike whatever their case. */
function sheetNames(names: readonly string[]): string[] {
  const taken = new Set<string>()
  return names.map((name) => {
    const clean = name.replace(/[\\/?*[\]:]/g, ' ').slice(0, 31)
    let free = clean
    for (let k = 2; taken.has(free.toLowerCase()); k++) free = `${clean.slice(0, 30 - String(k).length)}~${k}`
    taken.add(free.toLowerCase())
    return free
  })
}
