/** Door of the thresholds room: units placed by score or by given distance, and lines compared. */
export {
  type Along,
  type AlongEstimate,
  type AlongOptions,
  type AlongPoint,
  type AlongUnits,
  estimateAlong,
  type UnitsNearPoint,
} from './along.js'
export { type Away, type AwayOptions, awayFromLine, type CurveUnits } from './awayFromLine.js'
export { type CompareOptions, type CompareOutcome, type ComparisonResult, compareLines } from './compare.js'
export type { CutoffSource, MissingKey } from './cutoffs.js'
export { type DistanceInput, placeByDistance } from './distance.js'
export type { LineEffects } from './effects.js'
export { type Labels, lineId } from './labels.js'
export { leaveOneOut, meanWithoutEachLine, perUnitOfDose, type WithoutLine } from './leaveOneOut.js'
export { placeByScore, type ScorePlacement, type ScorePlacementInput } from './placeByScore.js'
export { type Pooled, type PoolOptions, poolLines } from './pool.js'
export { poolBiasAware } from './poolBiasAware.js'
export { readSchedule, type Schedule, type ScheduleRows, scheduleKey } from './schedule.js'
export { placeAgainst, type TreatedSide } from './side.js'
export { type EffectSlope, effectSlope, type SlopeOutcome } from './slope.js'
export { type TargetEffect, type TargetKind, targetEffect } from './targets.js'
