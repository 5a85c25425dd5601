/** Shapefiles (Esri 1998, Shapefile Technical Description): .shp with .dbf, and .prj and .cpg where they are. */
import type { Feature } from 'geojson'
import { open } from 'shapefile'
import type { Checked, Problem } from '../problem.js'
import type { RawLayer } from './raw.js'
import { type FileSource, sha256Of, stem } from './source.js'

/** Code pages as files name them, under the names that decoders have. */
const encodings: Readonly<Record<string, string>> = {
  '65001': 'utf-8',
  '1252': 'windows-1252',
  '1250': 'windows-1250',
  '1251': 'windows-1251',
  '28591': 'iso-8859-1',
  '88591': 'iso-8859-1',
}

export async function shapefileLayer(file: FileSource, shownAs: string, askedBy: string): Promise<Checked<RawLayer>> {
  const part = (ending: string) =>
    file.neighbours.find((name) => name.toLowerCase() === `${stem(file.name)}.${ending}`.toLowerCase())
  const refuse = (what: string, found: string, todo: string): Checked<never> => {
    const problem: Problem = { file: shownAs, what: `${askedBy}: ${what}`, found, todo }
    return { ok: false, problems: [problem] }
  }
  const dbfName = part('dbf')
  if (dbfName === undefined)
    return refuse('the properties are missing', `no ${stem(file.name)}.dbf beside it`, 'put the .dbf beside the .shp')
  const [dbf, prj, cpg] = await Promise.all(
    [dbfName, part('prj'), part('cpg')].map((name) => (name === undefined ? undefined : file.read(name))),
  )
  try {
    const encoding = encodingOf(cpg)
    const source = await open(file.bytes, dbf, encoding === undefined ? {} : { encoding })
    const features: Feature[] = []
    for (;;) {
      const { done, value } = await source.read()
      if (done) break
      features.push(value)
    }
    const text = prj && new TextDecoder().decode(prj).trim()
    return {
      ok: true,
      value: {
        format: 'Shapefile',
        features,
        ...(text ? { crs: { text, where: `${part('prj')}` } } : {}),
        without: `no ${stem(file.name)}.prj beside it`,
        sha256: sha256Of(file.bytes, ...[dbf, prj, cpg].filter((bytes) => bytes !== undefined)),
      },
    }
  } catch (error) {
    return refuse('not a whole shapefile', (error as Error).message, 'copy it again, with all its parts')
  }
}

/** UTF-8 unless the .cpg says otherwise. */
function encodingOf(cpg: Uint8Array | undefined): string | undefined {
  const named = cpg && new TextDecoder('latin1').decode(cpg).trim()
  if (!named) return 'utf-8'
  const plain = encodings[named.replace(/\D/g, '')] ?? named
  try {
    return new TextDecoder(plain).encoding
  } catch {
    return 'utf-8'
  }
}
