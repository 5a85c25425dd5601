/** KML (OGC 12-007r2), whose coordinates are always WGS 84 longitude, latitude; .kmz is a zip of it. */
import { kml } from '@tmcw/togeojson'
import { DOMParser } from '@xmldom/xmldom'
import type { Feature, Geometry, Polygon } from 'geojson'
import type { Checked, Problem } from '../problem.js'
import type { RawLayer } from './raw.js'
import { type FileSource, sha256Of } from './source.js'

/** KML has no multipolygon: a collection of geometries of one kind is that. */
function withOneKind(feature: Feature): Feature {
  const { geometry } = feature
  if (geometry?.type !== 'GeometryCollection') return feature
  const [first] = geometry.geometries
  const isSimple = first?.type === 'Point' || first?.type === 'LineString' || first?.type === 'Polygon'
  if (!isSimple || geometry.geometries.some(({ type }) => type !== first.type)) return feature
  const coordinates = geometry.geometries.map((part) => (part as Polygon).coordinates)
  return { ...feature, geometry: { type: `Multi${first.type}`, coordinates } as Geometry }
}

export function kmlLayer(file: FileSource, shownAs: string, askedBy: string): Checked<RawLayer> {
  const refuse = (found: string): Checked<never> => {
    const todo = 'write it again from the program it came from'
    const problem: Problem = { file: shownAs, what: `${askedBy}: not KML that can be read`, found, todo }
    return { ok: false, problems: [problem] }
  }
  try {
    const faults: string[] = []
    const text = new TextDecoder().decode(file.bytes)
    const onError = (level: string, message: string) => {
      if (level !== 'warning') faults.push(message)
    }
    const document = new DOMParser({ onError }).parseFromString(text, 'text/xml')
    if (faults.length > 0) return refuse(faults[0].split('\n')[0])
    const features = (kml(document as never).features as Feature[]).map(withOneKind)
    return {
      ok: true,
      value: {
        format: 'KML',
        features,
        crs: { text: 'OGC:CRS84', where: 'the format' },
        without: '',
        sha256: sha256Of(file.bytes),
      },
    }
  } catch (error) {
    return refuse((error as Error).message.split('\n')[0])
  }
}
