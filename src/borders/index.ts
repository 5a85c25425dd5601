/** Door of the borders room: GeoJSON zones to the border between treated and untreated ones, and units placed on it. */
export { type LineLayer, linesOfLayer, readLineLayer } from './barriers.js'
export { type Border, type BorderOptions, type BorderStep, prepareBorder } from './border.js'
export { edgeLengthMetres, geodesicMetres } from './geodesy.js'
export type { MultiPolygonCoords } from './geojson.js'
export type { Piece } from './pieces.js'
export { type BorderPlacement, type Ground, type PlaceOptions, placeOnBorder } from './place.js'
export { buildSegmentTree, type Edges, type Nearest, nearestEdges, type SegmentTree } from './segmentTree.js'
export { readZones, type Zones } from './zones.js'
