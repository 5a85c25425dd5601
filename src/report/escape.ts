/** Text from studies and tables, made safe for each language the report writes. */

const htmlEntities: Readonly<Record<string, string>> = {
  '&': '&amp;',
  '<': '&lt;',
  '>': '&gt;',
  '"': '&quot;',
  "'": '&#39;',
}

/** For text and quoted attributes of HTML and of SVG; characters that XML forbids become U+FFFD. */
export function escapeHtml(text: string): string {
  return withoutControls(text).replace(/[&<>"']/g, (character) => htmlEntities[character])
}

const latexMarks: Readonly<Record<string, string>> = {
  '\\': '\\textbackslash{}',
  '{': '\\{',
  '}': '\\}',
  $: '\\$',
  '&': '\\&',
  '#': '\\#',
  '%': '\\%',
  _: '\\_',
  '~': '\\textasciitilde{}',
  '^': '\\textasciicircum{}',
  '<': '\\textless{}',
  '>': '\\textgreater{}',
  '|': '\\textbar{}',
  '"': '\\textquotedbl{}',
  '−': '$-$',
  '–': '--',
  '²': '\\textsuperscript{2}',
  '±': '$\\pm$',
}

export function escapeLatex(text: string): string {
  return withoutControls(text)
    .replace(/[\\{}$&#%_~^<>|"−–²±]/g, (mark) => latexMarks[mark])
    .replace(/\s+/g, ' ')
}

/** For a cell of a Markdown table: one line, no markup, no HTML. */
export function escapeMarkdown(text: string): string {
  return withoutControls(text)
    .replace(/[\\`*_{}[\]|~#]/g, (mark) => `\\${mark}`)
    .replace(/&/g, '&amp;')
    .replace(/</g, '&lt;')
    .replace(/>/g, '&gt;')
    .replace(/\s+/g, ' ')
}

/** One field of a CSV file; a number is the shortest text that reads back as the same double, and nothing where it is missing. */
export function csvField(value: string | number | null | undefined): string {
  if (value === null || value === undefined) return ''
  if (typeof value === 'number') return Number.isFinite(value) ? String(value) : ''
  return /[",\r\n]/.test(value) ? `"${value.replace(/"/g, '""')}"` : value
}

function withoutControls(text: string): string {
  // biome-ignore lint/suspicious/noControlCharactersInRegex: these are the characters that XML 1.0 forbids
  return text.replace(/[\u0000-\u0008\u000b\u000c\u000e-\u001f\ufffe\uffff]/g, '\ufffd')
}

/** File-name parts for a list of names: letters, digits, - and _, no two alike even where case is ignored. */
export function slugs(names: readonly string[]): string[] {
  const taken = new Set<string>()
  return names.map((name) => {
    const plain = name.normalize('NFKD').replace(/[\u0300-\u036f]/g, '')
    const base =
      plain
        .replace(/[^A-Za-z0-9_]+/g, '-')
        .replace(/^-+|-+$/g, '')
        .slice(0, 60) || 'outcome'
    let slug = base
    for (let number = 2; taken.has(slug.toLowerCase()); number++) slug = `${base}-${number}`
    taken.add(slug.toLowerCase())
    return slug
  })
}
