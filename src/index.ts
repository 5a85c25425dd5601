/** Public API. Works unchanged in a browser: reading files is the command line's part. */
export {
  type AnalysisContext,
  type AnalysisInputs,
  analyze,
  type LayerInput,
  type Placed,
  placeStudy,
  wantedColumns,
} from './analyze.js'
export {
  type Border,
  type BorderOptions,
  type Ground,
  geodesicMetres,
  placeOnBorder,
  prepareBorder,
  readLineLayer,
  readZones,
  type Zones,
} from './borders/index.js'
export {
  type BandwidthChoice,
  type Bandwidths,
  bandwidthsFor,
  buildSample,
  type Entries,
  type JumpFit,
  type JumpOptions,
  jumpAt,
  type Kernel,
  type Sample,
  type Variance,
} from './jump/index.js'
export { seededRandom } from './math/index.js'
export type { Line, Placement, SetAside } from './placement.js'
export { type Checked, type Problem, problemText } from './problem.js'
export { drawReport, summaryLines } from './report/index.js'
export type { Analysis, Exhibits, Results } from './results.js'
export { readStudy, resolvedStudy, type Study } from './study/index.js'
export {
  compareLines,
  type LineEffects,
  type Pooled,
  type PoolOptions,
  placeByDistance,
  placeByScore,
  poolLines,
  readSchedule,
  targetEffect,
} from './thresholds/index.js'
