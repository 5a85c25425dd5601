/** Door of the jump room: the estimate at one line, on typed arrays. */
export {
  type BandwidthChoice,
  type BandwidthOptions,
  type Bandwidths,
  bandwidthRange,
  bandwidthsFor,
  type Chosen,
  pilotBandwidth,
} from './bandwidth.js'
export {
  type BiasAware,
  type BiasAwareEstimated,
  type BiasAwareInterval,
  type BiasAwareOptions,
  biasAware,
  type SampleAt,
} from './biasAware.js'
export { type CrossedClusters, crossClusters } from './clustersCrossed.js'
export { type Estimated, type JumpFit, type JumpOptions, jumpAt } from './estimate.js'
export { type Inference, infer, satterthwaite } from './inference.js'
export { covarianceMatrix, type Influence, influenceByKey, varianceOf } from './influence.js'
export { countWithin, type Kernel, kernelValue } from './kernel.js'
export { fitLocal, fittedAt, kernelCurve, type LocalFit } from './localPolynomial.js'
export { neighbourResidualsOf } from './neighbours.js'
export { type CarriedOver, planeBandwidth, planeBandwidthRule } from './planeBandwidth.js'
export { buildPlaneSample, type PlaneEntries, type PlaneSample } from './planeSample.js'
export {
  type BySide,
  buildSample,
  type Entries,
  outsideDonut,
  pickCodes,
  pickNumbers,
  type Sample,
  type Side,
  splitSide,
  withinBandwidth,
  withOutcomes,
} from './sample.js'
export { jumpOfSides, type SideChoices, type SideFit, type SideSums, sideSums } from './sideSums.js'
export { eachNeighbourhood, type SpatialPlaces, spatialPlaces } from './spatialPairs.js'
export { type TakeUpRatio, takeUpRatio } from './takeUp.js'
export {
  jumpAtPoint,
  type PlaneBandwidths,
  type PlaneOptions,
  type PlaneVariance,
  type PointEstimated,
  type PointJump,
} from './twoCoordinates.js'
export type { Variance } from './variance.js'
