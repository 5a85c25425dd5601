/**
 * borders.geojson: each piece of border with its estimates, as RFC 7946 MultiLineStrings in WGS 84 degrees.
 * Property names are those of lines.csv; estimates carry the outcome's name in front.
 */
import type { Feature, FeatureCollection, MultiLineString } from 'geojson'
import type { Jump, MapExhibit } from '../results.js'
import { isSmall } from './numbers.js'
import { isEstimated, reasonText, type View } from './view.js'

type Piece = MapExhibit['pieces'][number]

export function bordersGeojson(view: View, map: MapExhibit): string {
  const collection: FeatureCollection<MultiLineString> = {
    type: 'FeatureCollection',
    features: map.pieces.map((piece) => pieceFeature(view, piece)),
  }
  return `${JSON.stringify(collection)}\n`
}

function pieceFeature(view: View, piece: Piece): Feature<MultiLineString> {
  const line = piece.line === null ? undefined : view.lineOf.get(piece.line)
  const units = (side: 'untreated' | 'treated') => {
    const value = line?.units[side]
    return value === undefined || isSmall(value, view.smallestCell) ? null : value
  }
  return {
    type: 'Feature',
    properties: {
      line: piece.line,
      label: line?.label ?? null,
      zone_untreated: piece.zones[0],
      zone_treated: piece.zones[1],
      piece: piece.piece,
      length_m: piece.lengthMetres,
      units_untreated: units('untreated'),
      units_treated: units('treated'),
      set_aside: piece.setAside ?? null,
      ...(piece.line === null ? {} : estimateProperties(view, piece.line)),
    },
    geometry: {
      type: 'MultiLineString',
      coordinates: piece.coordinates.map((part) => part.map(([lon, lat]) => [rounded(lon), rounded(lat)])),
    },
  }
}

/** Nine places of a degree are a tenth of a millimetre. */
function rounded(degrees: number): number {
  return Math.round(degrees * 1e9) / 1e9
}

function estimateProperties(view: View, line: string): Record<string, number | string | null> {
  const properties: Record<string, number | string | null> = {}
  for (const { result } of view.outcomes) {
    const jump = result.lines.find((candidate) => candidate.line === line)
    const estimate = jump && isEstimated<Jump & { line: string }>(jump) ? jump.corrected : undefined
    properties[`${result.outcome}_estimate`] = estimate?.estimate ?? null
    properties[`${result.outcome}_standard_error`] = estimate?.standard_error ?? null
    properties[`${result.outcome}_low`] = estimate?.low ?? null
    properties[`${result.outcome}_high`] = estimate?.high ?? null
    if (jump && 'not_estimated' in jump)
      properties[`${result.outcome}_not_estimated`] = reasonText(view, jump.not_estimated)
  }
  return properties
}
