/** Door of the study room: the study file, from text to a Study with every default filled in, and back. */
export { readPlanAlone, readStudy } from './read.js'
export type {
  Bandwidth,
  BorderLine,
  Cutoff,
  DisclosurePart,
  DistanceLine,
  EstimationPart,
  KernelName,
  LayerNear,
  LayerSource,
  LengthUnit,
  PlanAlone,
  PlanAssumptions,
  PlanPart,
  PoolingPart,
  RecordsPart,
  ScoreLine,
  SharesFile,
  Study,
  TreatedSide,
  VarianceName,
  Variant,
} from './types.js'
export { resolvedStudy } from './write.js'
