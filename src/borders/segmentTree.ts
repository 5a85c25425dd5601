/** Distances from points to many lon/lat edges: the one place other files of this room import them from. */
export { type Nearest, nearestEdges } from './nearest.js'
export { buildSegmentTree, type SegmentTree } from './segmentTreeBuild.js'
export { edgesNearEdge } from './segmentTreeNear.js'
export { along, type Edges } from './segmentTreeSplit.js'
