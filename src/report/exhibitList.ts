/** The list of exhibits of a results folder: what each is, and its files. */
import { escapeMarkdown } from './escape.js'

/** One table, figure or file, in all its formats. */
export interface Exhibit {
  /** In Markdown. */
  readonly title: string
  /** Relative to the results folder, with forward slashes. */
  readonly files: readonly string[]
}

const titles: Readonly<Record<string, string>> = {
  'results.json': 'every number, as full doubles',
  'report.html': 'the report',
  'lines.csv': 'jump at each line',
  'pooled.csv': 'all lines together',
  'checks.csv': 'every check',
  'borders.geojson': 'pieces of the border with their estimates',
  'study.resolved.yaml': 'the study with every default filled in',
}

/** line-2 before line-10. */
const byNumber = new Intl.Collator('en', { numeric: true })

/** `beginnings`: by file, the first characters of its text; they hold the caption of a table and the title of a figure. */
export function exhibitsOf(beginnings: ReadonlyMap<string, string>): Exhibit[] {
  const groups = new Map<string, string[]>()
  for (const file of [...beginnings.keys()].sort(byNumber.compare)) {
    const key = file.includes('/') ? file.replace(/\.[^./]+$/, '') : file
    groups.set(key, [...(groups.get(key) ?? []), file])
  }
  return [...groups].map(([key, files]) => {
    const found = files.map((file) => titleIn(beginnings.get(file) ?? '')).find((title) => title !== undefined)
    return { title: found ?? titles[key] ?? escapeMarkdown(key.split('/').at(-1) as string), files }
  })
}

/** Rows of a Markdown table. */
export function exhibitRows(exhibits: readonly Exhibit[]): string[] {
  return [
    '| In the paper | Exhibit | Files in `results/` |',
    '| :--- | :--- | :--- |',
    ...exhibits.map(({ title, files }) => `|  | ${title} | ${files.map((file) => `\`${file}\``).join(', ')} |`),
  ]
}

function titleIn(text: string): string | undefined {
  const caption = /^\*\*(.+)\*\*\n/.exec(text)?.[1]
  const title = /<svg\b[^>]*><title[^>]*>([^<]+)<\/title>/.exec(text)?.[1]
  return caption ?? (title && escapeMarkdown(title))
}
