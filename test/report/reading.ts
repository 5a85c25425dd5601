/** Reads back what the report writes, for tests only. */

/** Rows of a CSV text as records, quotes undone. */
export function readCsv(text: string): Record<string, string>[] {
  const rows: string[][] = [[]]
  let field = ''
  let isQuoted = false
  for (let index = 0; index < text.length; index++) {
    const character = text[index]
    if (isQuoted) {
      if (character === '"' && text[index + 1] === '"') {
        field += '"'
        index++
      } else if (character === '"') isQuoted = false
      else field += character
    } else if (character === '"') isQuoted = true
    else if (character === ',' || character === '\n') {
      rows[rows.length - 1].push(field)
      field = ''
      if (character === '\n') rows.push([])
    } else field += character
  }
  const [head, ...body] = rows.filter((row) => row.length > 0)
  return body.map((row) => {
    if (row.length !== head.length) throw new Error(`a row of ${row.length} fields under a head of ${head.length}`)
    return Object.fromEntries(head.map((name, column) => [name, row[column]]))
  })
}

/** Cells of the rows of a Markdown table, escapes undone, head and rule left out. */
/** The tables of a file, one or the parts of a wide one, each without its head. */
export function readMarkdownParts(text: string): string[][][] {
  const parts = text.split(/^\*\*.*\*\*$/m).slice(1)
  return parts.map(readMarkdown)
}

export function readMarkdown(text: string): string[][] {
  const lines = text.split('\n').filter((line) => line.startsWith('|'))
  return lines.slice(2).map((line) =>
    line
      .slice(2, -2)
      .split(' | ')
      .map((cell) => cell.replace(/\\(.)/g, '$1').replace(/&lt;/g, '<').replace(/&gt;/g, '>').replace(/&amp;/g, '&')),
  )
}

/** A printed number and half a unit of its last digit. */
export function printed(text: string): { value: number; half: number } {
  const plain = text.replace(/,/g, '').replace('−', '-').replace(/^\+/, '')
  if (!/^-?\d+(\.\d+)?$/.test(plain)) throw new Error(`not a printed number: ${text}`)
  const places = plain.split('.')[1]?.length ?? 0
  return { value: Number(plain), half: 0.5 * 10 ** -places * (1 + 1e-9) }
}

/** The text of a page: what is between tags, entities undone, blank runs made one. */
export function textOf(html: string): string {
  return html
    .replace(/<style>[\s\S]*?<\/style>/g, '')
    .replace(/<\/(p|h1|h2|h3|tr|li|caption|figcaption|dt|dd|text|title|desc|pre)>/g, '\n')
    .replace(/<\/t[hd]>/g, ' ; ')
    .replace(/<[^>]*>/g, '')
    .replace(/&lt;/g, '<')
    .replace(/&gt;/g, '>')
    .replace(/&quot;/g, '"')
    .replace(/&#39;/g, "'")
    .replace(/&amp;/g, '&')
    .split('\n')
    .map((line) => line.replace(/\s+/g, ' ').trim())
    .filter((line) => line !== '')
    .join('\n')
}
