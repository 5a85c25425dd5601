/** A layer as its file has it, before anything is known about its coordinates. */
import type { Feature } from 'geojson'

export interface RawLayer {
  /** `GeoJSON`, `TopoJSON`, `Shapefile`, `GeoPackage`, `KML` or `WKT column`. */
  readonly format: string
  /** Positions in the file's own coordinates, x (east) before y (north). */
  readonly features: readonly Feature[]
  /** The coordinate system that the file itself names, as it names it, and where. */
  readonly crs?: { readonly text: string; readonly where: string }
  /** What would have named it, for messages: `no .prj beside it`. */
  readonly without: string
  /** SHA-256 of all bytes read, hexadecimal; of a shapefile, its parts one after another. */
  readonly sha256: string
  /** A FeatureCollection as parsed, handed on untouched where its positions are longitudes and latitudes. */
  readonly content?: unknown
}
