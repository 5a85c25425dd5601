/**
 * Documents and workbooks are zip archives whose libraries write the time of day into them. Here it is put at a fixed
 * date, so that equal tables have equal bytes.
 */
const fixedDate = '1980-01-01T12:00:00Z'
/** The same for a zip archive, which keeps local time: these hours and minutes wherever the machine stands. */
const fixedLocalDate = () => new Date(1980, 0, 1, 12)

/** The archive anew: entries in order of their names, all of one date, that date in the properties, and `changed` ones. */
export async function atFixedDate(
  archive: Uint8Array,
  changed: Readonly<Record<string, (text: string) => string>> = {},
): Promise<Uint8Array> {
  const { strFromU8, strToU8, unzipSync, zipSync } = await import('fflate')
  const changes = { ...changed, 'docProps/core.xml': withFixedDate }
  const entries = Object.entries(unzipSync(archive)).sort(([a], [b]) => (a < b ? -1 : 1))
  const dated = entries.map(([name, bytes]): [string, Uint8Array] => {
    const change = (changes as typeof changed)[name]
    return [name, change ? strToU8(change(strFromU8(bytes))) : bytes]
  })
  return zipSync(Object.fromEntries(dated), { mtime: fixedLocalDate() })
}

function withFixedDate(text: string): string {
  return text.replace(/(<dcterms:(?:created|modified)[^>]*>)[^<]*/g, `$1${fixedDate}`)
}
