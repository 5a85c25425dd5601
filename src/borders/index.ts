/** Door of the borders room: GeoJSON zones to the border between treated and untreated ones, and units placed on it. */
export { type BorderPoint, pointsAlong } from './alongPoints.js'
export { type LineLayer, linesOfLayer, readLineLayer, shareNear } from './barriers.js'
export { type Border, type BorderOptions, prepareBorder } from './border.js'
export type { Corner } from './corners.js'
export {
  type EligibilityRules,
  type Eligible,
  eligible,
  type Ground,
  type LayerShare,
  type WaterfallStep,
} from './eligible.js'
export {
  type Fabric,
  fabricOf,
  type Sliver,
  type Stretch,
  widestSlivers,
  type ZoneBoundary,
  type ZonePair,
} from './fabric.js'
export { borderFit, type PairFit, type SideChanges, unitsChangingSide } from './fabricBorder.js'
export { edgeLengthMetres, geodesicMetres } from './geodesy.js'
export type { MultiPolygonCoords } from './geojson.js'
export { type LayersAlong, layersAlong } from './layersAlong.js'
export { borderOfLines, type Lines, linesOf, type MeasuredColumns, measuredOfColumns } from './lines.js'
export { type LocalMetres, localMetres } from './localMetres.js'
export { type Measured, type MeasuredBorder, measureUnits } from './measured.js'
export { metresToCorner, type RunnerUps, runnerUps } from './neighbourhood.js'
export type { PieceFacts } from './pieceFacts.js'
export type { Piece } from './pieces.js'
export { type BorderPlacement, type PlaceOptions, placeOnBorder } from './place.js'
export { placeboBorder } from './placebo.js'
export { type RandomGround, randomGround } from './randomGround.js'
export { beyondCap, centroidSuspicion, type RepeatedPoints, repeatedPoints } from './repeated.js'
export { outsideName } from './roles.js'
export { buildSegmentTree, type Edges, type Nearest, nearestEdges, type SegmentTree } from './segmentTree.js'
export { type BorderSide, type ShiftedBorder, shiftedBorder } from './shifted.js'
export { type Conflict, type SideRule, zonesByRecord } from './sides.js'
export { snapAgainstBandwidth } from './snapAgainstBandwidth.js'
export { indexUnits, type NearUnits, type UnitIndex, unitsNear } from './unitsNear.js'
export { manyZones, noZone } from './zoneGrid.js'
export { readZones, type Zones } from './zones.js'
